"""Results that only some studies have: second sources, a pilot build, a declared limiter, a crystal's start."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

from yieldosc.solver.solution import Settling
from yieldosc.studies.results import Estimate
from yieldosc.study import Corner


@dataclass(frozen=True, slots=True, kw_only=True)
class Combination:
    """One allowed fitting of second sources, on the draws of the declared parts."""

    fitted: tuple[tuple[str, str], ...]  # (part, "as declared" or the alternate)
    yield_: Estimate
    difference: Estimate

    @property
    def text(self) -> str:
        """"Y1: second source, C1: as declared"."""
        return ", ".join(f"{part}: {name}" for part, name in self.fitted)


@dataclass(frozen=True, slots=True, kw_only=True)
class PilotTest:
    """One named test of measured boards against the prediction."""

    name: Literal["location", "spread", "shape", "no-starts"]
    method: str
    p_value: float
    rejects: bool  # at the confidence of the study, all tests together


@dataclass(frozen=True, slots=True, kw_only=True)
class Doubt:
    """An assumption under which the measured readings are more likely than under the declared one."""

    name: str
    meaning: str
    log_likelihood_ratio: float


@dataclass(frozen=True, slots=True, kw_only=True)
class PilotResult:
    """Measured boards against the prediction at the test's corner."""

    column: str
    boards: int
    no_starts: int
    corner: Corner
    measured_mean_hz: float
    measured_sd_hz: float
    predicted_mean_hz: float
    predicted_sd_hz: float
    predicted_no_start: Estimate
    tests: tuple[PilotTest, ...]
    detectable_shift_hz: float  # with power 0.8
    detectable_spread_ratio: float
    verdict: str  # "consistent", "shifted", "wider", …, "not enough data"
    doubts: tuple[Doubt, ...]
    bench_frequency_hz: Estimate | None  # what the study's bench frequency would be by these boards


@dataclass(frozen=True, slots=True, kw_only=True)
class LimiterEffect:
    """A declared limiter: the yield with it and without on the same units, and how settling was found in the run."""

    limiter: str
    account: Settling
    yield_with: Estimate
    yield_without: Estimate
    difference: Estimate  # with it minus without


@dataclass(frozen=True, slots=True, kw_only=True)
class CrystalStart:
    """Both start-up figures of a crystal circuit at one temperature, over supplies and ages."""

    temperature_c: float
    margin_min: float  # gain over critical gain
    margin_q50: float
    ratio_min: float  # −R/ESR
    ratio_q001: float
    ratio_q50: float
