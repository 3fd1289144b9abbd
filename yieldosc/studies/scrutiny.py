"""What a sceptical reader asks of the figures, as frozen values: which knowledge matters, what to measure, whether the
temperatures are dense enough, what measured lots can carry, what a pilot or a demonstration could show.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from yieldosc.studies.results import Estimate, RivalResult

Quantity = Literal["distribution", "reel mean", "temperature coefficient", "within a reel", "weak side"]
Rule = Literal["Wilks, two-sided", "Wilks, one-sided", "t interval"]


@dataclass(frozen=True, slots=True, kw_only=True)
class Knowledge:
    """One piece of knowledge: the yields that the sets span which differ in nothing else. Changes are in yield, against
    the declared set on the same units."""

    name: str  # "shape", "reel share", "lot side", "temperature laws", or a device's value: "U1 gm"
    roles: tuple[str, ...]
    sets: int
    lowest: RivalResult | None  # None: no set lies below the declared one
    highest: RivalResult | None

    @property
    def fall(self) -> float:
        """Change of the yield from the declared set to the lowest (≤ 0)."""
        return _change(self.lowest)

    @property
    def rise(self) -> float:
        """Change to the highest (≥ 0)."""
        return _change(self.highest)

    @property
    def span(self) -> float:
        return self.rise - self.fall

    @property
    def measurable(self) -> bool:
        """True when the interval of some change leaves zero out."""
        ends = [r.difference for r in (self.lowest, self.highest) if r is not None and r.difference is not None]
        return any(d.high < 0 or d.low > 0 for d in ends)


def _change(rival: RivalResult | None) -> float:
    return 0.0 if rival is None or rival.difference is None else rival.difference.estimate


@dataclass(frozen=True, slots=True, kw_only=True)
class BenchItem:
    """What to measure to gain one piece of knowledge, on how many samples."""

    knowledge: str
    quantity: Quantity
    parts: tuple[str, ...]
    samples: int  # of each part or reel named
    rule: Rule
    confidence: float
    coverage: float | None = None  # share of the population that the measured range holds
    reach: float | None = None  # half-width of the interval as a fraction of the tolerance's own half-width
    span: float = 0.0  # yield that hangs on it


@dataclass(frozen=True, slots=True, kw_only=True)
class TemperatureCheck:
    """Whether a unit could fail between the temperatures of the grid.

    Every unit nearer to a limit than `reach` was also judged halfway between the temperatures and at its own turning
    points; `flips` of `units` fail only there and are counted as failing. `missed` of `checked` units fail only at
    temperatures eight times as dense, and were found by neither.
    """

    temperatures: int
    reach: float  # distance to a limit, as a fraction of its window
    excursion: float  # largest fall of that distance between two temperatures, among the units of the pilot
    pilot: int
    units: int
    flips: int
    flip_rate: Estimate
    checked: int
    missed: int
    missed_rate: Estimate
    allowed: float  # a tenth of the half-width of the yield's interval

    @property
    def grid_enough(self) -> bool:
        """The grid alone would have done: the upper bound on flips lies below what is allowed."""
        return self.flip_rate.high < self.allowed

    @property
    def enough(self) -> bool:
        """What was done beside the grid is enough: the upper bound on missed flips lies below what is allowed."""
        return self.missed_rate.high < self.allowed


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuredLot:
    """A column of measured values against the tolerance that was declared for the part [fractions of the nominal]."""

    role: str
    part: str
    values: int
    declared: tuple[float, float] | None
    mean: float
    low: float
    high: float
    sd: float
    mean_interval: tuple[float, float]
    outside: int  # values beyond the declared tolerance

    @property
    def narrow(self) -> bool:
        """The values span less than half of the declared tolerance."""
        return self.declared is not None and self.high - self.low < (self.declared[1] - self.declared[0]) / 2

    @property
    def off_centre(self) -> bool:
        """The interval of the mean leaves out the middle of the declared tolerance."""
        if self.declared is None:
            return False
        middle = (self.declared[0] + self.declared[1]) / 2
        return not self.mean_interval[0] <= middle <= self.mean_interval[1]


@dataclass(frozen=True, slots=True, kw_only=True)
class MeasuredUncertainty:
    """Yields over lots drawn from the measured values with replacement: what so few values leave open."""

    lots: int
    units_per_lot: int
    low: float
    middle: float
    high: float
    confidence: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Capability:
    """Predicted percentile capability of one output at the corner where it is least, from the units that have a gain.

    Quantiles with order-statistic intervals, from whose ends the bounds of Ppk come. `normal_ppk` is what mean and
    standard deviation alone would say.
    """

    output: Literal["frequency", "margin"]
    corner: str
    units: int
    quantiles: tuple[Estimate, Estimate, Estimate]  # 0.135, 50 and 99.865 % points
    pp: float | None  # None without limits on both sides
    ppk: Estimate
    normal_ppk: float

    @property
    def normal(self) -> bool:
        """Percentiles and normal theory agree within the percentiles' own interval."""
        return self.ppk.low <= self.normal_ppk <= self.ppk.high


@dataclass(frozen=True, slots=True, kw_only=True)
class PilotCapability:
    """The range in which the Ppk of a pilot run of n boards falls (`probability`), if the predicted one is true."""

    boards: int
    low: float
    high: float
    probability: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Demonstration:
    """Boards without a failure that show a failing share below `rate` at `confidence`."""

    rate: float
    confidence: float
    boards: int


@dataclass(frozen=True, kw_only=True)
class Scrutiny:
    """All of it for one assessment; empty or None where the question does not arise."""

    knowledge: tuple[Knowledge, ...] = ()
    bench_list: tuple[BenchItem, ...] = ()
    temperatures: TemperatureCheck | None = None
    measured: tuple[MeasuredLot, ...] = ()
    measured_uncertainty: MeasuredUncertainty | None = None
    capability: tuple[Capability, ...] = ()
    pilots: tuple[PilotCapability, ...] = ()
    demonstrations: tuple[Demonstration, ...] = ()
