"""The cautions of a result in reading order: its own first, then whatever of the list they do not hold."""

from __future__ import annotations

from yieldosc.studies.cautions import APPROVAL, NOT_ASSESSED, REVISIONS, SAFETY, model_error
from yieldosc.studies.results import Assessment

__all__ = ["APPROVAL", "NOT_ASSESSED", "REVISIONS", "SAFETY", "cautions"]


def cautions(a: Assessment) -> tuple[str, ...]:
    """Each once."""
    rest = (model_error(a.study, a.bench_ratio), NOT_ASSESSED, REVISIONS, APPROVAL, SAFETY)
    return tuple(dict.fromkeys((*a.cautions, *rest)))
