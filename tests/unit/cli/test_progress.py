"""The two live lines: what they say and that they fit."""

from __future__ import annotations

import io

import nearchord
import pytest
from nearchord.cli.progress import BatchDisplay, Display, JobDisplay
from rich.console import Console
from unit.cli.conftest import NOW


def drawn(display: Display, width: int) -> list[str]:
    """The lines as a terminal of this width would show them."""
    console = Console(file=io.StringIO(), width=width, force_terminal=True, no_color=True, legacy_windows=False)
    with console.capture() as capture:
        console.print(display._render())
    return [line.rstrip() for line in capture.get().splitlines()]


def sweeping(**changes: int | None) -> nearchord.Event:
    """An event in the middle of a sweep."""
    figures = {"fill": 1_234, "fill_lower_bound": 900, "bags_done": 812, "bags": 12_930, "states": 77}
    values = {"incumbent": 4_210_000, "bound": 4_300_000}
    progress = nearchord.Progress(
        phase=nearchord.Phase.SWEEP, fraction_done=0.63, seconds=1.5, **{**figures, **values, **changes}
    )
    return nearchord.Event(7, "1" * 32, 0, NOW, 1, progress=progress)


@pytest.mark.parametrize("width", [80, 120])
def test_job_shows_phase_fill_bags_value_and_bound(width: int) -> None:
    """All of it fits a terminal of usual width."""
    display = JobDisplay()
    display.event(sweeping())
    first, second = drawn(display, width)
    assert first.startswith("sweep")
    assert "63 %" in first
    assert second == "fill 1,234 (at least 900)   bags 812/12,930   value 4,210,000   bound 4,300,000"


def test_figures_that_are_not_known_are_left_out() -> None:
    """No placeholders."""
    display = JobDisplay()
    display.event(sweeping(bags=None, bags_done=None, incumbent=None, bound=None, fill_lower_bound=0))
    assert drawn(display, 80)[1] == "fill 1,234"


def test_narrow_terminals_get_two_lines_all_the_same() -> None:
    """Nothing wraps, so the display can be drawn over itself."""
    display = JobDisplay()
    display.event(sweeping())
    lines = drawn(display, 30)
    assert len(lines) == 2
    assert all(len(line) <= 30 for line in lines)


def warming(fraction: float) -> nearchord.Load:
    """A service that has nothing but workers being started."""
    slots = nearchord.Slots(warming=2, idle=0, busy=0, warm_fraction=fraction)
    return nearchord.Load(NOW, 1, 0, 0.0, slots, 1, 0, 0.0, 0, ())


def test_cold_start_is_told_from_a_warm_one(monkeypatch: pytest.MonkeyPatch) -> None:
    """Kernels are said to compile only when the start takes longer than a warm cache would."""
    now = 100.0
    monkeypatch.setattr("nearchord.cli.progress.time.monotonic", lambda: now)
    display = JobDisplay()
    display.load(warming(0.25))
    assert drawn(display, 80)[0].startswith("starting workers")
    now += 10
    display.load(warming(0.42))
    first = drawn(display, 80)[0]
    assert first.startswith("compiling kernels, first start only")
    assert "42 %" in first


def test_batch_counts_ended_jobs_and_their_verdicts() -> None:
    """The bar is the share of jobs that ended."""
    display = BatchDisplay(4)
    ends = [nearchord.Verdict.PROVEN, nearchord.Verdict.PROVEN, nearchord.Verdict.BOUNDED]
    for index, verdict in enumerate(ends):
        display.event(nearchord.Event(index, "j", index, NOW, 1, stage=nearchord.Stage.DONE, verdict=verdict))
    display.event(nearchord.Event(9, "j", 3, NOW, 1, stage=nearchord.Stage.SOLVING))
    first, second = drawn(display, 80)
    assert first.startswith("3 of 4 jobs")
    assert "75 %" in first
    assert second == "solving 1   BOUNDED 1   PROVEN 2"


def test_nothing_is_drawn_where_no_terminal_is(capsys: pytest.CaptureFixture[str]) -> None:
    """Logs and pipes stay clean."""
    with JobDisplay() as display:
        display.event(sweeping())
    captured = capsys.readouterr()
    assert (captured.out, captured.err) == ("", "")
