"""The command line as people and scripts run it: child processes, a real service, a real terminal."""

from __future__ import annotations

import json
import os
import pty
import re
import select
import signal
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest

ROOT = Path(__file__).resolve().parents[2]
GRAPHS = ROOT / "deploy" / "demo" / "graphs"
COMMAND = [sys.executable, "-m", "nearchord.cli"]
ASK = ("--question", "independent-set")
DEADLINE = 240.0


def environment(**more: str) -> dict[str, str]:
    """The caller's environment without its nearchord settings, with this checkout's packages."""
    kept = {key: value for key, value in os.environ.items() if not key.startswith("NEARCHORD_")}
    paths = [str(ROOT / "client"), str(ROOT / "service")]
    return {**kept, "PYTHONPATH": os.pathsep.join(paths), "TERM": "xterm", **more}


def nearchord(*arguments: str, **settings: str) -> subprocess.CompletedProcess[str]:
    """Run one command to its end."""
    return subprocess.run(
        [*COMMAND, *arguments],
        capture_output=True,
        text=True,
        timeout=DEADLINE,
        env=environment(**settings),
        check=False,
    )


@pytest.fixture(scope="module")
def server(tmp_path_factory: pytest.TempPathFactory) -> Iterator[str]:
    """`nearchord serve` on a free port; SIGTERM ends it with code 0."""
    data = tmp_path_factory.mktemp("data")
    words = [*COMMAND, "serve", "--data", str(data), "--listen", "127.0.0.1:0", "--metrics", "none", "--workers", "2"]
    with subprocess.Popen(words, stdout=subprocess.PIPE, text=True, env=environment()) as process:
        try:
            assert process.stdout is not None
            line = process.stdout.readline()
            match = re.fullmatch(r"nearchord accepts calls on (127\.0\.0\.1:\d+), .*\n", line)
            assert match is not None, line
            yield match[1]
        finally:
            process.send_signal(signal.SIGTERM)
            code = process.wait(DEADLINE)
        assert code == 0


@pytest.fixture(scope="module")
def crowded(tmp_path_factory: pytest.TempPathFactory) -> Path:
    """A random graph far from chordal: no worker settles it within the seconds that these tests take."""
    n = 200
    u, v = np.nonzero(np.triu(np.random.default_rng(7).random((n, n)) < 0.2, k=1))
    lines = [f"p edge {n} {len(u)}", *(f"e {a + 1} {b + 1}" for a, b in zip(u, v, strict=True))]
    file = tmp_path_factory.mktemp("crowded") / "crowded.col"
    file.write_text("\n".join(lines) + "\n", encoding="utf-8")
    return file


def test_solve_needs_no_server(tmp_path: Path) -> None:
    """A private service answers; what `--json` printed passes `check`, which cannot confirm a bound without a proof."""
    graph = GRAPHS / "sites-valley.graphml"
    solved = nearchord("solve", str(graph), *ASK, "--json")
    assert (solved.returncode, solved.stderr) == (0, "")
    found = json.loads(solved.stdout)
    assert (found["verdict"], found["value"], found["bound"]) == ("PROVEN", 12_909, 12_909)
    answer = tmp_path / "answer.json"
    answer.write_text(solved.stdout, encoding="utf-8")
    checked = nearchord("check", str(graph), str(answer))
    assert checked.returncode == 1
    assert "confirmed: " in checked.stdout
    assert "not confirmed: " in checked.stdout
    answer.write_text(json.dumps({**found, "value": found["value"] + 1}), encoding="utf-8")
    wrong = nearchord("check", str(graph), str(answer))
    assert (wrong.returncode, wrong.stdout) == (1, "")
    assert wrong.stderr.startswith("error: ")


def test_a_fill_is_answered_and_confirmed_from_what_was_printed(server: str, tmp_path: Path) -> None:
    """From file to confirmed over a real service: pairs by name, classes, and a bound that needs no trust.

    The file has weights, which the question does not take and which therefore stay behind.
    """
    graph = GRAPHS / "windows-night.graphml"
    solved = nearchord("solve", str(graph), "--question", "fill", "--fill", "50", "--json", "--server", server)
    assert (solved.returncode, solved.stderr) == (0, "")
    found = json.loads(solved.stdout)
    assert (found["verdict"], found["fill"], found["fill_lower_bound"], found["proof"]) == (
        "PROVEN",
        2,
        2,
        "certificate",
    )
    assert (found["chordal"], found["interval"], found["split"]) == (False, False, False)
    assert all(name.startswith("BO-") for pair in found["fill_edges"] for name in pair)
    answer = tmp_path / "answer.json"
    answer.write_text(solved.stdout, encoding="utf-8")
    checked = nearchord("check", str(graph), str(answer))
    assert (checked.returncode, checked.stderr) == (0, "")
    assert "not confirmed" not in checked.stdout
    answer.write_text(json.dumps({**found, "fill_edges": found["fill_edges"][::-1][:1] * 2}), encoding="utf-8")
    assert nearchord("check", str(graph), str(answer)).returncode == 1


def test_a_fill_budget_below_the_fill_is_refused_with_its_witness(server: str, tmp_path: Path) -> None:
    """OVER_FILL whatever --when-over says, and the packing shows why."""
    graph = GRAPHS / "windows-night.graphml"
    solved = nearchord("solve", str(graph), "--question", "fill", "--fill", "1", "--json", "--server", server)
    found = json.loads(solved.stdout)
    assert (solved.returncode, found["verdict"], found["bound"]) == (1, "OVER_FILL", 2)
    assert found["provenance"]["when_over"] == "bound"
    answer = tmp_path / "answer.json"
    answer.write_text(solved.stdout, encoding="utf-8")
    checked = nearchord("check", str(graph), str(answer))
    assert (checked.returncode, checked.stderr) == (0, "")
    assert "confirmed: the bound 2" in checked.stdout


def test_a_structure_says_what_each_question_would_take(server: str) -> None:
    """States by question, as programs rely on them, and a table for people."""
    graph = str(GRAPHS / "windows-night.graphml")
    solved = nearchord("solve", graph, "--question", "structure", "--json", "--server", server)
    found = json.loads(solved.stdout)
    assert (solved.returncode, found["verdict"]) == (0, "PROVEN")
    assert set(found["states"]) == {
        "independent-set",
        "colourable-subgraph",
        "colourable-subgraph q=3",
        "induced-forest",
    }
    assert all(states > 0 for states in found["states"].values())
    assert (found["components"], found["fill_cores"], found["largest_core"]) == (1, 2, 10)
    shown = nearchord("solve", graph, "--question", "structure", "--server", server).stdout
    assert shown.count(" yes\n") == 4


def test_submitted_job_is_found_again(server: str) -> None:
    """`submit` prints an id; `answer`, `watch`, `jobs` and `cancel` take it from there."""
    graph = GRAPHS / "windows-night.graphml"
    submitted = nearchord("submit", str(graph), *ASK, "--label", "found again", NEARCHORD_SERVER=server)
    assert (submitted.returncode, submitted.stderr) == (0, "")
    job = submitted.stdout.strip()
    answered = nearchord("answer", job, "--json", "--server", server)
    found = json.loads(answered.stdout)
    assert (answered.returncode, found["job"], found["value"]) == (0, job, 812)
    assert all(name.startswith("BO-") for name in found["chosen"])
    watched = nearchord("watch", job, "--server", server)
    assert [word for word in watched.stdout.split() if word in {"WAITING:", "SOLVING", "DONE"}][0::2] == [
        "WAITING:",
        "DONE",
    ]
    listed = nearchord("jobs", "--json", "--label", "found again", "--server", server)
    assert [json.loads(line)["job"] for line in listed.stdout.splitlines()] == [job]
    assert "PROVEN" in nearchord("cancel", job, "--server", server).stdout


def test_batch_answers_every_graph_of_a_folder(server: str) -> None:
    """One line a file, all PROVEN, in the order of the names."""
    ran = nearchord("batch", str(GRAPHS), "--question", "vertex-cover", "--server", server)
    lines = [json.loads(line) for line in ran.stdout.splitlines()]
    assert (ran.returncode, ran.stderr) == (0, "")
    assert [Path(line["file"]).name for line in lines] == sorted(p.name for p in GRAPHS.iterdir() if p.suffix != ".txt")
    assert {line["verdict"] for line in lines} == {"PROVEN"}


def test_server_side_faults_are_one_message(server: str) -> None:
    """What the server rejects, and what it does not know, ends with code 2 and a remedy."""
    graph = str(GRAPHS / "windows-night.graphml")
    rejected = nearchord("solve", graph, *ASK, "--seconds", "0", "--server", server)
    unknown = nearchord("answer", "0" * 32, "--server", server)
    for ran in (rejected, unknown):
        assert (ran.returncode, ran.stdout) == (2, "")
        assert ran.stderr.startswith("error: ")
        assert ran.stderr.count("\n") == 1
    assert "seconds" in rejected.stderr


def test_nobody_there_is_code_four() -> None:
    """A port where nothing listens."""
    ran = nearchord("jobs", "--server", "127.0.0.1:1")
    assert (ran.returncode, ran.stdout) == (4, "")
    assert "127.0.0.1:1" in ran.stderr


@dataclass
class Terminal:
    """A command whose stderr is a terminal of 80 columns, and what it has drawn there so far."""

    process: subprocess.Popen[bytes]
    screen: int
    drawn: bytes = b""
    printed: bytes = b""

    def read_until(self, words: bytes | None) -> None:
        """Read the terminal until the words stand there, or (None) until the command closes it."""
        limit = time.monotonic() + DEADLINE
        while words is None or words not in self.drawn:
            ready, _, _ = select.select([self.screen], [], [], max(0.0, limit - time.monotonic()))
            assert ready, self.drawn
            try:
                more = os.read(self.screen, 65_536)
            except OSError:  # Linux says EIO when the last holder of the other end is gone
                more = b""
            if not more:
                assert words is None, self.drawn
                return
            self.drawn += more

    def output(self) -> bytes:
        """What the command printed on stdout, once it has ended."""
        assert self.process.stdout is not None
        if not self.process.stdout.closed:
            self.printed, _ = self.process.communicate(timeout=DEADLINE)
        return self.printed


@pytest.fixture
def terminal() -> Iterator[Callable[..., Terminal]]:
    """Start commands on a terminal: `terminal("solve", ..., NO_COLOR="1")` -> Terminal."""
    started: list[Terminal] = []

    def start(*arguments: str, **settings: str) -> Terminal:
        screen, theirs = pty.openpty()
        process = subprocess.Popen(
            [*COMMAND, *arguments],
            stdout=subprocess.PIPE,
            stderr=theirs,
            env=environment(COLUMNS="80", LINES="24", **settings),
        )
        os.close(theirs)
        started.append(Terminal(process, screen))
        return started[-1]

    yield start
    for each in started:
        each.process.kill()
        each.output()
        os.close(each.screen)


@pytest.mark.parametrize("settings", [{}, {"NO_COLOR": "1"}], ids=["colour", "no colour"])
def test_progress_is_drawn_on_a_terminal(
    terminal: Callable[..., Terminal], server: str, settings: dict[str, str]
) -> None:
    """Phases on stderr, the object alone on stdout, and no colour for those who want none."""
    shown = terminal("solve", str(GRAPHS / "sites-province.col"), *ASK, "--json", "--server", server, **settings)
    shown.read_until(None)
    assert json.loads(shown.output())["verdict"] == "PROVEN"
    assert shown.process.returncode == 0
    assert "━".encode() in shown.drawn
    coloured = re.search(rb"\x1b\[[0-9;]*3[0-9]", shown.drawn) is not None
    assert coloured == (not settings)


def test_interrupt_detaches_and_the_job_goes_on(terminal: Callable[..., Terminal], server: str, crowded: Path) -> None:
    """Ctrl-C ends the waiting only: the id in the message names a job that is still being solved."""
    waiting = terminal("solve", str(crowded), *ASK, "--seconds", "600", "--server", server)
    waiting.read_until(b"improve")
    waiting.process.send_signal(signal.SIGINT)
    waiting.read_until(None)
    assert waiting.output() == b""
    assert waiting.process.returncode == 3
    match = re.search(rb"nearchord answer ([0-9a-f]{32}) --server", waiting.drawn)
    assert match is not None, waiting.drawn
    job = match[1].decode()
    early = nearchord("answer", job, "--no-wait", "--server", server)
    assert early.returncode == 1
    assert nearchord("cancel", job, "--server", server).returncode == 0
    ended = nearchord("answer", job, "--json", "--server", server)
    assert (ended.returncode, json.loads(ended.stdout)["verdict"]) == (3, "CANCELLED")


def test_demo_confirms_every_answer(server: str) -> None:
    """The demo's table has a line for each graph and ends with code 0."""
    ran = nearchord("demo", "--graphs", str(GRAPHS), "--server", server)
    assert (ran.returncode, ran.stderr) == (0, "")
    assert ran.stdout.count("PROVEN   ") == 9
    assert "9 of 9 answers confirmed" in ran.stdout
