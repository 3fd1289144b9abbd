"""Measured lots: what few values leave open, against the bootstrap's own theory, and the words on them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.stats import binom

from yieldosc.parts.shapes import Measured
from yieldosc.studies.assess import assess
from yieldosc.studies.measured_lots import measured_lots, measured_uncertainty
from yieldosc.studies.measured_remarks import measured_findings
from yieldosc.studies.nominal import reference_corner, slopes
from yieldosc.studies.parallel import Workers
from yieldosc.studies.rivals import rivals
from yieldosc.studies.run import Setup
from yieldosc.studies.scrutiny import MeasuredLot, MeasuredUncertainty

RNG = np.random.default_rng(7)
LOT = tuple(10e-9 * (1 - 0.022 + 0.004 * RNG.standard_normal(60)))


def measured_c1(values, declared=(9.5e-9, 10.5e-9)):
    def change(p):
        if p.role != "C1":
            return p
        return replace(p, shape=Measured(values), low=min(values), high=max(values), reel=None, declared=declared,
                       pedigree="measured")  # fmt: skip

    return change


def test_uncertainty_of_few_values_is_the_bootstraps(make_study, ideal_wien):
    # Only C1 differs between units; good when f ≥ its lower limit, that is when C1 ≤ c_max: the share of good units
    # of a lot of n is a binomial share of n draws, whose 5 and 95 % points are known.
    values = tuple(10e-9 * (1 + x) for x in np.linspace(-0.05, 0.05, 20))
    study = make_study(gain=4.0, r=0.0, c=0.0, window=0.0149, change=measured_c1(values))
    setup = Setup.of(study, ideal_wien(), seed=1)
    good = np.mean([abs((v / 10e-9) ** -0.5 - 1) <= 0.0149 for v in values])
    found = measured_uncertainty(setup, good)
    for point, q in ((found.low, 0.05), (found.middle, 0.5), (found.high, 0.95)):
        # 128 lots leave the points open by about one value in twenty; 1,024 units by 0.015 each
        assert point == pytest.approx(binom.ppf(q, 20, good) / 20, abs=0.09)
    many = measured_uncertainty(
        Setup.of(make_study(gain=4.0, r=0.0, c=0.0, window=0.0149, change=measured_c1(values * 30)), ideal_wien(), seed=1),
        good,
    )
    assert many.high - many.low < (found.high - found.low) / 3  # thirty times as many values: √30 narrower


def test_nothing_measured_leaves_nothing_open(make_study, ideal_wien):
    study = make_study(gain=4.0)
    assert measured_uncertainty(Setup.of(study, ideal_wien(), seed=1), 0.8) is None
    assert measured_lots(study.parameters) == ()


def test_workers_and_seeds(make_study, ideal_wien):
    study = make_study(gain=4.0, change=measured_c1(LOT))
    setup = Setup.of(study, ideal_wien(), seed=1)
    assert measured_uncertainty(setup, 0.8) == measured_uncertainty(setup, 0.8, workers=Workers(2))
    assert measured_uncertainty(setup, 0.8) != measured_uncertainty(Setup.of(study, ideal_wien(), seed=0), 0.8)


def test_narrow_and_off_centre_lot(make_study):
    (lot,) = measured_lots(make_study(change=measured_c1(LOT)).parameters)
    ratios = np.array(LOT) / 10e-9 - 1
    assert lot.values == 60 and lot.outside == 0
    assert lot.mean == pytest.approx(ratios.mean()) and lot.declared == pytest.approx((-0.05, 0.05))
    assert lot.narrow and lot.off_centre
    # Student's interval of a mean: 2.001 = t(0.975; 59), from a table, from memory
    assert lot.mean_interval[1] - lot.mean == pytest.approx(2.001 * ratios.std(ddof=1) / 60**0.5, rel=1e-3)
    (wide,) = measured_lots(make_study(change=measured_c1(tuple(np.linspace(9.5e-9, 10.5e-9, 60)))).parameters)
    assert not wide.narrow and not wide.off_centre
    (beyond,) = measured_lots(make_study(change=measured_c1((9e-9, 10e-9))).parameters)
    assert beyond.outside == 1


def test_the_next_lot_is_a_set_of_its_own(make_study, ideal_wien):
    study = make_study(gain=4.0, change=measured_c1(LOT))
    setup = Setup.of(study, ideal_wien(), seed=1)
    tried, _ = rivals(setup, slopes(setup.population, setup.bench, reference_corner(study)), units=8192)
    found = {r.name: r.yield_.estimate for r in tried}
    plain, _ = rivals(
        Setup.of(make_study(gain=4.0), ideal_wien(), seed=1), {}, units=8192
    )
    assert found["declared tolerance"] == plain[0].yield_.estimate  # C1 uniform ± 5 % again, the same draws
    assert found["declared tolerance"] != found["declared"]


def made(**changes):
    values = {
        "role": "C1", "part": "C1", "values": 60, "declared": (-0.05, 0.05), "mean": -0.022, "low": -0.031,
        "high": -0.012, "sd": 0.004, "mean_interval": (-0.023, -0.021), "outside": 0,
    }  # fmt: skip
    return MeasuredLot(**(values | changes))


@pytest.mark.parametrize(
    ("lot", "level", "text"),
    [
        (
            made(), "note",
            "C1: 60 measured values from −3.1 % to −1.2 % of the nominal value, mean −2.2 % (−2.3 % to −2.1 %); against "
            "the declared −5 % to +5 % the lot is narrow and off-centre. One lot tells nothing of the next: the set "
            "'declared tolerance' lets it lie anywhere in what is declared.",
        ),
        (
            made(low=-0.04, high=0.04, mean=0.0, mean_interval=(-0.001, 0.001), role="L", part="L1"), "note",
            "L1 L: 60 measured values from −4 % to +4 % of the nominal value, mean +0 % (−0.1 % to +0.1 %); against the "
            "declared −5 % to +5 % the lot fills it and is centred. One lot tells nothing of the next: the set 'declared "
            "tolerance' lets it lie anywhere in what is declared.",
        ),
        (
            made(outside=2, low=-0.06), "warning",
            "C1: 60 measured values from −6 % to −1.2 % of the nominal value, mean −2.2 % (−2.3 % to −2.1 %); 2 of them "
            "lie outside the declared −5 % to +5 %. One lot tells nothing of the next: the set 'declared tolerance' "
            "lets it lie anywhere in what is declared.",
        ),
        (
            made(declared=None, values=1, low=-0.01, high=-0.01), "note",
            "C1: 1 measured values from −1 % to −1 % of the nominal value; no tolerance is declared to compare them "
            "with. One lot tells nothing of the next.",
        ),
    ],
)  # fmt: skip
def test_words_on_a_lot(lot, level, text):
    (finding,) = measured_findings([lot], None)
    assert (finding.level, finding.text) == (level, text)


def test_words_on_few_values():
    u = MeasuredUncertainty(lots=128, units_per_lot=1024, low=0.801, middle=0.85, high=0.9, confidence=0.9)
    assert [f.text for f in measured_findings([], u)] == [
        "So few measured values leave the yield open by themselves: over 128 lots drawn from them with replacement nine "
        "in ten yield 80.1 % to 90 %, half 85 % or less. The yield's own interval does not hold this."
    ]


def test_an_assessment_says_all_of_it(make_study, ideal_wien):
    study = make_study(gain=4.0, change=measured_c1(LOT))
    a = assess(study, units=8192, rival_units=4096, workers=1, evaluator=ideal_wien())
    assert [f.code for f in a.findings if f.code.startswith("measured")] == ["measured-lot", "measured-uncertainty"]
    assert a.conditions == ("if further lots are like the one measured: C1",)
    assert a.scrutiny.measured_uncertainty.low <= a.yield_.estimate <= a.scrutiny.measured_uncertainty.high
