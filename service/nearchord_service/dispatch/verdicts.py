"""What becomes of a job whose worker ended without an answer."""

from __future__ import annotations

from nearchord_service.model.answer import Answer
from nearchord_service.model.stage import Verdict
from nearchord_service.work.port import LossCause, Lost

_FINAL = {
    LossCause.SECONDS: Verdict.BOUNDED,
    LossCause.MEMORY: Verdict.BROKEN,
    LossCause.CANCEL: Verdict.CANCELLED,
}


def final_answer(lost: Lost) -> Answer | None:
    """Return the answer that a loss is, or None when the job is to be tried again.

    The answer was lost with the worker, so there is no value; when seconds ran out the bound shown last still holds.
    """
    verdict = _FINAL.get(lost.cause)
    if verdict is None:
        return None
    seen = lost.progress
    if seen is None:
        return Answer(verdict, lost.reason)
    reason, bound = lost.reason, None
    if verdict is Verdict.BOUNDED:
        bound = None if seen.bound is None else (seen.bound, 1)
        if seen.incumbent is not None:
            reason += f"; an answer of value {seen.incumbent} had been found and was lost with it"
    return Answer(
        verdict,
        reason,
        bound=bound,
        fill=seen.fill,
        fill_lower_bound=seen.fill_lower_bound,
        states=seen.states,
        bags=seen.bags,
        seconds=seen.seconds,
    )
