"""The scenarios by the names that the command line takes."""

from collections.abc import Callable

from bench.options import Options
from bench.report import Report
from bench.scenarios import data, fill, known, proofs, questions, scale, service, upload, windows

Scenario = Callable[[Options], Report]

SCENARIOS: dict[str, Scenario] = {
    "windows-100k": windows.measure,
    "scale": scale.measure,
    "service": service.measure,
    "upload": upload.measure,
    "data": data.measure,
    "fill": fill.measure,
    "proofs": proofs.measure,
    "known-graph": known.measure,
    "questions": questions.measure,
}
