"""Findings that only some studies have: second sources, a trim that the declared yield does not hold."""

from __future__ import annotations

from collections.abc import Sequence

from yieldosc.errors import Finding
from yieldosc.studies.extra_results import Combination
from yieldosc.study import Study


def extra_findings(study: Study, sources: Sequence[Combination]) -> tuple[Finding, ...]:
    """What a reader must know of them."""
    made = []
    if sources:
        worst = min(sources, key=lambda c: c.yield_.estimate)
        made.append(
            Finding(
                "note", "second-sources",
                f"{len(sources)} combinations of second sources were run; the verdict and every figure are those of "
                f"the worst one: {worst.text}",
            )
        )  # fmt: skip
    if study.design.trim_role is not None:
        made.append(
            Finding(
                "warning", "trim-not-applied",
                f"Boards are judged before the trim of {study.design.trim_role}; limits gives the yield after it.",
            )
        )  # fmt: skip
    return tuple(made)
