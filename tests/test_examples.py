"""Every example study runs the whole way, and teaches what the README says it does."""

from pathlib import Path

import pytest

import yieldosc
from yieldosc.sheets.study_file import is_study

EXAMPLES = Path(__file__).parents[1] / "bom_examples"
STUDIES = sorted(p for p in EXAMPLES.iterdir() if p.suffix in (".xlsx", ".toml"))


@pytest.fixture(scope="module", params=STUDIES, ids=lambda p: p.name)
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
        "modem_clock_8mhz_common_base": lambda: outcomes["no_start"] > 100 and "L1" in leading["margin"],
        "lamp_sine_1k5_timer": lambda: outcomes["distorted"] > 0 and result.corners[0].margin is None,
        "tide_tone_own_bridge": lambda: outcomes["good"] == 4096,
    }
    assert lessons[name]()
    result.write_workbook(tmp_path / "result.xlsx")
    assert yieldosc.load(tmp_path / "result.xlsx").digest == result.study.digest


def test_every_study_is_one_and_the_bare_bom_is_none():
    assert len(STUDIES) == 10
    assert all(is_study(path) for path in STUDIES)
    assert not is_study(EXAMPLES / "buoy_clock_bom.csv")


def test_workbook_and_text_are_the_same_study():
    assert yieldosc.load(EXAMPLES / "logger_clock_8mhz.toml").digest == yieldosc.load(EXAMPLES / "logger_clock_8mhz.xlsx").digest
