"""A study: what is to be analysed, fully understood and validated, with no trace of a spreadsheet in it.

Everything below this line trusts it; every doubt was a finding before it was made.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, fields
from typing import TYPE_CHECKING, Literal

from yieldosc.errors import Finding
from yieldosc.parts.parameter import Given, Law, Parameter

if TYPE_CHECKING:
    from yieldosc.circuits.circuit import Circuit

Rule = Literal["every corner"]
Bucket = Literal["low_margin", "slow_start", "out_of_limits", "distorted", "over_drive"]


@dataclass(frozen=True, slots=True)
class Requirement:
    """One limit on one attribute of a solved unit, and the outcome of a unit that misses it."""

    attribute: str  # "frequency_hz" (settled_hz where a limiter is declared), "startup_margin", "startup_s", …
    low: float | None
    high: float | None
    outcome: Bucket
    unit: str
    rule: Rule = "every corner"
    given: tuple[Given, ...] = ()


@dataclass(frozen=True, slots=True)
class Corner:
    """A condition that every unit must survive."""

    temperature_c: float
    supply_v: float | None
    age_years: float

    @property
    def text(self) -> str:
        """"-40 °C, 3.0 V, 10 years", for tables and findings."""
        supply = "" if self.supply_v is None else f", {self.supply_v:.4g} V"
        age = f", {self.age_years:g} years" if self.age_years else ""
        return f"{self.temperature_c:g} °C{supply}{age}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Design:
    """The items of the Design sheet, in SI units; None where the user said nothing and no default exists."""

    target_frequency_hz: float
    frequency_low_hz: float  # the limits themselves, absolute
    frequency_high_hz: float
    least_margin: float = 1.0
    longest_startup_s: float | None = None
    startup_ratio: float = 1e6
    most_distortion: float | None = None  # fraction
    most_drive_w: float | None = None
    temperature_low_c: float
    temperature_high_c: float
    temperature_points: int = 9
    supply_v: float | None = None
    supply_tolerance: tuple[float, float] = (0.0, 0.0)  # fractions
    life_years: float | None = None
    yield_target: float | None = None  # fraction
    confidence: float = 0.95
    default_shape: str = "uniform"
    reel_share: float = 0.0
    bench_frequency_hz: float | None = None
    build_quantity: float | None = None
    failed_unit_cost: float | None = None
    test_temperature_c: float | None = None
    measurement_sd_hz: float | None = None
    measurement_bias_hz: float = 0.0  # the instrument may read so much high or low (±), the same for every unit
    escape_limit: float | None = None  # fraction
    trim_role: str | None = None
    trim_low: float | None = None
    trim_high: float | None = None
    trim_step: float | None = None  # None: continuous, or trim_series
    trim_step_tolerance: float = 0.0  # ± fraction: own tolerance of each switched step
    trim_series: str | None = None  # "E24": select on test from the values of this series between low and high
    pilot_column: str | None = None

    @property
    def temperatures_c(self) -> tuple[float, ...]:
        """Equal steps, 25 °C added when the steps miss it and the range holds it; low = high is one."""
        low, high, count = self.temperature_low_c, self.temperature_high_c, self.temperature_points
        if low == high:
            return (low,)
        steps = [low + (high - low) * i / (count - 1) for i in range(count)]
        if low < 25.0 < high and not any(abs(t - 25.0) < 1e-9 for t in steps):
            steps.append(25.0)
        return tuple(sorted(steps))

    @property
    def supplies_v(self) -> tuple[float | None, ...]:
        """Low, nominal and high supply; one where the supply has no tolerance; (None,) without a supply."""
        if self.supply_v is None:
            return (None,)
        low, high = self.supply_tolerance
        levels = {self.supply_v * (1 + low), self.supply_v, self.supply_v * (1 + high)}
        return tuple(sorted(levels))

    @property
    def ages_years(self) -> tuple[float, ...]:
        """New, and the end of life where one is stated."""
        return (0.0,) if not self.life_years else (0.0, self.life_years)

    def corners(self) -> tuple[Corner, ...]:
        """Every temperature × supply × age, temperature slowest."""
        return tuple(
            Corner(t, v, a) for t in self.temperatures_c for v in self.supplies_v for a in self.ages_years
        )

    def items(self) -> dict[str, object]:
        """Field name → value, for digests and reports."""
        return {f.name: getattr(self, f.name) for f in fields(self)}


@dataclass(frozen=True, slots=True, kw_only=True)
class GradeRow:
    """One line of the user's Grades: what a kind of part, or one part, can be bought as. The price is one part's."""

    target: str  # a designator, or a kind ("capacitor")
    by_part: bool
    tolerance: tuple[float, float] | None  # fractions; None: as declared
    law: Law | None
    law_text: str | None  # None: the law as declared; "none": no dependence
    price: float | None
    price_factor: float | None  # against the part as declared
    place: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Alternate:
    """A second source of one part: every role of the part that differs, complete."""

    part: str
    name: str
    parameters: tuple[Parameter, ...]
    price: float | None
    place: str


@dataclass(frozen=True, slots=True, kw_only=True)
class Pilot:
    """Boards that were built and measured at the test temperature, in the order of their rows."""

    column: str
    frequency_hz: tuple[float, ...]
    no_starts: int
    place: str

    @property
    def boards(self) -> int:
        """Measured boards, those that did not start included."""
        return len(self.frequency_hz) + self.no_starts


@dataclass(frozen=True, slots=True, kw_only=True)
class Study:
    """Circuit, parts, limits and conditions of one analysis."""

    name: str
    circuit: Circuit  # already built for its options and for the roles that are present
    parameters: tuple[Parameter, ...]
    conditions: Mapping[str, float]  # CL of a crystal and the like: no spread
    design: Design
    requirements: tuple[Requirement, ...]
    design_given: Mapping[str, Given] = field(default_factory=dict)  # item → as written and where
    bom: tuple[object, ...] = ()  # the importer's lines, carried for the reports' echo, never read here
    bom_rows: tuple[tuple[str, ...], ...] = ()  # the BOM table as text, heading row first, for the result workbook
    design_rows: tuple[tuple[str, ...], ...] = ()  # the Design and Roles sheets as text, without their headings
    role_rows: tuple[tuple[str, ...], ...] = ()
    extra_rows: Mapping[str, tuple[tuple[str, ...], ...]] = field(default_factory=dict)  # other sheets, headings first
    grades: tuple[GradeRow, ...] = ()  # empty: the built-in ladders
    alternates: tuple[Alternate, ...] = ()
    pilot: Pilot | None = None
    prices: Mapping[str, float] = field(default_factory=dict)  # designator → price of one part, where the BOM states it
    findings: tuple[Finding, ...] = ()
    digest: str = ""  # SHA-256 of the canonical inputs as understood

    def parameter(self, role: str) -> Parameter:
        """The parameter of a role; KeyError when the study has none."""
        for candidate in self.parameters:
            if candidate.role == role:
                return candidate
        raise KeyError(role)
