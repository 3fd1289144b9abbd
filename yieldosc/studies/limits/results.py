"""What `limits` found."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

from yieldosc.errors import Finding
from yieldosc.studies.limits.acceptance import LimitRates
from yieldosc.studies.results import Distribution, Estimate, Provenance
from yieldosc.study import Corner, Study


@dataclass(frozen=True, slots=True, kw_only=True)
class TradeLine:
    """One level of shipped escapes and the test limits that cost the fewest good units for it."""

    level: float | None  # None: the test limits are the specification's own
    rates: LimitRates | None  # on fresh units; None where no limits keep to the level
    chosen_bound: float | None  # upper bound of shipped escapes on the sample that chose


@dataclass(frozen=True, slots=True, kw_only=True)
class Floor:
    """As low as shipped escapes go by a frequency test at this temperature."""

    rates: LimitRates  # of the limits with the lowest upper bound, on fresh units
    closing: float | None  # estimate as the limits close around one reading; None without noise
    closing_hz: float | None


@dataclass(frozen=True, slots=True, kw_only=True)
class AddedResistance:
    """One added series resistance: units must still start at the test with it."""

    added_ohm: float  # in series with the crystal unit
    start_escapes: Estimate  # P(passes and the start fails at some corner), per built unit
    false_rejects: Estimate  # P(does not pass, good)


@dataclass(frozen=True, slots=True, kw_only=True)
class ResistanceTest:
    lines: tuple[AddedResistance, ...]
    chosen: int | None  # the smallest that keeps start escapes to the level; None: none needed, or none does
    start_failures: Estimate  # share of built units whose start fails at some corner
    units: int


@dataclass(frozen=True, slots=True, kw_only=True)
class TrimmedCorner:
    corner: Corner
    before: Distribution | None  # frequency
    after: Distribution | None
    margin_before: Distribution | None
    margin_after: Distribution | None


@dataclass(frozen=True, slots=True, kw_only=True)
class TrimResult:
    """What trimming each board at the test does."""

    role: str
    part: str
    kind: str  # "continuous", "steps of 1 pF", "E24"
    low: float
    high: float
    unit: str
    reached: Estimate  # share of units whose target lies inside the range
    at_low: Estimate
    at_high: Estimate
    ceased: Estimate  # units that stop oscillating before they come to the target
    unreadable: Estimate
    corners: tuple[TrimmedCorner, ...]
    yield_before: Estimate
    yield_after: Estimate  # at the bias that makes it worst
    difference: Estimate
    needed: Mapping[str, float]  # quantiles of the setting that each unit needs: q0005, q50, q9995
    suggested_low: float
    suggested_high: float
    suggested_reached: Estimate  # on fresh units
    searched: tuple[float, float]  # settings beyond the range that were tried for `needed`
    unmet: Estimate  # share of units that no setting in `searched` brings to the target
    units: int


@dataclass(frozen=True, kw_only=True)
class LimitsResult:
    """Factory test limits, what they let through and what they cost."""

    study: Study
    test_corner: Corner
    sd_hz: float
    bias_hz: float
    escape_limit: float | None
    chosen: LimitRates  # on fresh units
    chosen_by_level: bool  # False: the specification's own limits, because no level was given or none is reached
    confirmed: bool | None  # the fresh upper bound keeps to the level; None without a level
    trade: tuple[TradeLine, ...]
    floor: Floor
    bad: Estimate  # share of built units that fail at some corner, fresh units
    bad_by: Mapping[str, int]
    units: int  # per sample
    resistance_test: ResistanceTest | None
    trim: TrimResult | None
    findings: tuple[Finding, ...]
    provenance: Provenance
