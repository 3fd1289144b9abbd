"""The same study, seed and units give the same values: twice, on one and two workers, in other blocks, from its own
result workbook."""

from __future__ import annotations

from pathlib import Path

import numpy as np
import pytest
from openpyxl import load_workbook

import yieldosc
from yieldosc.studies.assess import assess
from yieldosc.studies.serialise import assessment_dict

EXAMPLES = Path(__file__).parents[2] / "bom_examples"
RUN = {"started", "seconds"}  # of the provenance: when it ran, not what it found


def values(result):
    document = assessment_dict(result)
    document["provenance"] = {k: v for k, v in document["provenance"].items() if k not in RUN}
    return document


@pytest.fixture(scope="module")
def first():
    return assess(yieldosc.load(EXAMPLES / "logger_clock_8mhz.xlsx"), units=9000, rival_units=2048, workers=1)


def test_twice(first):
    again = assess(first.study, units=9000, rival_units=2048, workers=1)
    assert values(again) == values(first)


def test_on_two_workers_and_in_other_blocks(first):
    other = assess(first.study, units=9000, rival_units=2048, workers=2, block=4096)
    assert values(other) == values(first)


def test_another_seed_differs(first):
    other = assess(first.study, units=9000, rival_units=2048, workers=2, seed=2)
    assert values(other)["corners"] != values(first)["corners"]  # a negative control: the comparison can fail


def test_from_its_own_result_workbook(tmp_path):
    study = yieldosc.load(EXAMPLES / "tide_tone_1khz.xlsx")
    made = yieldosc.assess(study, units=8192)
    made.write_workbook(tmp_path / "result.xlsx")
    again = yieldosc.assess(yieldosc.load(tmp_path / "result.xlsx"), units=8192)
    one, two = values(made), values(again)
    for document in (one, two):
        for finding in document["findings"]:  # places name the file's own sheets, and headings may stand elsewhere
            del finding["row"], finding["column"], finding["sheet"]
    assert two == one


def test_measured_values_are_in_the_result_workbook_too(tmp_path):
    source = load_workbook(EXAMPLES / "tide_tone_1khz.xlsx")
    roles = source["Roles"]
    headings = [c.value for c in roles[1]]
    row = next(r for r in roles.iter_rows(min_row=2) if r[headings.index("Role")].value == "C1")
    row[headings.index("Shape")].value = "measured"
    if row[headings.index("Tolerance")].value is not None:
        row[headings.index("Tolerance")].value = None
    sheet = source.create_sheet("Measured")
    sheet.append([row[headings.index("Part")].value])
    for value in 10e-9 * (0.99 + 0.002 * np.random.default_rng(1).standard_normal(60)):
        sheet.append([float(value)])
    source.save(tmp_path / "measured.xlsx")
    made = yieldosc.assess(yieldosc.load(tmp_path / "measured.xlsx"), units=4096)
    assert made.scrutiny.measured[0].values == 60
    assert made.scrutiny.measured[0].declared is not None and made.scrutiny.measured[0].narrow
    made.write_workbook(tmp_path / "result.xlsx")
    again = yieldosc.assess(yieldosc.load(tmp_path / "result.xlsx"), units=4096)
    assert again.study.digest == made.study.digest
    assert values(again)["yield"] == values(made)["yield"]
    assert values(again)["measured_uncertainty"] == values(made)["measured_uncertainty"]
