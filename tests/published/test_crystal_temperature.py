"""Quartz over temperature and time: rows F01 to F10 of the collected check values, each with its source."""

import numpy as np
import pytest

from yieldosc.parts import quartz
from yieldosc.parts.laws import parse_law
from yieldosc.quantities import parse_tolerance


def change(text, temperature_c, **u):
    return float(np.ravel(parse_law(text).change(temperature_c, {k: np.array([v]) for k, v in u.items()}))[0])


def test_f01_coefficients():
    """Gerber & Ballato, Precision Frequency Control vol. 2 (1985) p. 101, quoted twice on a mailing list (seen there)."""
    assert (quartz.A1_PER_DEGREE, quartz.A2, quartz.A3) == (-5.08e-6, -0.45e-9, 108.6e-12)


@pytest.mark.parametrize(("temperature_c", "ppm"), [(-40, -22.36986), (-20, -4.33043), (70, 2.50793), (85, 13.20160)])
def test_f03_at_cut_values(temperature_c, ppm):
    """The same source, 1.7 minutes of arc from the reference (derived, verified numerically)."""
    assert quartz.at_curve(float(temperature_c), 1.7 / 60) * 1e6 == pytest.approx(ppm, abs=1e-4)


def test_f04_the_curve_turns_over_near_room_temperature():
    """Makers quote an inflection from 25 to 35 °C (a maker's tutorial, seen). The cubic's own is −a2/(3 a3) from 25 °C."""
    t = np.linspace(0.0, 60.0, 60001)
    second = np.gradient(np.gradient(quartz.at_curve(t, 2 / 60), t), t)[5:-5]
    inflection = t[5:-5][np.argmin(np.abs(second))]
    assert inflection == pytest.approx(25 + 0.45e-9 / (3 * 108.6e-12), abs=0.05)
    assert 25 <= inflection <= 35


def test_f05_a_tuning_fork_at_45_degrees():
    """A watch crystal's data sheet (TF20 series, doc 008-0353-0 rev C p. 2, seen): −0.030 ppm/K², 25 °C: −12.0 ppm."""
    assert change("fork -0.030 ppm/K² 25 °C", 45.0) * 1e6 == pytest.approx(-12.0, abs=1e-9)


def test_f07_a_maker_who_is_not_consistent_with_himself():
    """A maker's note (seen): "−49 ppm" from −10 to 60 °C is −0.04 · 35²; "−151 ppm" at −40 °C would need −0.0357."""
    assert change("fork -0.04 ppm/K² 25 °C", 60.0) * 1e6 == pytest.approx(-49.0, abs=1e-9)
    assert change("fork -0.04 ppm/K² 25 °C", -10.0) * 1e6 == pytest.approx(-49.0, abs=1e-9)
    assert change("fork -0.0357 ppm/K² 25 °C", -40.0) * 1e6 == pytest.approx(-151.0, abs=1.0)
    assert abs(change("fork -0.04 ppm/K² 25 °C", -40.0) * 1e6 + 151.0) > 10  # the two notes cannot both hold


@pytest.mark.parametrize(
    ("hz", "at_c", "ppm_per_k", "to_c", "wanted_khz"),
    [(500e3, 50.0, -20.0, 60.0, 499.900), (450e3, 30.0, -10.0, 50.0, 449.910)],
)
def test_f08_linear_coefficient(hz, at_c, ppm_per_k, to_c, wanted_khz):
    """Prakash & Rawat, Electronic Devices and Circuits, Ex 8.8 and 8.9 p. 296 (companion notebook, seen)."""
    law = parse_law(f"{ppm_per_k:g} ppm/K")
    moved = hz * (1 + law.change(to_c, {}) - law.change(at_c, {}))
    assert moved / 1e3 == pytest.approx(wanted_khz, abs=1e-3)


def test_f09_stability_in_ppm():
    """Frenzel, Principles of Electronic Communication Systems, Ex 8.1 p. 249 (companion notebook, seen)."""
    low, high = parse_tolerance("±200 ppm", nominal=16e6, si_unit="Hz")
    assert (16e6 * (1 + low), 16e6 * (1 + high)) == pytest.approx((15_996_800, 16_003_200), abs=1e-6)


def test_f10_a_logarithmic_ageing_stays_inside_the_drift_that_is_entered():
    """MIL-PRF-55310E's law f(t) = A ln(B t + 1) + f0, t in days (quoted by a user, seen). A study takes drift as a band
    over the stated life: a law fitted to 2 ppm in the first year ends inside ±5 ppm after ten years."""
    b = 0.05
    a = 2e-6 / np.log(b * 365.25 + 1)
    assert 2e-6 < a * np.log(b * 3652.5 + 1) < 5e-6
