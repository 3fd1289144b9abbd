"""What `upgrade` found."""

from __future__ import annotations

from dataclasses import dataclass

from yieldosc.errors import Finding
from yieldosc.studies.results import Estimate, Provenance
from yieldosc.study import Study


@dataclass(frozen=True, slots=True, kw_only=True)
class Change:
    """One purchase, before and after: all parts that are bought as one."""

    part: str  # "C1, C2"
    from_tolerance: str
    tolerance: str
    from_law: str | None
    temperature_law: str | None

    @property
    def text(self) -> str:
        """"C1, C2 ±5 % → ±2 %"."""
        steps = []
        if self.tolerance != self.from_tolerance:
            steps.append(f"{self.from_tolerance} → {self.tolerance}")
        if self.temperature_law != self.from_law:
            steps.append(f"{self.from_law or 'no law'} → {self.temperature_law or 'no law'}")
        return f"{self.part} {', '.join(steps)}" if steps else f"{self.part} as declared"


    @property
    def order(self) -> str:
        """"C1, C2 with ±2 % in place of ±5 %"."""
        steps = []
        if self.tolerance != self.from_tolerance:
            steps.append(f"{self.tolerance} in place of {self.from_tolerance}")
        if self.temperature_law != self.from_law:
            steps.append(f"{self.temperature_law or 'no law'} in place of {self.from_law or 'no law'}")
        return f"{self.part} with {' and '.join(steps)}"


@dataclass(frozen=True, slots=True, kw_only=True)
class UpgradeOption:
    """A set of changes, re-simulated on the draws of the declared set."""

    changes: tuple[Change, ...]
    yield_: Estimate
    difference: Estimate  # against the declared set, the same units
    relative_price: float  # change, in prices of a common resistor: a placeholder where no price is given
    price_change: float | None  # money; None where a price is missing
    cost_per_good_unit: float | None
    looser: bool = False  # some grade is looser than declared
    confirmed: Estimate | None = None  # yield on fresh units, for the choice and its runners-up


@dataclass(frozen=True, slots=True, kw_only=True)
class Recentre:
    """Another nominal value from a series of preferred numbers."""

    part: str
    from_value: float
    to_value: float
    unit: str
    series: int
    yield_: Estimate
    difference: Estimate


@dataclass(frozen=True, slots=True, kw_only=True)
class SearchAccount:
    """How the cheapest set was looked for."""

    purchases: tuple[str, ...]  # that were combined
    left_out: tuple[str, ...]  # purchases that were not combined, because others lean on the result more
    possible: int  # sets that the grades allow
    tried: int
    dominated: int  # grades set aside: no cheaper grade's failing units are nested in theirs
    exhausted: bool  # every set that could be cheaper than the choice was tried
    best: Estimate | None  # highest yield of all sets tried


@dataclass(frozen=True, kw_only=True)
class UpgradeResult:
    """Which part to buy better, and what it costs."""

    study: Study
    target: float | None
    current: Estimate
    current_cost_per_good_unit: float | None
    parts_price: float | None
    money: bool  # prices are the user's; else relative placeholders
    singles: tuple[UpgradeOption, ...]
    sets: tuple[UpgradeOption, ...]  # the choice and its runners-up, in the order of cost
    chosen: UpgradeOption | None  # None: no set reaches the target, or no target is given
    recentre: tuple[Recentre, ...]  # those that help, best first
    search: SearchAccount | None
    units: int
    confirm_units: int
    findings: tuple[Finding, ...]
    provenance: Provenance

    @property
    def options(self) -> tuple[UpgradeOption, ...]:
        """Singles, then sets; the choice is one of them."""
        return (*self.singles, *(s for s in self.sets if s not in self.singles))
