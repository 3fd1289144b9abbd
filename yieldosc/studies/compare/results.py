"""What `compare` found."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from yieldosc.errors import Finding
from yieldosc.studies.results import Estimate, Provenance
from yieldosc.study import Study

Group = Literal["circuit", "part", "assumption", "limit", "condition"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Difference:
    """One thing that the two studies say differently."""

    group: Group
    name: str  # "C1 tolerance", "frequency limit high"
    before: str
    after: str
    role: str | None = None


@dataclass(frozen=True, slots=True, kw_only=True)
class RateChange:
    """One rate in both studies, on the same draws."""

    name: str  # "yield" or an outcome
    before: Estimate
    after: Estimate
    difference: Estimate


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """The first study with one of the changes alone."""

    name: str
    yield_: Estimate
    difference: Estimate


@dataclass(frozen=True, kw_only=True)
class CompareResult:
    """What changed between two studies, and what it did to each rate."""

    before: Study
    after: Study
    differences: tuple[Difference, ...]
    rates: tuple[RateChange, ...]  # the yield first
    steps: tuple[Step, ...]  # largest effect first; empty where the circuits differ
    together: Estimate  # difference of the yields on the units of the steps
    units: int
    step_units: int
    findings: tuple[Finding, ...]
    provenance: Provenance
