"""The figures: what is told is what /metrics shows and what LoadService says."""

from __future__ import annotations

import datetime as dt
from collections.abc import Iterator
from urllib.request import urlopen

import pytest
from hypothesis import given
from hypothesis import strategies as st
from nearchord_service.metrics import Exposition, Metrics
from nearchord_service.metrics.load import RECENT_RUNS, Rate, RecentRuns
from nearchord_service.model.answer import Answer
from nearchord_service.model.errors import StoreUnavailable
from nearchord_service.model.event import Phase
from nearchord_service.model.job import Job
from nearchord_service.model.question import Budget, Question, QuestionName, WhenOver
from nearchord_service.model.stage import Stage, Verdict
from nearchord_service.store.port import QueueFigures
from nearchord_service.work.port import LossCause, SlotFigures
from prometheus_client import CollectorRegistry
from prometheus_client.parser import text_string_to_metric_families

START = dt.datetime(2030, 1, 1, tzinfo=dt.UTC)


def job(question: QuestionName = QuestionName.INDEPENDENT_SET, waited: float | None = 2.0) -> Job:
    started = None if waited is None else START + dt.timedelta(seconds=waited)
    return Job(
        id="1" * 32,
        owner="",
        batch_id=None,
        batch_index=0,
        label="",
        graph_address="2" * 64,
        weights_address=None,
        names_address=None,
        vertices=3,
        edges=3,
        question=Question(question),
        budget=Budget(),
        when_over=WhenOver.BOUND,
        priority=0,
        not_after=None,
        stage=Stage.SOLVING,
        verdict=None,
        reason="",
        attempt=1,
        cancel_requested=False,
        created_at=START,
        started_at=started,
        finished_at=None,
        sequence=2,
    )


def answer(verdict: Verdict = Verdict.PROVEN, seconds: float = 0.5) -> Answer:
    phases = ((Phase.TREE, 0.1), (Phase.SWEEP, seconds - 0.1))
    return Answer(verdict, "because", fill=4, states=50, phase_seconds=phases, seconds=seconds, solver_version="1.0")


def end(metrics: Metrics, ended: Job, came_to: Answer) -> None:
    """Tell what a job's end tells: the store that it is DONE, the dispatcher what it came to."""
    metrics.job_ended(ended.question.name, came_to.verdict)
    metrics.job_finished(ended, came_to)


class Scrape:
    """One look at /metrics."""

    def __init__(self, text: str) -> None:
        self.families = {family.name: family for family in text_string_to_metric_families(text)}
        self.samples = {
            (sample.name, frozenset(sample.labels.items())): sample.value
            for family in self.families.values()
            for sample in family.samples
        }

    def __call__(self, name: str, **labels: str) -> float:
        return self.samples[name, frozenset(labels.items())]


@pytest.fixture
def metrics() -> Metrics:
    found = Metrics(CollectorRegistry())
    found.observe(
        lambda: QueueFigures(5, 2, 7.5), lambda: SlotFigures(1, 2, 3, 0.25), {"version": "1", "solver_version": "2"}
    )
    return found


@pytest.fixture
def exposition(metrics: Metrics) -> Iterator[Exposition]:
    found = Exposition(metrics.registry, "127.0.0.1", 0)
    found.start()
    yield found
    found.stop()


def scrape(exposition: Exposition) -> Scrape:
    with urlopen(f"http://127.0.0.1:{exposition.port}/metrics") as response:
        return Scrape(response.read().decode())


def test_everything_that_was_told_is_shown(metrics: Metrics, exposition: Exposition) -> None:
    metrics.job_submitted(QuestionName.INDEPENDENT_SET, 4)
    end(metrics, job(), answer())
    metrics.leases_lost(2)
    metrics.worker_lost(LossCause.MEMORY)
    metrics.database_write(0.004)
    metrics.upload_bytes(1_000)
    metrics.watch_opened()
    metrics.call_ended("JobService/GetJob", "OK", 0.02)
    found = scrape(exposition)
    asked = {"question": "independent-set"}
    assert found("nearchord_jobs_submitted_total", **asked) == 4
    assert found("nearchord_jobs_finished_total", verdict="PROVEN", **asked) == 1
    assert found("nearchord_job_wait_seconds_sum", **asked) == 2.0
    assert found("nearchord_job_run_seconds_bucket", le="1.0", **asked) == 1
    assert found("nearchord_job_run_seconds_bucket", le="0.3", **asked) == 0
    assert found("nearchord_solve_phase_seconds_total", phase="sweep", **asked) == 0.4
    assert found("nearchord_fill_edges_sum", **asked) == 4
    assert found("nearchord_states_sum", **asked) == 50
    assert found("nearchord_leases_lost_total") == 2
    assert found("nearchord_worker_losses_total", cause="memory") == 1
    assert found("nearchord_database_write_seconds_count") == 1
    assert found("nearchord_upload_bytes_total") == 1_000
    assert found("nearchord_watch_streams") == 1
    assert found("nearchord_calls_total", method="JobService/GetJob", code="OK") == 1
    assert found("nearchord_call_seconds_bucket", method="JobService/GetJob", le="0.03") == 1
    assert found("nearchord_build_info", version="1", solver_version="2") == 1


def test_gauges_are_read_when_somebody_looks(exposition: Exposition) -> None:
    found = scrape(exposition)
    assert found("nearchord_jobs", stage="WAITING") == 5
    assert found("nearchord_jobs", stage="SOLVING") == 2
    assert found("nearchord_oldest_waiting_seconds") == 7.5
    assert [found("nearchord_slots", state=s) for s in ("warming", "idle", "busy")] == [1, 2, 3]
    assert found("nearchord_warm_ratio") == 0.25


def test_names_follow_the_conventions(metrics: Metrics, exposition: Exposition) -> None:
    """One prefix; counters end in _total; times are in seconds; only closed sets are labels."""
    metrics.job_submitted(QuestionName.VERTEX_COVER)
    end(metrics, job(), answer())
    metrics.call_ended("m", "OK", 0.1)
    metrics.worker_lost(LossCause.DIED)
    families = scrape(exposition).families.values()
    assert all(family.name.startswith("nearchord_") for family in families)
    for family in families:
        counted = [s.name for s in family.samples if not s.name.endswith("_created")]
        assert all(name.endswith("_total") for name in counted) or family.type != "counter"
    labels = {label for family in families for sample in family.samples for label in sample.labels}
    closed = {"question", "verdict", "stage", "phase", "state", "cause", "method", "code", "le"}
    assert labels - {"version", "solver_version"} <= closed


def test_a_store_that_cannot_tell_takes_only_its_own_figures_away() -> None:
    def unavailable() -> QueueFigures:
        raise StoreUnavailable("the disk is full")

    metrics = Metrics(CollectorRegistry())
    metrics.observe(unavailable, lambda: SlotFigures(0, 1, 0, 1.0), {"version": "1"})
    exposition = Exposition(metrics.registry, "127.0.0.1", 0)
    exposition.start()
    found = scrape(exposition)
    exposition.stop()
    assert "nearchord_jobs" not in found.families
    assert found("nearchord_slots", state="idle") == 1


def test_the_load_says_what_the_page_shows(metrics: Metrics, exposition: Exposition) -> None:
    for seconds in (0.2, 0.3, 0.4):
        end(metrics, job(), answer(seconds=seconds))
    end(metrics, job(QuestionName.VERTEX_COVER), answer(Verdict.BOUNDED, 9.0))
    metrics.job_submitted(QuestionName.INDEPENDENT_SET, 6)
    metrics.watch_opened()
    load, found = metrics.load(), scrape(exposition)
    assert load.submitted == found("nearchord_jobs_submitted_total", question="independent-set") == 6
    assert load.finished == 4
    assert load.watch_streams == found("nearchord_watch_streams") == 1
    assert load.queue.waiting == found("nearchord_jobs", stage="WAITING")
    assert load.slots.busy == found("nearchord_slots", state="busy")
    assert load.finished_per_second == 0.4
    for line in load.questions:
        shown = found("nearchord_jobs_finished_total", question=line.question, verdict=line.verdict)
        assert line.finished == shown
    first, second = load.questions
    assert (first.question, first.seconds_p50, first.seconds_p90, first.seconds_p99) == (
        "independent-set",
        0.3,
        0.4,
        0.4,
    )
    assert (second.verdict, second.seconds_p50) == (Verdict.BOUNDED, 9.0)


@pytest.mark.parametrize("name", list(QuestionName))
def test_every_question_has_series_of_its_own(metrics: Metrics, exposition: Exposition, name: QuestionName) -> None:
    metrics.job_submitted(name)
    end(metrics, job(name), answer(Verdict.OVER_FILL))
    found = scrape(exposition)
    assert found("nearchord_jobs_submitted_total", question=name) == 1
    assert found("nearchord_jobs_finished_total", question=name, verdict="OVER_FILL") == 1
    assert found("nearchord_fill_edges_sum", question=name) == 4
    assert [(line.question, line.verdict) for line in metrics.load().questions] == [(name, Verdict.OVER_FILL)]


def test_a_job_that_the_solver_never_answered_has_no_run_time(metrics: Metrics, exposition: Exposition) -> None:
    metrics.job_ended(QuestionName.INDEPENDENT_SET, Verdict.CANCELLED)
    metrics.job_finished(job(), Answer(Verdict.BROKEN, "three workers were lost"))
    found = scrape(exposition)
    assert found("nearchord_jobs_finished_total", question="independent-set", verdict="CANCELLED") == 1
    assert ("nearchord_job_run_seconds_count", frozenset({("question", "independent-set")})) not in found.samples
    (line,) = metrics.load().questions
    assert (line.verdict, line.finished, line.seconds_p99) == (Verdict.CANCELLED, 1, 0.0)


def test_the_rate_forgets_after_ten_seconds() -> None:
    now = [100.0]
    rate = Rate(lambda: now[0])
    for _ in range(20):
        rate.add()
    now[0] = 105.0
    rate.add()
    assert rate.per_second() == 2.1
    now[0] = 110.1
    assert rate.per_second() == 0.1
    now[0] = 200.0
    assert rate.per_second() == 0.0


@given(st.lists(st.floats(0, 10), max_size=30), st.sampled_from([0.5, 0.9, 0.99]))
def test_a_quantile_is_the_least_run_that_enough_do_not_exceed(runs: list[float], share: float) -> None:
    recent = RecentRuns()
    for seconds in runs:
        recent.add(seconds)
    (found,) = recent.quantiles(share)
    enough = [r for r in sorted(runs) if sum(other <= r for other in runs) >= share * len(runs)]
    assert found == (enough[0] if enough else 0.0)


def test_quantiles_are_of_the_latest_runs() -> None:
    recent = RecentRuns()
    for _ in range(RECENT_RUNS):
        recent.add(100.0)
    for _ in range(RECENT_RUNS):
        recent.add(1.0)
    assert recent.quantiles(0.5, 1.0) == (1.0, 1.0)


def test_a_second_stop_is_harmless(exposition: Exposition) -> None:
    exposition.stop()
    exposition.stop()
    Exposition(CollectorRegistry(), "127.0.0.1", 0).stop()


def test_an_address_in_use_is_an_error(exposition: Exposition) -> None:
    with pytest.raises(OSError, match="in use"):
        Exposition(CollectorRegistry(), "127.0.0.1", exposition.port).start()
