"""What the studies found: frozen values with intervals, which reports turn into words and pages.

`to_dict` of `Assessment` is the JSON contract; more keys may be added there, none renamed.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Literal

from yieldosc.errors import Finding
from yieldosc.study import Corner, Study

if TYPE_CHECKING:
    from yieldosc.studies.extra_results import Combination, CrystalStart, LimiterEffect, PilotResult
    from yieldosc.studies.scrutiny import Scrutiny

Verdict = Literal["meets", "does not meet", "not proven", "not assessable"]
OUTCOMES = (
    "good", "no_bias", "undefined", "not_assessable", "no_start", "wrong_mode",
    "low_margin", "slow_start", "out_of_limits", "distorted", "over_drive",
)  # fmt: skip


@dataclass(frozen=True, slots=True, kw_only=True)
class Estimate:
    """A figure and its interval; `failures`/`units` where it is a counted rate."""

    estimate: float
    low: float
    high: float
    confidence: float = 0.95
    units: int | None = None
    failures: int | None = None

    def to_dict(self) -> dict[str, object]:
        return {"estimate": self.estimate, "low": self.low, "high": self.high}


@dataclass(frozen=True, slots=True, kw_only=True)
class Distribution:
    """Moments and quantiles of one attribute at one corner; counts (b,) over edges (b + 1,) for a chart."""

    mean: float
    sd: float
    min: float
    max: float
    q001: float
    q50: float
    q999: float
    edges: tuple[float, ...] = ()
    counts: tuple[int, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class CornerResult:
    """One corner. Intervals are pointwise: only the joint yield carries the verdict."""

    corner: Corner
    frequency_hz: Distribution
    settled_hz: Distribution | None
    startup_failures: int | None  # units that do not start on the intended mode here; None: no start-up question
    startup_rate: Estimate | None
    margin: Distribution | None
    yield_: Estimate
    failing: Mapping[str, int] = field(default_factory=dict)  # outcome → units that show it at this corner
    first_failures: int = 0  # units that no earlier corner of the list failed
    distortion: Distribution | None = None  # of the output, fractions; None where nothing gives it
    others: Mapping[str, Distribution] = field(default_factory=dict)  # amplitude_v, drive_w, … where they exist


@dataclass(frozen=True, slots=True, kw_only=True)
class RankLine:
    """One part (or cause) of a ranking: first-order and total Sobol index at the worst corner, and the mean."""

    part: str  # "C1", "reel 10 nF", or "C1: temperature"
    first_order: Estimate
    total: Estimate
    mean_first_order: Estimate  # variance-weighted over corners
    mean_total: Estimate
    per_percent: float | None = None  # change of the output [%] per +1 % of the part, nominal unit


@dataclass(frozen=True, slots=True, kw_only=True)
class Ranking:
    output: Literal["frequency", "margin"]
    corner: Corner  # the corner of the largest variance
    parts: tuple[RankLine, ...]  # largest total first
    causes: tuple[RankLine, ...]  # inside the leading parts
    units: int
    substituted: int = 0  # units without bias, evaluated at margin 1e-6 and the nominal frequency
    withheld: str = ""  # why there is no rank, where there is none
    leaders: tuple[str, ...] = ()  # parts that cannot be told apart from the first, itself included
    looks: int = 1
    looks_planned: int = 1


@dataclass(frozen=True, slots=True, kw_only=True)
class RivalResult:
    """The same units under another assumption."""

    name: str
    meaning: str
    yield_: Estimate
    difference: Estimate | None = None  # against the declared set, on the same units (Tango's score interval)


@dataclass(frozen=True, slots=True, kw_only=True)
class Band:
    """One output at one temperature three ways: searched extremes, root-sum-square, Monte Carlo."""

    output: Literal["frequency_hz", "startup_margin"]
    temperature_c: float
    extreme: tuple[float, float] | None  # None for open shapes
    rss: tuple[float, float]
    monte_carlo: tuple[float, float]
    method: str
    note: str = ""
    gap: float | None = None  # what the finest step of the search still added [SI unit of the output]; no certificate


@dataclass(frozen=True, slots=True, kw_only=True)
class Lots:
    """Yields of lots whose units share their reels."""

    lots: int
    units_per_lot: int
    q05: float
    q50: float
    q95: float
    share_below_target: Estimate | None
    by_chance: tuple[float, float] | None = None  # 5 and 95 % points if every unit had the pooled yield


@dataclass(frozen=True, slots=True, kw_only=True)
class Tighter:
    """What the next tighter grade of one part does to the yield, on the same draws."""

    part: str
    from_tolerance: str
    to_tolerance: str
    yield_: Estimate
    difference: Estimate


@dataclass(frozen=True, slots=True, kw_only=True)
class FailureShare:
    """Among failing units: how far a part's draw is shifted against all units (Kolmogorov–Smirnov)."""

    part: str
    cause: str
    ks_distance: float
    p_value: float
    mean_shift_sd: float


@dataclass(frozen=True, slots=True, kw_only=True)
class WorstUnit:
    """One simulated board: where and how it fails or nearly fails, with every part value at 25 °C, new."""

    number: int
    outcome: str
    corner: Corner
    frequency_hz: float
    startup_margin: float | None
    values: Mapping[str, float]


@dataclass(frozen=True, slots=True, kw_only=True)
class Look:
    """One of the looks at the joint yield, fixed beforehand."""

    number: int
    units: int
    failures: int
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class NominalPoint:
    """The nominal unit at one corner."""

    corner: Corner
    frequency_hz: float
    settled_hz: float | None
    startup_margin: float | None
    growth_per_s: float | None
    outcome: str
    other_modes_hz: tuple[float, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class Provenance:
    seed: int
    input_sha256: str
    versions: Mapping[str, str]
    started: str  # ISO 8601
    seconds: float
    workers: int
    audited: int
    disagreeing: int
    exact: int


@dataclass(frozen=True, kw_only=True)
class Assessment:
    """Everything that `assess` found."""

    study: Study
    verdict: Verdict
    conditions: tuple[str, ...]
    yield_: Estimate
    looks: tuple[Look, ...]
    looks_planned: int
    outcomes: Mapping[str, int]
    corners: tuple[CornerResult, ...]
    nominal: tuple[NominalPoint, ...]
    rankings: Mapping[str, Ranking]  # "frequency", "margin"
    rivals: tuple[RivalResult, ...]
    rival_units: int
    bands: tuple[Band, ...]
    lots: Lots | None
    tighter: tuple[Tighter, ...]
    failure_share: tuple[FailureShare, ...]  # empty with fewer than 30 failing units
    worst_units: tuple[WorstUnit, ...]
    wrong_mode_share: tuple[FailureShare, ...] = ()  # the same of units on another mode alone
    wrong_modes_hz: tuple[float, ...]  # where wrong-mode units run (sample)
    bench_ratio: float | None
    findings: tuple[Finding, ...]
    cautions: tuple[str, ...]
    provenance: Provenance
    scrutiny: Scrutiny | None = None
    second_sources: tuple[Combination, ...] = ()  # as declared first; the verdict is the worst one's
    pilot: PilotResult | None = None
    limiter: LimiterEffect | None = None
    crystal_start: tuple[CrystalStart, ...] = ()

    @property
    def yield_range(self) -> tuple[float, float]:
        """Lowest and highest estimate over the sets tried; a range of the sets tried, never a bound."""
        values = [r.yield_.estimate for r in self.rivals] or [self.yield_.estimate]
        return min(values), max(values)
