"""Messages between processes, the shared cells, and the memory meter."""

from __future__ import annotations

import os

import nearchord_solve
import numpy as np
import pytest
from nearchord_service.model.event import Phase
from nearchord_service.work.local import cells, wire
from nearchord_service.work.local.cells import CellBlock
from nearchord_service.work.local.limits import Meter


@pytest.fixture
def ends():
    ours, theirs = wire.pair()
    with ours, theirs:
        yield ours, theirs


@pytest.mark.parametrize("size", [0, 1, wire.PACKET_BYTES - 64, wire.PACKET_BYTES, 5_000_000])
def test_messages_arrive_whole(ends, size):
    """Small messages and such that need a memory file arrive as they were sent, both ways, without blocking."""
    ours, theirs = ends
    for source, target in ((ours, theirs), (theirs, ours)):
        wire.send(source, (size, os.urandom(1) * size))
        (told, data), fds = wire.receive(target)
        assert (told, len(data), fds) == (size, size, [])


def test_descriptors_travel_with_a_message(ends):
    """The other end gets a descriptor of its own."""
    ours, theirs = ends
    reader, writer = os.pipe()
    wire.send(ours, "here", [writer])
    os.close(writer)
    message, (copy,) = wire.receive(theirs)
    os.write(copy, b"x")
    assert (message, os.read(reader, 1)) == ("here", b"x")
    os.close(copy)
    os.close(reader)


def test_nothing_to_read_and_a_closed_end_are_told_apart(ends):
    """A server's end that has nothing says so at once; a closed one says that it ended."""
    ours, theirs = ends
    with pytest.raises(BlockingIOError):
        wire.receive(ours)
    theirs.close()
    with pytest.raises(EOFError):
        wire.receive(ours)
    with pytest.raises(OSError, match="pipe"):
        wire.send(ours, "anyone?")


def test_large_messages_leave_no_descriptors_open(ends):
    """Descriptors of memory files are closed on both sides."""
    ours, theirs = ends
    before = len(os.listdir("/proc/self/fd"))
    for _ in range(3):
        wire.send(ours, bytes(1_000_000))
        wire.receive(theirs)
    assert len(os.listdir("/proc/self/fd")) == before


@pytest.fixture
def block():
    made = CellBlock(2)
    yield made
    made.close()


def test_fresh_cells_show_nothing(block):
    """After clearing, figures are unknown and the task has not started."""
    block.ask_stop(1, cells.STOP_CANCEL)
    block.clear(1)
    seen = block.sample(1, 0.5)
    assert (seen.phase, seen.fraction_done, seen.seconds) == (Phase.READ, 0.0, 0.5)
    assert {seen.fill, seen.fill_lower_bound, seen.bags_done, seen.bags, seen.states, seen.incumbent, seen.bound} == {
        None
    }
    assert block.started(1) is None


def test_slots_do_not_touch_each_other(block):
    """What one slot shows is not seen in the other."""
    block.clear(0)
    block.clear(1)
    words = block._words
    words[cells.STRIDE + cells.BOUND], words[cells.STRIDE + cells.HAS_BOUND] = -3, 1
    words[cells.STRIDE + cells.STARTED] = 2_500_000_000
    assert block.sample(1, 0.0).bound == -3
    assert block.started(1) == 2.5
    assert block.sample(0, 0.0).bound is None
    assert block.started(0) is None


@pytest.mark.parametrize(("word", "phase"), [(-5, Phase.READ), (3, Phase.TREE), (6, Phase.IMPROVE), (9, Phase.IMPROVE)])
def test_phases_out_of_range_are_shown_as_the_nearest(block, word, phase):
    """A solve at its end, or a broken one, cannot break its watcher."""
    block._words[cells.PHASE] = word
    assert block.sample(0, 0.0).phase is phase


@pytest.mark.parametrize(("step", "steps", "fraction"), [(1, 0, 0.0), (1, 4, 0.25), (9, 4, 1.0), (-1, 4, 0.0)])
def test_fraction_stays_between_nothing_and_all(block, step, steps, fraction):
    """Steps that run over or are unknown stay in range."""
    block._words[cells.STEP], block._words[cells.STEPS] = step, steps
    assert block.sample(0, 0.0).fraction_done == fraction


def test_memory_limit_holds_inside_and_ends_outside():
    """Beyond the limit an allocation fails; afterwards it succeeds."""
    meter = Meter()
    with meter.limited(16 * 2**20), pytest.raises(MemoryError):
        bytearray(64 * 2**20)
    assert len(bytearray(64 * 2**20)) == 64 * 2**20


def test_meter_sees_memory_come_and_go():
    """Resident and peak memory follow what is held; the peak begins anew on demand."""
    meter = Meter()
    before = meter.resident_bytes()
    held = bytearray(64 * 2**20)
    assert meter.resident_bytes() > before + 32 * 2**20
    assert meter.data_bytes() > 64 * 2**20
    del held
    meter.reset_peak()
    low = meter.peak_bytes()
    held = bytearray(64 * 2**20)
    assert meter.peak_bytes() > low + 32 * 2**20
    del held


def test_cells_lie_where_the_solver_has_them():
    """The server reads what the solver writes; their layouts are stated twice and must agree."""
    monitor = nearchord_solve.Monitor
    names = ["STOP", "PHASE", "STEP", "STEPS", "FILL", "FILL_LOWER", "BAGS_DONE", "BAGS", "STATES"]
    names += ["HAS_INCUMBENT", "INCUMBENT", "HAS_BOUND", "BOUND"]
    assert {name: getattr(cells, name) for name in names} == {name: getattr(monitor, name) for name in names}
    assert cells.MONITOR_CELLS == monitor.CELLS
    stops = nearchord_solve.Stop
    assert (cells.STOP_SECONDS, cells.STOP_CANCEL) == (stops.SECONDS, stops.CANCEL)
    solver_phases = [phase.name.lower() for phase in sorted(nearchord_solve.Phase)]
    assert solver_phases == [*(phase.value for phase in Phase), "done"]


def test_cells_are_cleared_to_what_a_fresh_monitor_shows(block):
    """Between hand-over and the solver's first word the server sees the same as after it."""
    block.clear(0)
    fresh = nearchord_solve.Monitor(np.zeros(cells.MONITOR_CELLS, np.int64)).cells
    assert block._words[: cells.MONITOR_CELLS].tolist() == fresh.tolist()
