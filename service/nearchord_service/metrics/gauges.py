"""Gauges that are read when somebody looks: the queue and the slots."""

from __future__ import annotations

import logging
from collections.abc import Callable, Iterable

from prometheus_client import Metric
from prometheus_client.core import GaugeMetricFamily
from prometheus_client.registry import Collector

from nearchord_service.model.stage import Stage
from nearchord_service.store.port import QueueFigures
from nearchord_service.work.port import SlotFigures

_log = logging.getLogger(__name__)


class QueueGauges(Collector):
    """Unfinished jobs by stage and the age of the oldest waiting one. Left out while the store cannot tell."""

    def __init__(self, figures: Callable[[], QueueFigures]) -> None:
        self._figures = figures

    def describe(self) -> Iterable[Metric]:
        """Say the names without reading the store."""
        return _queue_families()

    def collect(self) -> Iterable[Metric]:
        """Read the store."""
        try:
            figures = self._figures()
        except Exception:
            _log.exception("no figures of the queue")
            return []
        jobs, oldest = _queue_families()
        jobs.add_metric([Stage.WAITING], figures.waiting)
        jobs.add_metric([Stage.SOLVING], figures.solving)
        oldest.add_metric([], figures.oldest_waiting_seconds)
        return [jobs, oldest]


def _queue_families() -> tuple[GaugeMetricFamily, GaugeMetricFamily]:
    return (
        GaugeMetricFamily("nearchord_jobs", "Unfinished jobs by stage.", labels=["stage"]),
        GaugeMetricFamily("nearchord_oldest_waiting_seconds", "Age of the oldest waiting job; 0 without one."),
    )


class SlotGauges(Collector):
    """Worker slots by state, and how far warming is."""

    def __init__(self, figures: Callable[[], SlotFigures]) -> None:
        self._figures = figures

    def describe(self) -> Iterable[Metric]:
        """Say the names without asking the executor."""
        return _slot_families()

    def collect(self) -> Iterable[Metric]:
        """Ask the executor."""
        figures = self._figures()
        slots, warm = _slot_families()
        for state in ("warming", "idle", "busy"):
            slots.add_metric([state], getattr(figures, state))
        warm.add_metric([], figures.warm_fraction)
        return [slots, warm]


def _slot_families() -> tuple[GaugeMetricFamily, GaugeMetricFamily]:
    return (
        GaugeMetricFamily("nearchord_slots", "Worker slots by state.", labels=["state"]),
        GaugeMetricFamily("nearchord_warm_ratio", "Share of the warm-up that is done; 1 when nothing warms."),
    )
