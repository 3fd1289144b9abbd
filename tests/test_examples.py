"""Every example study runs the whole way, and teaches what the README says it does."""

from pathlib import Path

import numpy as np
import pytest

import yieldosc
from yieldosc.evaluators import make_evaluator
from yieldosc.population import Population
from yieldosc.sheets.study_file import is_study
from yieldosc.studies.judge import GOOD
from yieldosc.studies.nominal import nominal_values, reference_corner
from yieldosc.studies.results import OUTCOMES
from yieldosc.studies.run import Setup

EXAMPLES = Path(__file__).parents[1] / "bom_examples"
STUDIES = sorted(p for p in EXAMPLES.iterdir() if p.suffix in (".xlsx", ".toml"))


# the text study is the workbook's twin; the crystal on its coil takes the exact path for a third of its units
QUICK = [p for p in STUDIES if p.suffix == ".xlsx" and p.stem != "modem_clock_8mhz_common_base"]


@pytest.fixture(scope="module", params=QUICK, ids=lambda p: p.name)
def found(request):
    return request.param.stem, yieldosc.assess(yieldosc.load(request.param), units=4096)


def failing(result):
    return {name for name, count in result.outcomes.items() if count and name != "good"}


def test_lesson(found, tmp_path):
    name, result = found
    leading = {output: [line.part for line in ranking.parts[:2]] for output, ranking in result.rankings.items()}
    outcomes = result.outcomes
    lessons = {
        "tide_tone_1khz": lambda: result.verdict == "does not meet" and result.tighter[0].part == "C1, C2",
        "beacon_3m85_colpitts": lambda: leading["frequency"][0] == "L1" and result.conditions,
        "logger_clock_8mhz": lambda: outcomes["good"] == 4096 and leading["margin"][0] == "U1",
        "tide_clock_32k768": lambda: failing(result) == {"out_of_limits"} and leading["frequency"][0] == "Y1",
        "dive_tone_phase_shift": lambda: outcomes["no_start"] > 0 and leading["margin"][0] == "Q1",
        "beacon_4m93_clapp": lambda: outcomes["out_of_limits"] > 400 and "C3" in leading["frequency"],
        "lamp_sine_1k5_timer": lambda: outcomes["distorted"] > 0 and result.corners[0].margin is None,
        "tide_tone_own_bridge": lambda: outcomes["good"] == 4096,
        "tide_tone_factory": lambda: "shifted" in result.pilot.verdict and len(result.second_sources) == 4,
        "tide_tone_clipping": lambda: result.limiter.difference.high < 0 and result.corners[0].settled_hz is not None,
        "tide_tone_1khz_rev_b": lambda: result.verdict == "meets",
    }
    assert lessons[name]()
    result.write_workbook(tmp_path / "result.xlsx")
    assert yieldosc.load(tmp_path / "result.xlsx").digest == result.study.digest


def test_a_crystal_that_may_not_start_because_of_its_coil():
    study = yieldosc.load(EXAMPLES / "modem_clock_8mhz_common_base.xlsx")
    population = Population.of(study)
    solver = make_evaluator(study.circuit, nominal_values(population, reference_corner(study)))
    codes = Setup.of(study, solver, seed=1).codes(0, 2048)
    assert np.count_nonzero(codes == OUTCOMES.index("no_start")) > 50
    assert np.count_nonzero(codes == GOOD) > 1800


def test_every_study_is_one_and_the_bare_bom_is_none():
    assert len(STUDIES) == 13
    assert all(is_study(path) for path in STUDIES)
    assert not is_study(EXAMPLES / "buoy_clock_bom.csv")


def test_workbook_and_text_are_the_same_study():
    assert yieldosc.load(EXAMPLES / "logger_clock_8mhz.toml").digest == yieldosc.load(EXAMPLES / "logger_clock_8mhz.xlsx").digest
