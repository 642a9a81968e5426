"""Live progress on stderr, and only on a terminal: two lines for a job or a batch, gone when it ends."""

from __future__ import annotations

import sys
import threading
import time
from collections import Counter
from collections.abc import Iterator
from contextlib import contextmanager
from types import TracebackType
from typing import Self

from rich.console import Console, Group
from rich.live import Live
from rich.progress_bar import ProgressBar
from rich.table import Table
from rich.text import Text

import nearchord

COLD_AFTER_SECONDS = 4.0
"""A warm kernel cache warms workers faster than this; when it takes longer, kernels are being compiled."""


class Display:
    """Two lines on the terminal; everywhere else every call does nothing that can be seen."""

    def __init__(self) -> None:
        self._console = Console(file=sys.stderr, highlight=False)
        self._live: Live | None = None
        self._began = time.monotonic()
        self._note = "submitting"
        self._fraction: float | None = None
        self.waiting = True

    @property
    def shown(self) -> bool:
        """Whether anybody can see it."""
        return sys.stderr.isatty()

    def __enter__(self) -> Self:
        self._began = time.monotonic()
        self._draw()
        return self

    def __exit__(
        self, kind: type[BaseException] | None, error: BaseException | None, trace: TracebackType | None
    ) -> None:
        self._erase()

    def _draw(self) -> None:
        if self.shown:
            self._live = Live(console=self._console, get_renderable=self._render, transient=True, refresh_per_second=8)
            self._live.start()

    def _erase(self) -> None:
        if self._live is not None:
            self._live.stop()
            self._live = None

    @contextmanager
    def aside(self) -> Iterator[None]:
        """Out of the way while something is written to stdout, should that be the same terminal."""
        if self._live is None or not sys.stdout.isatty():
            yield
            return
        self._erase()
        try:
            yield
        finally:
            self._draw()

    def say(self, note: str, fraction: float | None = None) -> None:
        """Show what is going on, with how far it is (None: unknown)."""
        self._note, self._fraction = note, fraction

    def load(self, load: nearchord.Load) -> None:
        """Show why a job waits."""
        if load.slots.warming and load.slots.warm_fraction < 1 and not (load.slots.idle or load.slots.busy):
            cold = time.monotonic() - self._began > COLD_AFTER_SECONDS
            self.say("compiling kernels, first start only" if cold else "starting workers", load.slots.warm_fraction)
        else:
            self.say(f"waiting, {load.waiting:,} in the queue")

    def figures(self) -> str:
        """The second line."""
        return ""

    def _render(self) -> Group:
        line = Table.grid(expand=True, padding=(0, 2, 0, 0))
        line.add_column(no_wrap=True)
        line.add_column(ratio=1)
        line.add_column(justify="right", no_wrap=True)
        line.add_column(justify="right", no_wrap=True)
        seconds = time.monotonic() - self._began
        done = self._fraction
        bar = ProgressBar(total=1.0, completed=done or 0.0, pulse=done is None, animation_time=seconds)
        percent = "" if done is None else f"{int(100 * done)} %"
        line.add_row(Text(self._note), bar, Text(percent), Text(f"{seconds:.1f} s"))
        return Group(line, Text(self.figures(), overflow="ellipsis", no_wrap=True))


class JobDisplay(Display):
    """Progress of one job: phase, fill, bags, value and bound, seconds."""

    def __init__(self) -> None:
        super().__init__()
        self._progress: nearchord.Progress | None = None

    def event(self, event: nearchord.Event) -> None:
        """Show an event of the job."""
        if event.progress is not None:
            self._progress = event.progress
            self.waiting = False
            self.say(f"{event.progress.phase or 'start'}".lower(), event.progress.fraction_done)
        elif event.stage is not None:
            self.waiting = event.stage is nearchord.Stage.WAITING
            self.say(str(event.stage).lower())

    def figures(self) -> str:
        """Fill, bags, value and bound as far as they are known."""
        progress = self._progress
        if progress is None:
            return ""
        shown = []
        if progress.fill is not None:
            least = f" (at least {progress.fill_lower_bound:,})" if progress.fill_lower_bound else ""
            shown.append(f"fill {progress.fill:,}{least}")
        if progress.bags is not None:
            shown.append(f"bags {progress.bags_done or 0:,}/{progress.bags:,}")
        if progress.incumbent is not None:
            shown.append(f"value {progress.incumbent:,}")
        if progress.bound is not None:
            shown.append(f"bound {progress.bound:,}")
        return "   ".join(shown)


class BatchDisplay(Display):
    """Progress of many jobs: how many ended, and how."""

    def __init__(self, jobs: int) -> None:
        super().__init__()
        self._jobs = jobs
        self._stages: dict[int, nearchord.Stage] = {}
        self._verdicts: Counter[str] = Counter()

    def event(self, event: nearchord.Event) -> None:
        """Count an event of the batch."""
        if event.stage is None:
            return
        self._stages[event.batch_index] = event.stage
        self.waiting = self.waiting and event.stage is nearchord.Stage.WAITING
        if event.verdict is not None:
            self._verdicts[str(event.verdict)] += 1
        if not self.waiting:
            done = self._verdicts.total()
            self.say(f"{done:,} of {self._jobs:,} jobs", done / self._jobs)

    def figures(self) -> str:
        """Jobs being solved, and verdicts so far."""
        solving = sum(stage is nearchord.Stage.SOLVING for stage in list(self._stages.values()))
        counts = [f"{verdict} {count:,}" for verdict, count in sorted(self._verdicts.items())]
        return "" if self.waiting else "   ".join([f"solving {solving:,}", *counts])


def follow_load(service: nearchord.Service, display: Display) -> None:
    """Show live figures of the service, in the background, for as long as the display's jobs wait."""

    def follow() -> None:
        try:
            for load in service.load(interval=0.4):
                if not display.waiting:
                    return
                display.load(load)
        except nearchord.NearchordError:
            return  # decoration only: whoever waits for the job hears of a lost connection

    if display.shown:
        threading.Thread(target=follow, name="nearchord-load", daemon=True).start()
