"""Further refusals of the study reader, and every assumption that it tells, matched whole.

The texts are this project's own words; each row changes one cell of a good study.
"""

import pytest
from openpyxl import load_workbook

from tests.sheets.clocks import write_clock
from tests.sheets.studies import BOM, COLUMNS, write
from yieldosc.errors import InputError
from yieldosc.sheets.study_file import load_study


def roles_sheet(*rows):
    return {"extra": {"Roles": list(map(list, rows))}}


REFUSED = {
    "roles empty": (write, roles_sheet(COLUMNS), "no-roles", "Roles",
        "the sheet Roles has no rows; give each role of the circuit a row"),
    "role nameless": (write, {"roles": {"": {"Part": "R9"}}}, "row-without-role", "Roles!9",
        "this row has values but no role; name the role or clear it"),
    "roles headless": (write, roles_sheet(["Part", "Typ"], ["R1", "1k"]), "missing-column", "Roles!A1",
        'Roles has no column "Role"; its first row must hold the headings'),
    "role as an error": (write, {"roles": {"=1/0": {"Part": "R9"}}}, "no-value", "Roles!A9",
        "Role: the cell holds a formula without a stored result; type the value itself"),
    "several lines": (write, {"bom": [*BOM, ["R1", "22k", "±1 %", ""]]}, "ambiguous-part", "Roles!B2",
        "R1 names R1, which stands on several lines of the BOM that differ (BOM!A2, BOM!A8); rename or delete all but one"),
    "limit at zero": (write, {"design": {"frequency limit low": "-100 %"}}, "not-positive", "Design!B4",
        "frequency limit low must lie above 0 Hz; found -100 %: a deviation is written in ppm or %, a frequency in Hz is the limit itself"),
    "limit below zero": (write, {"design": {"frequency limit low": "-970 Hz"}}, "not-positive", "Design!B4",
        "frequency limit low must lie above 0 Hz; found -970 Hz: a deviation is written in ppm or %, a frequency in Hz is the limit itself"),
    "limit in volts": (write, {"design": {"frequency limit low": "2 V"}}, "unreadable", "Design!B4",
        'frequency limit low must be in ppm, % or Hz; found "2 V"'),
    "colder than cold": (write, {"design": {"temperature low": "-300 °C"}}, "impossible", "Design!B6",
        "temperature low -300 °C is no temperature of a board"),
    "option twice": (write, {"design": {"option limiter": "none"}, "rows": [("Option_Limiter", "agc")]}, "doubled-item", "Design!B10",
        '"Option_Limiter" stands twice; keep one'),
    "value alone": (write, {"rows": [(None, "99 %")]}, "value-without-item", "Design!B9",
        "the value 99 % stands beside no item"),
    "item as an error": (write, {"rows": [("=1/0", "99 %")]}, "no-value", "Design!A9",
        "Design Item: the cell holds a formula without a stored result; type the value itself"),
    "measured and tolerance": (write, {"roles": {"R1": {"Shape": "measured", "Tolerance": "±1 %"}}, "extra": {"Measured": [["R1"], [1], [2]]}},
        "two-spreads", "Roles!G2", "R1 has both the shape measured and a tolerance; keep one of them"),
    "measured and bounds": (write, {"roles": {"R1": {"Shape": "measured", "Min": "1k", "Max": "2k"}}, "extra": {"Measured": [["R1"], [1], [2]]}},
        "two-spreads", "Roles!G2", "R1 has both the shape measured and Min or Max; keep one of them"),
    "measured nothing": (write, {"roles": {"R1": {"Shape": "measured"}}, "extra": {"Measured": [["R1"], [15800]]}},
        "no-measurements", "Measured!A1", "Measured column R1 has fewer than two values"),
    "measured below zero": (write, {"roles": {"R1": {"Shape": "measured"}}, "extra": {"Measured": [["R1"], [15800], [-1], [15801]]}},
        "not-positive", "Measured!A3", "measured R1 must be above zero; found -1"),
    "trim of a condition": (write_clock, {"design": {"trim role": "CL", "trim low": "1 pF", "trim high": "2 pF"}}, "unknown-role", "Design!B9",
        "trim role CL is an operating condition, the same for every unit; name a part"),
}  # fmt: skip
SAID = {
    "value and law beat the bom": (write, {"roles": {"R1": {"Typ": "16k", "Temperature law": "±50 ppm/K"}}}, [
        ("note", "roles-beat-bom", "Roles!D2", "R1: Roles says 16k, the BOM line of R1 says 15k8; Roles is used"),
        ("note", "roles-beat-bom", "Roles!H2", "R1: Roles says ±50 ppm/K, the BOM line of R1 says ±100 ppm/K; Roles is used"),
    ]),
    "bounds beat the bom": (write, {"roles": {"R1": {"Min": "15k", "Max": "16k"}}}, [
        ("note", "roles-beat-bom", "Roles!C2", "R1: Roles says Min 15k, Max 16k, the BOM line of R1 says ±1 %; Roles is used"),
    ]),
    "fixed beats the bom": (write, {"roles": {"R1": {"Shape": "fixed"}}}, [
        ("note", "roles-beat-bom", "Roles!G2", "R1: Roles says fixed, the BOM line of R1 says ±1 %; Roles is used"),
    ]),
    "the same is no contradiction": (write, {"roles": {"R1": {"Typ": "15.8 kΩ", "Tolerance": "1 %", "Temperature law": "±100 ppm/K"}}}, []),
    "one part in two places": (write, {"roles": {"R2": {"Part": "R1"}}}, [
        ("warning", "part-in-two-places", "Roles!B4", "R1 and R2 both name R1: they are drawn as two parts; name another designator, unless R1 is an array"),
    ]),
    "no law": (write, {"bom": [BOM[0], ["R1, R2", "15k8", "±1 %", "thick film"], *BOM[2:]]}, [
        ("warning", "no-law", "", "no temperature law for R1, R2: taken as constant over temperature; write none to say that this is meant, or give the law"),
    ]),
    "no law, and meant": (write, {"bom": [BOM[0], ["R1, R2", "15k8", "±1 %", "thick film"], *BOM[2:]],
            "roles": {"R1": {"Temperature law": "none"}, "R2": {"Temperature law": "none"}}}, []),
    "ageing": (write, {"design": {"life": "10 years"}, "roles": {"C1": {"Temperature law": "X7R"}}}, [
        ("note", "ageing-assumed", "Roles", "C1 (X7R): a loss of 2.5 % per decade of time from 1000 h on is assumed over the life; write Drift in Roles to state another"),
        ("note", "roles-beat-bom", "Roles!H3", "C1: Roles says X7R, the BOM line of C1 says C0G; Roles is used"),
    ]),
    "no source": (write, {"roles": {"R1": {"Source": None}, "GBW": {"Source": None}}}, [
        ("note", "pedigree-assumed", "Roles", "no Source for R1, GBW: counted as assumed; a verdict then holds on that condition"),
    ]),
    "default": (write_clock, {"roles": {"Cfb": None}}, [
        ("warning", "default-used", "", "Cfb (capacitance from output to input) is not given: 500 fF without spread is assumed; give it in Roles if it matters"),
    ]),
    "condition with a spread": (write_clock, {"roles": {"CL": {"Tolerance": "±5 %", "Drift": "±1 %"}}}, [
        ("warning", "condition-without-spread", "Roles!F3", "CL is an operating condition, the same for every unit: Tolerance, Drift not used"),
    ]),
}  # fmt: skip


@pytest.mark.parametrize("name", REFUSED)
def test_refused(tmp_path, name):
    make, change, *expected = REFUSED[name]
    with pytest.raises(InputError) as caught:
        load_study(make(tmp_path / "study.xlsx", **change))
    told = [(f.code, str(f.place), f.text) for f in caught.value.findings if f.level == "error"]
    assert tuple(expected) in told
    assert len(told) == 1


@pytest.mark.parametrize("name", SAID)
def test_said(tmp_path, name):
    make, change, expected = SAID[name]
    plain = {f.text for f in load_study(make(tmp_path / "plain.xlsx")).findings}
    found = load_study(make(tmp_path / "study.xlsx", **change)).findings
    assert sorted((f.level, f.code, str(f.place), f.text) for f in found if f.text not in plain) == expected


def test_a_good_clock_says_nothing(tmp_path):
    study = load_study(write_clock(tmp_path / "clock.xlsx"))
    assert study.findings == ()
    assert (study.parameter("FL").nominal, study.conditions["CL"]) == (8e6, 12e-12)


def test_the_supply_is_no_role(tmp_path):
    path = write_clock(tmp_path / "clock.xlsx", design={"option stage": "bjt"}, roles={"VCC": {"Typ": "5 V"}})
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert "Roles!15: VCC is the supply: give it in Design as supply and supply tolerance" in str(caught.value)


def test_a_doubled_role(tmp_path):
    path = write(tmp_path / "study.xlsx")
    book = load_workbook(path)
    book["Roles"].append(["R1", "R1"])
    book.save(path)
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert str(caught.value) == "Roles!9: role R1 stands twice; keep one row"


def test_lines_that_say_the_same_are_one_part(tmp_path):
    study = load_study(write(tmp_path / "study.xlsx", bom=[*BOM, ["R1", "15.8k", "1 %", "100 ppm/K"]]))
    assert study.parameter("R1").nominal == 15.8e3


@pytest.mark.parametrize(("option", "choice"), [("limiter", "AGC"), ("Limiter", "agc"), ("LIMITER", "Agc")])
def test_options_in_any_case(tmp_path, option, choice):
    study = load_study(write(tmp_path / "study.xlsx", design={f"option {option}": choice}))
    assert study.circuit.options["limiter"] == "agc"


def test_a_designator_is_spelt_as_the_bom_spells_it(tmp_path):
    study = load_study(write(tmp_path / "study.xlsx", roles={"RF": {"Part": "r3"}}))
    assert study.parameter("RF").part == "R3"
