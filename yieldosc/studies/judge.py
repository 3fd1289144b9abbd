"""Requirements against solutions: each unit's outcome is the first, in the order of OUTCOMES, that any corner shows."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.results import OUTCOMES
from yieldosc.study import Requirement, Study

Array = NDArray[np.float64]
Codes = NDArray[np.int8]

FAILURES = OUTCOMES[1:]
GOOD = np.int8(len(OUTCOMES))  # codes 1 … are positions in OUTCOMES; good is larger than any, so that min() decides
_BY_STATUS = np.full(max(Status) + 1, GOOD, dtype=np.int8)
for _status in Status:
    if _status is not Status.STARTS:
        _BY_STATUS[_status] = OUTCOMES.index(_status.name.lower())


@dataclass(frozen=True)
class Judge:
    """Turns a solution into outcome codes (n,), int8: a position in OUTCOMES, or GOOD."""

    requirements: tuple[Requirement, ...]
    startup_ratio: float

    @classmethod
    def of(cls, study: Study) -> Judge:
        return cls(study.requirements, study.design.startup_ratio)

    @property
    def needs_growth(self) -> bool:
        """True when a limit on the start-up time makes the growth rate necessary."""
        return any(r.attribute in ("startup_s", "growth_per_s") for r in self.requirements)

    def codes(self, solution: Solution) -> Codes:
        """Outcome codes of n units at one corner."""
        found = _BY_STATUS[solution.status]
        for requirement in self.requirements:
            values = self.attribute(solution, requirement.attribute)
            if values is None:
                continue
            missed = _missed(requirement, values)
            if missed.any():
                code = np.int8(OUTCOMES.index(requirement.outcome))
                found[missed] = np.minimum(found[missed], code)
        return found

    def attribute(self, solution: Solution, name: str) -> Array | None:
        """An attribute of solved units (n,); None where the solver does not give it."""
        if name == "frequency_hz":
            return solution.limit_frequency_hz
        if name == "startup_s":
            return None if solution.growth_per_s is None else startup_s(solution.growth_per_s, self.startup_ratio)
        values: Array | None = getattr(solution, name)
        return values

    def unjudged(self, solution: Solution) -> tuple[str, ...]:
        """Attributes with a limit that the solver does not give: no verdict can rest on them."""
        return tuple(
            r.attribute for r in self.requirements if self.attribute(solution, r.attribute) is None
        )


def startup_s(growth_per_s: Array, ratio: float) -> Array:
    """t = ln(V_end/V_0)/σ [s]; infinite where nothing grows."""
    with np.errstate(divide="ignore", invalid="ignore"):
        return np.where(growth_per_s > 0, np.log(ratio) / growth_per_s, np.inf)


def outcome_name(code: int) -> str:
    """The name of an outcome code."""
    return "good" if code >= GOOD else OUTCOMES[code]


def _missed(requirement: Requirement, values: Array) -> NDArray[np.bool_]:
    # "not within" rather than "outside": a value that is not a number has not shown that it meets a limit.
    with np.errstate(invalid="ignore"):
        met = np.ones(len(values), dtype=bool) if requirement.low is None else values >= requirement.low
        if requirement.high is not None:
            met &= values <= requirement.high
    if requirement.attribute == "startup_margin":
        met |= np.isnan(values)  # a circuit without a start-up question
    return ~met
