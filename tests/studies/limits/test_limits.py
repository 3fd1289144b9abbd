"""The whole run on a linear circuit of normal parts, whose escapes are integrals."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest
from scipy.integrate import quad
from scipy.stats import norm

from yieldosc.parts.shapes import Normal
from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.limits.limits import limits

PPM = 1e-6
SPREAD = 20 * PPM
ROOM_C, COLD_C = 25.0, -40.0


@dataclass(frozen=True)
class Linear:
    """Room: target · (1 + x1). Cold: target · (1 + ρ x1 + √(1 − ρ²) x2). x: relative deviations of R1 and R2."""

    target_hz: float
    typical: float
    correlation: float = 0.8

    def solve(self, values, temperature_c, *, own_law=frozenset(), growth=False, audit=None):
        x1, x2 = (np.broadcast_to(values[role], np.shape(values["R1"])) / self.typical - 1 for role in ("R1", "R2"))
        cold = self.correlation * x1 + np.sqrt(1 - self.correlation**2) * x2
        frequency = self.target_hz * (1 + (x1 if temperature_c == ROOM_C else cold))
        n = len(frequency)
        return Solution(
            frequency_hz=frequency, startup_margin=np.full(n, 2.0), status=np.full(n, Status.STARTS, dtype=np.int8),
            growth_per_s=None,
        )  # fmt: skip


@pytest.fixture
def linear_study(make_study):
    """R1 and R2 normal with sd 20 ppm, limits ±50 ppm, tested at 25 °C, judged at −40 °C and 25 °C."""

    def spread(p):
        if p.role not in ("R1", "R2"):
            return p
        half = 3 * SPREAD * p.typical
        return replace(p, low=p.typical - half, high=p.typical + half, shape=Normal(cut=False), reel=None)

    def made(**design):
        target_hz = make_study().design.target_frequency_hz
        settings = {
            "temperature_low_c": COLD_C, "temperature_high_c": ROOM_C, "temperature_points": 2,
            "test_temperature_c": ROOM_C, "measurement_sd_hz": 2.5 * PPM * target_hz,
        } | design  # fmt: skip
        study = make_study(r=0.01, c=0.0, window=50 * PPM, change=spread, **settings)
        return study, Linear(target_hz, study.parameter("R1").typical)

    return made


@pytest.fixture
def few_levels(monkeypatch):
    """Only the study's own level is searched for: the other lines of the trade cost time and prove nothing here."""
    monkeypatch.setattr("yieldosc.studies.limits.limits.LEVELS", ())


def escapes(low_ppm, high_ppm, correlation=0.8):
    """P(accepted and bad) and P(accepted), the unit bad where room or cold lies outside ±50 ppm, by quadrature."""

    def accept(x):
        return norm.cdf((high_ppm - x) / 2.5) - norm.cdf((low_ppm - x) / 2.5)

    def good(x):
        rest = 20 * np.sqrt(1 - correlation**2)
        inside = norm.cdf((50 - correlation * x) / rest) - norm.cdf((-50 - correlation * x) / rest)
        return inside if abs(x) <= 50 else 0.0

    def integral(what):
        return quad(lambda x: what(x) * norm.pdf(x, scale=20), -110, 110, points=[-50, 50], limit=400)[0]

    return integral(lambda x: accept(x) * (1 - good(x))), integral(accept), integral(lambda x: (1 - accept(x)) * good(x))


def test_rates_of_the_chosen_limits_are_the_integrals(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=5e-3)
    r = limits(study, units=60_000, workers=1, evaluator=evaluator)
    target = study.design.target_frequency_hz
    built, passed, lost = escapes(*((f / target - 1) / PPM for f in (r.chosen.low_hz, r.chosen.high_hz)))
    assert r.chosen_by_level
    assert r.confirmed is True
    assert r.chosen.escapes_shipped.high <= 5e-3
    # 95 % intervals of one seed: all three hold
    assert r.chosen.escapes_built.low <= built <= r.chosen.escapes_built.high
    assert r.chosen.escapes_shipped.low <= built / passed <= r.chosen.escapes_shipped.high
    assert r.chosen.false_rejects.low <= lost <= r.chosen.false_rejects.high
    # the guard band costs good units, and is symmetrical here: no half is favoured by more than the draws allow
    assert (target - r.chosen.low_hz) / (r.chosen.high_hz - target) == pytest.approx(1, abs=0.15)


def test_no_limits_at_this_temperature_reach_the_level_and_the_floor_says_so(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=1e-5)
    r = limits(study, units=20_000, workers=1, evaluator=evaluator)
    assert (r.chosen_by_level, r.confirmed) == (False, False)
    assert (r.chosen.low_hz, r.chosen.high_hz) == (study.design.frequency_low_hz, study.design.frequency_high_hz)
    # 39.42 ppm (seen, by quadrature): hardly a unit of the 2,000 that weigh near the centre
    assert r.floor.closing < 500e-6
    assert next(line for line in r.trade if line.level == 1e-5).rates is None


def test_an_unrelated_reading_has_the_share_of_bad_units_as_its_floor(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=1e-3)
    r = limits(study, units=20_000, workers=1, evaluator=replace(evaluator, correlation=0.0))
    cold = 2 * norm.sf(2.5)
    assert not r.chosen_by_level
    assert r.floor.rates.escapes_shipped.low <= cold <= r.floor.rates.escapes_shipped.high


def test_a_strict_level_costs_more_good_units(linear_study):
    study, evaluator = linear_study(escape_limit=1e-3)
    r = limits(study, units=60_000, workers=1, evaluator=evaluator)
    lines = [line.rates for line in r.trade if line.rates is not None]
    lost = [rates.false_rejects.estimate for rates in lines]
    shipped = [rates.escapes_shipped.estimate for rates in lines]
    assert len(lines) >= 4
    assert lost == sorted(lost)
    assert shipped == sorted(shipped, reverse=True)


def test_without_a_level_the_limits_are_the_specification(linear_study, few_levels):
    study, evaluator = linear_study()
    r = limits(study, units=20_000, workers=1, evaluator=evaluator)
    assert (r.chosen.low_hz, r.chosen.high_hz) == (study.design.frequency_low_hz, study.design.frequency_high_hz)
    assert (r.chosen_by_level, r.confirmed) == (False, None)
    assert [f.text for f in r.findings if f.code == "no-escape-limit"] == [
        "no escape limit in Design: the test limits are the frequency limits themselves; give the ppm that may be "
        "shipped, and limits are chosen for it"
    ]


def test_what_the_study_does_not_say_is_said(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=5e-3, test_temperature_c=None, measurement_sd_hz=None)
    found = {f.code: (f.level, f.text) for f in limits(study, units=20_000, workers=1, evaluator=evaluator).findings}
    assert found == {
        "test-temperature-assumed": ("note", "no test temperature in Design: 25 °C taken"),
        "no-measurement-sd": (
            "warning",
            "no measurement sd in Design: the instrument is taken as free of noise; give it, in Hz or ppm",
        ),
    }


def test_bias_costs_more_good_units_than_none(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=5e-3)
    biased = replace(study, design=replace(study.design, measurement_bias_hz=4 * PPM * study.design.target_frequency_hz))
    calm, off = (limits(s, units=20_000, workers=1, evaluator=evaluator) for s in (study, biased))
    assert off.chosen.false_rejects.estimate > 1.1 * calm.chosen.false_rejects.estimate


def test_no_number_of_workers_changes_a_digit(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=5e-3)
    one, two = (limits(study, units=20_000, workers=w, evaluator=evaluator) for w in (1, 2))
    assert replace(one, provenance=two.provenance) == two
    other = limits(study, units=20_000, workers=1, seed=2, evaluator=evaluator)
    assert other.chosen != one.chosen


def test_the_study_is_left_as_it_was(linear_study, few_levels):
    study, evaluator = linear_study(escape_limit=5e-3)
    copy = replace(study)
    limits(study, units=10_000, workers=1, evaluator=evaluator)
    assert study == copy
