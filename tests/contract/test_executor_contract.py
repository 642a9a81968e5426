"""What every executor keeps to. A new kind of executor joins by a row in `EXECUTORS`."""

from __future__ import annotations

import pytest
from contract.executor_stage import Stage, edgeless, task
from contract.scripted_solver import Script
from nearchord_service.model.answer import ElementType, ProofKind
from nearchord_service.model.content import Bytes
from nearchord_service.model.event import Phase
from nearchord_service.model.question import Question, QuestionName
from nearchord_service.model.stage import Verdict
from nearchord_service.work.local import LocalExecutor
from nearchord_service.work.port import LossCause, Lost, Solved, TaskKey

SLOTS = 2
MIB = 2**20


def local(**options):
    return LocalExecutor(SLOTS, grace_seconds=0.3, solver="contract.scripted_solver", **options)


EXECUTORS = {"local": local}


@pytest.fixture(params=EXECUTORS.values(), ids=EXECUTORS.keys())
def build(request):
    return request.param


@pytest.fixture
def stage(build):
    made = Stage(build())
    made.ready(SLOTS)
    yield made
    made.executor.stop(0.0)


def test_answer_comes_back_whole(stage):
    """Value, bound, choice, counts, proof and provenance arrive as the solver gave them."""
    end = stage.end(Script.ANSWER, weights=[3, 9, 4, 1])
    assert isinstance(end, Solved)
    answer = end.answer
    assert (answer.verdict, answer.value, answer.bound) == (Verdict.PROVEN, (9, 1), (9, 1))
    (chosen,) = answer.columns
    assert (chosen.name, chosen.type, chosen.data) == ("chosen", ElementType.UINT32, b"\1\0\0\0")
    assert (answer.states, answer.bags, answer.largest_bag, answer.parts, answer.fill_cores) == (3, 2, 2, 1, 0)
    assert (answer.proof, answer.proof_kinds) == (ProofKind.CERTIFICATE, (ProofKind.CERTIFICATE,))
    assert answer.solver_version == "scripted"
    assert [phase for phase, _ in answer.phase_seconds] == [Phase.READ, Phase.SWEEP]
    assert answer.seconds == pytest.approx(sum(seconds for _, seconds in answer.phase_seconds))
    assert answer.peak_memory_bytes > 0


def test_many_tasks_end_once_each(stage):
    """Every task that was handed over ends exactly once, also those that had to wait for a slot."""
    tasks = [task(Script.ANSWER) for _ in range(100)]
    for one in tasks:
        stage.executor.run(one)
    stage.audience.wait(lambda: len(stage.audience.ends) >= len(tasks))
    stage.ready(SLOTS)
    assert sorted(key.job_id for key, _ in stage.audience.ends) == sorted(one.key.job_id for one in tasks)
    assert all(isinstance(end, Solved) for _, end in stage.audience.ends)


def test_large_contents_inline_and_in_files_give_the_same(stage, tmp_path):
    """Megabytes arrive whole, whether they travel with the task or lie in a file."""
    n = 300_000
    weights = list(range(n))
    inline = stage.end(Script.ANSWER, vertices=n, weights=weights)
    path = tmp_path / "graph"
    path.write_bytes(edgeless(n))
    filed = stage.end(Script.ANSWER, vertices=n, weights=weights, graph=Bytes(None, path))
    assert inline.answer.value == filed.answer.value == (n - 1, 1)


def test_seconds_run_out_and_the_solve_listens(stage):
    """A solve that watches its stop flag answers by itself at the deadline."""
    end = stage.end(Script.UNTIL_STOPPED, seconds=0.05)
    assert isinstance(end, Solved)
    assert end.answer.verdict is Verdict.BOUNDED
    assert end.answer.seconds >= 0.05


@pytest.mark.parametrize("script", [Script.DEAF, Script.STOP_SELF])
def test_seconds_run_out_and_the_solve_does_not_listen(stage, script):
    """A solve that neither answers nor stops, or a stopped process, is killed and named; its last figures survive."""
    end = stage.end(script, seconds=0.05)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.SECONDS
    assert "0.05 seconds" in end.reason
    assert end.progress.phase is Phase.SWEEP
    assert end.progress.fraction_done == 0.25
    assert end.progress.bound == (9 if script is Script.DEAF else None)
    stage.ready(SLOTS)


def test_cancel_is_heard(stage):
    """A solve that listens ends as CANCELLED, without a choice."""
    one = stage.run(Script.UNTIL_STOPPED)
    stage.audience.first_progress(one)
    stage.executor.cancel(one.key)
    end = stage.audience.end_of(one)
    assert isinstance(end, Solved)
    assert end.answer.verdict is Verdict.CANCELLED
    assert end.answer.columns == ()
    assert end.answer.value is None


def test_cancel_kills_what_does_not_listen(stage):
    """A deaf solve ends by force, and the slot works again."""
    one = stage.run(Script.DEAF)
    stage.audience.first_progress(one)
    stage.executor.cancel(one.key)
    end = stage.audience.end_of(one)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.CANCEL
    stage.ready(SLOTS)
    assert isinstance(stage.end(Script.ANSWER), Solved)


def test_cancel_of_a_task_that_waits_for_a_slot(stage):
    """A task that has not begun ends at once."""
    busy = [stage.run(Script.UNTIL_STOPPED) for _ in range(SLOTS)]
    waiting = stage.run(Script.ANSWER)
    stage.executor.cancel(waiting.key)
    end = stage.audience.end_of(waiting)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.CANCEL
    assert end.progress is None
    assert all(key not in {one.key for one in busy} for key, _ in stage.audience.ends)


def test_cancel_of_an_unknown_task_does_nothing(stage):
    """Ended and foreign keys are no error."""
    stage.executor.cancel(TaskKey("nobody", 7))
    assert isinstance(stage.end(Script.ANSWER), Solved)


def test_a_cancel_does_not_reach_the_next_task(stage):
    """The stop flag of an ended task is gone when its slot gets another."""
    for _ in range(SLOTS + 1):
        one = stage.run(Script.UNTIL_STOPPED)
        stage.executor.cancel(one.key)
        stage.audience.end_of(one)
    assert stage.end(Script.UNTIL_STOPPED, seconds=0.3).answer.verdict is Verdict.BOUNDED


@pytest.mark.parametrize(("script", "words"), [(Script.EXIT, "status 3"), (Script.KILL_SELF, "signal 9")])
def test_a_process_that_dies_is_told_from_a_solve_that_fails(stage, script, words):
    """A death says how; the slot is made anew."""
    end = stage.end(script)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.DIED
    assert words in end.reason
    stage.ready(SLOTS)


@pytest.mark.parametrize(
    ("script", "words"), [(Script.FAIL, "ZeroDivisionError: scripted defect"), (Script.NONSENSE, "ValueError: chosen")]
)
def test_a_defect_of_the_solver_is_broken(stage, script, words):
    """An exception or an impossible choice ends as BROKEN with type and message, without a traceback."""
    answer = stage.end(script).answer
    assert answer.verdict is Verdict.BROKEN
    assert words in answer.reason
    assert "Traceback" not in answer.reason
    assert answer.columns == ()


def test_no_answer_is_without_a_reason(stage):
    """A solver that gives no reason gets one."""
    assert stage.end(Script.NO_REASON).answer.reason


def test_memory_beyond_the_limit_ends_the_task_only(stage):
    """Allocating without end is stopped at the budget; a neighbour at work does not notice."""
    neighbour = stage.run(Script.UNTIL_STOPPED)
    end = stage.end(Script.ALLOCATE, memory_bytes=100 * MIB)
    assert isinstance(end, Lost)
    assert end.cause is LossCause.MEMORY
    assert str(100 * MIB) in end.reason
    stage.ready(SLOTS - 1)
    stage.executor.cancel(neighbour.key)
    assert stage.audience.end_of(neighbour).answer.verdict is Verdict.CANCELLED


def test_the_memory_limit_is_each_tasks_own(stage):
    """A task with little memory does not narrow the next one in its slot."""
    for _ in range(SLOTS):
        assert stage.end(Script.HOLD, memory_bytes=32 * MIB).cause is LossCause.MEMORY
    for _ in range(SLOTS):
        assert isinstance(stage.end(Script.ANSWER, memory_bytes=32 * MIB), Solved)
    for _ in range(SLOTS):
        assert isinstance(stage.end(Script.HOLD, memory_bytes=256 * MIB), Solved)


def test_peak_memory_is_the_tasks_own(stage):
    """A small task after a large one in the same place does not show the large one's peak."""
    large = stage.end(Script.HOLD).answer.peak_memory_bytes
    small = [stage.end(Script.ANSWER).answer.peak_memory_bytes for _ in range(SLOTS)]
    assert large >= 64 * MIB
    assert max(small) < large - 32 * MIB


def test_memory_predicted_beyond_the_budget_is_not_tried(stage):
    """A graph that is predicted not to fit is answered BOUNDED with a plain choice, naming both figures."""
    answer = stage.end(Script.EXIT, vertices=1000, memory_bytes=50_000, weights=[5] * 999 + [8]).answer
    assert answer.verdict is Verdict.BOUNDED
    assert "100000 bytes" in answer.reason
    assert "50000 bytes" in answer.reason
    assert answer.value == (8, 1)
    assert answer.bound == (5 * 999 + 8, 1)
    assert answer.columns[0].data == (999).to_bytes(4, "little")


def test_predicted_memory_with_pins_gives_only_the_reason(stage):
    """Where a choice would depend on the edges there is none."""
    question = Question(QuestionName.INDEPENDENT_SET, must=(1, 2))
    answer = stage.end(Script.EXIT, vertices=1000, memory_bytes=50_000, question=question).answer
    assert answer.verdict is Verdict.BOUNDED
    assert (answer.value, answer.columns) == (None, ())


def test_progress_shows_running_figures(stage):
    """Progress arrives while the task runs and carries what the solver shows."""
    one = stage.run(Script.UNTIL_STOPPED)
    seen = stage.audience.first_progress(one)
    assert (seen.phase, seen.fraction_done, seen.incumbent, seen.bound) == (Phase.SWEEP, 0.25, 4, 9)
    assert seen.fill is None
    assert 0.0 < seen.seconds < 30.0


def test_figures_add_up(stage):
    """Slots are idle, busy or warming, and their sum stays."""
    figures = stage.executor.figures()
    assert (figures.warming, figures.idle, figures.busy, figures.warm_fraction) == (0, SLOTS, 0, 1.0)
    one = stage.run(Script.UNTIL_STOPPED)
    figures = stage.executor.figures()
    assert (figures.warming, figures.idle, figures.busy) == (0, SLOTS - 1, 1)
    assert stage.executor.free() == SLOTS - 1
    stage.executor.cancel(one.key)


def test_stop_lets_running_tasks_end(build):
    """Within the grace a task may still answer; nothing new begins."""
    stage = Stage(build())
    stage.ready(SLOTS)
    one = stage.run(Script.UNTIL_STOPPED, seconds=0.3)
    stage.executor.stop(30.0)
    assert stage.audience.end_of(one).answer.verdict is Verdict.BOUNDED
    assert stage.executor.free() == 0


def test_stop_kills_what_outlasts_the_grace(build):
    """After the grace tasks are lost to the shutdown, waiting ones without having begun."""
    stage = Stage(build())
    stage.ready(SLOTS)
    tasks = [stage.run(Script.DEAF) for _ in range(SLOTS + 1)]
    stage.executor.stop(0.1)
    ends = [stage.audience.end_of(one) for one in tasks]
    assert [end.cause for end in ends] == [LossCause.SHUTDOWN] * (SLOTS + 1)
    assert ends[-1].progress is None
    late = stage.run(Script.ANSWER)
    assert stage.audience.end_of(late).cause is LossCause.SHUTDOWN


def test_start_and_stop_can_be_repeated(build):
    """A second stop, a stop before the start and a second start are harmless."""
    early = build()
    early.stop(1.0)
    early.stop(1.0)
    assert early.free() == 0
    stage = Stage(build())
    stage.executor.start(stage.audience)
    stage.ready(SLOTS)
    stage.executor.stop(0.0)
    stage.executor.stop(0.0)


def test_stop_while_warming(build):
    """A stop right after the start does not wait for the warm-up."""
    stage = Stage(build())
    one = stage.run(Script.ANSWER)
    stage.executor.stop(0.0)
    end = stage.audience.end_of(one)
    assert isinstance(end, Solved) or end.cause is LossCause.SHUTDOWN
