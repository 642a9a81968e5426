"""What the service counts and measures: one set of figures, shown by /metrics and by LoadService alike."""

from nearchord_service.metrics.exposition import Exposition
from nearchord_service.metrics.load import Load, QuestionLoad
from nearchord_service.metrics.recorder import Metrics

__all__ = ["Exposition", "Load", "Metrics", "QuestionLoad"]
