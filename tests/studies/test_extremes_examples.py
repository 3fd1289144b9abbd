"""Bounded inputs of real circuits: no simulated unit lies outside the searched extremes, at any corner."""

from __future__ import annotations

from pathlib import Path

import pytest

import yieldosc
from yieldosc.studies.declared import declared_setup
from yieldosc.studies.extremes import bands
from yieldosc.studies.gather import layouts
from yieldosc.studies.yields import corner_results, run_units

EXAMPLES = Path(__file__).parents[2] / "bom_examples"
UNITS = 8192


@pytest.mark.parametrize("name", ["tide_tone_1khz", "tide_clock_32k768", "beacon_3m85_colpitts", "lamp_sine_1k5_timer"])
def test_simulated_units_stay_inside(name):
    setup = declared_setup(yieldosc.load(EXAMPLES / f"{name}.xlsx"), seed=3)
    assert setup.population.bounded
    bins = layouts(setup, UNITS)
    results = corner_results(run_units(setup, bins, 0, UNITS), setup.corners, 0.95)
    made, findings = bands(setup.population, setup.bench, results, streams=setup.streams, units=UNITS)
    assert findings == ()
    for band in made:
        width = band.extreme[1] - band.extreme[0]
        assert band.extreme[0] - 1e-9 * width <= band.monte_carlo[0] <= band.monte_carlo[1]
        assert band.monte_carlo[1] <= band.extreme[1] + 1e-9 * width
        assert band.gap <= 0.01 * width
        if band.output == "startup_margin":
            assert band.rss[0] > 0
