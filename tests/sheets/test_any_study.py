"""Whatever stands in the cells of a study, the answer is a study or findings: no other error, nothing half read.

Cells of good studies are replaced by words that people write, and by words that nobody should.
"""

import random

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from tests.sheets import clocks, studies
from tests.sheets.test_own_circuit_study import BRIDGE
from yieldosc.errors import InputError
from yieldosc.sheets.entries import Problems
from yieldosc.sheets.grid import EMPTY, Book, Cell, Grid
from yieldosc.sheets.study_file import understood
from yieldosc.sheets.study_tables import workbook_tables

NAMES = ("bridge", "own", "clock")
WORDS = (
    "", "0", "-1", "1e999", "1e-320", "nan", "inf", "5", "5 %", "±5 %", "±100 %", "-3..+1 %", "+80/-20 %", "J", "10k", "4k7",
    "1 MHz", "0 Hz", "-1 Hz", "1 THz", "15 pF", "1,000", "1.234,5", "R1", "C1", "r1", "R1, R2", "Y1", "none", "fork", "X7R",
    "C0G", "AT ±30 ppm -40..85 °C", "AT ±1 ppm -40..125 °C", "±100 ppm/K", "-2 mV/K", "table coil", "table", "measured",
    "fixed", "uniform", "hollow 2", "normal-open", "guaranteed", "resistor", "capacitors", "wien_bridge", "pierce",
    "own_circuit", "colpitts", "25 °C", "-300 °C", "1e6 °C", "10 years", "2", "1001", "0.5", "E12", "E25", "1 pF ±5 %",
    "option stage", "target frequency", "trim role", "life", "supply", "=1+1", "\x1b[31m", "Ω" * 300, "…", "'", '"', "%s", "{0}",
)  # fmt: skip
EXTRA = {
    "Grades": [["Kind or Part", "Tolerance", "Temperature law", "Price", "Price factor"], ["resistor", "±1 %", None, "0.1 €"],
               ["C1", None, "C0G", None, 1.5]],
    "Alternates": [["Part", "Alternate", "Role", "Min", "Typ", "Max", "Tolerance", "Temperature law", "Price"],
                   ["C1", "PX", None, None, None, None, "±2 %"]],
    "Pilot": [["Board", "Frequency"], [1, 1000], [2, "no start"], [3, 1001]],
    "Measured": [["C1"], [1e-8], [1.01e-8], [0.99e-8]],
    "coil": [["Temperature", "Change"], [-40, "-1 %"], [25, 0], [85, "2 %"]],
}  # fmt: skip
TRIM = {"trim role": "RF", "trim low": "10k", "trim high": "40k", "trim step": "1k ±5 %", "measurement sd": "1 ppm",
        "pilot column": "Frequency", "life": "10 years", "test temperature": "25 °C"}  # fmt: skip


def cell(value: object) -> Cell:
    if value is None or value == "":
        return EMPTY
    return Cell("number", str(value), float(value)) if isinstance(value, int | float) else Cell("text", str(value))


def good(name: str) -> dict[str, list[list[object]]]:
    """The sheets of a good study as rows of values."""
    base, design, bom, extra = studies.ROLES, {**studies.DESIGN, **TRIM}, studies.BOM, dict(EXTRA)
    if name == "own":
        design["circuit"], extra["Circuit"] = "own_circuit", [[*row, *[None] * (8 - len(row))] for row in BRIDGE]
    elif name == "clock":
        base, design, bom = clocks.ROLES, {**studies.DESIGN, **clocks.DESIGN}, clocks.BOM
        extra["Pilot"] = [["Board", "Frequency"], [1, 8e6], [2, "8.0001 MHz"], [3, 0]]
    roles = [[role, *(cells.get(column) for column in studies.COLUMNS[1:])] for role, cells in base.items()]
    return {
        "BOM": [list(row) for row in bom],
        "Design": [["Item", "Value", "Unit", "Note"], *([item, value, None, None] for item, value in design.items())],
        "Roles": [list(studies.COLUMNS), *roles],
        **{sheet: [list(row) for row in rows] for sheet, rows in extra.items()},
    }


def answer(sheets: dict[str, list[list[object]]]) -> tuple[object, list[str]]:
    """The study or None, and the codes of the errors."""
    grids = tuple(Grid(name, tuple(tuple(map(cell, row)) for row in rows)) for name, rows in sheets.items())
    book, problems = Book("any.xlsx", "xlsx", grids), Problems()
    study = None
    try:
        study = understood("any", book, workbook_tables(book, problems), problems)
    except InputError as error:
        problems.findings += error.findings
    return study, [f.code for f in problems.findings if f.level == "error"]


def changed(name: str, seed: int, words: list[str]) -> dict[str, list[list[object]]]:
    """The study with as many cells replaced as there are words: by the word, by a neighbour or by a number."""
    dice, sheets = random.Random(seed), good(name)
    for word in words:
        rows = sheets[dice.choice(list(sheets))]
        row = dice.choice(rows)
        column = dice.randrange(len(row))
        row[column] = dice.choice([word, word, word, row[dice.randrange(len(row))], dice.choice([0, -1, 5, 1e300, 0.05])])
    return sheets


@pytest.mark.parametrize("name", NAMES)
def test_the_good_ones_are_good(name: str) -> None:
    study, errors = answer(good(name))
    assert errors == []
    assert (study.pilot.boards, len(study.grades), len(study.alternates)) == (3, 2, 1)


@settings(max_examples=200, deadline=None, suppress_health_check=list(HealthCheck))
@given(name=st.sampled_from(NAMES), seed=st.integers(0, 10**6), words=st.lists(st.sampled_from(WORDS), min_size=1, max_size=4))
def test_any_cells_give_a_study_or_findings(name: str, seed: int, words: list[str]) -> None:
    study, errors = answer(changed(name, seed, words))
    assert (study is None) == bool(errors)
