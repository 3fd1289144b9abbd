"""Grades, Alternates, Pilot, prices and the items of test and trim: understood, and every refusal matched whole.

The texts are this project's own words; expected values are the cells themselves in SI units.
"""

from itertools import zip_longest

import pytest

from tests.sheets.studies import BOM, write
from yieldosc.errors import InputError
from yieldosc.sheets.prices import price_heading
from yieldosc.sheets.study_file import load_study
from yieldosc.study import GradeRow, Pilot

GRADES = ["Kind or Part", "Tolerance", "Temperature law", "Price", "Price factor"]
ALTERNATES = ["Part", "Alternate", "Role", "Min", "Typ", "Max", "Tolerance", "Shape", "Temperature law", "Source", "Price"]  # fmt: skip
GOOD_PILOT = [["Board", "Frequency"], [1, 1001.5], [2, "0.9995 kHz"], [3, "no start"], [4, None], [5, 0], [6, "dead"]]
LINK = [["R1", "±1 %", None, None, 1.5]]


def grades(*rows):
    return {"extra": {"Grades": [GRADES, *map(list, rows)]}}


def alternates(*rows):
    return {"extra": {"Alternates": [ALTERNATES, *([*row, *[None] * (len(ALTERNATES) - len(row))] for row in rows)]}}


def pilot(*rows, item=None):
    return {"extra": {"Pilot": list(map(list, rows))}, "design": {} if item is None else {"pilot column": item}}


def trim(**items):
    return {"design": {"trim role": "R1", "trim low": "10k", "trim high": "20k", **{k.replace("_", " "): v for k, v in items.items()}}}


def priced(*prices, heading="Unit price"):
    return {"bom": [[*BOM[0], heading], *([*row, price] for row, price in zip_longest(BOM[1:], prices))]}


REFUSED = {
    "grade unknown": (grades(["R77", "±1 %"]), "unknown-part", "Grades!A2",
        'Grades names "R77", which is no kind of part and no part of a role; write a designator that Roles names, or a kind: resistor, capacitor, inductor, crystal, transistor, ic, diode'),
    "grade of a part without role": (grades(["C9", "±1 %"]), "unknown-part", "Grades!A2",
        'Grades names "C9", which is no kind of part and no part of a role; write a designator that Roles names, or a kind: resistor, capacitor, inductor, crystal, transistor, ic, diode'),
    "grade without target": (grades([None, "±1 %", None, 0.1]), "grade-without-target", "Grades!2",
        "this grade names no kind and no part; write one, or clear the row"),
    "grade empty": (grades(["resistor", None, None, 0.1]), "grade-empty", "Grades!2",
        "the grade of resistor has neither a tolerance nor a temperature law; give one"),
    "grade two prices": (grades(["resistor", "±1 %", None, 0.1, 1.2]), "two-prices", "Grades!D2",
        "the grade of resistor has both a price and a price factor; keep one"),
    "grade price": (grades(["resistor", "±1 %", None, "cheap"]), "unreadable", "Grades!D2",
        'resistor price: "cheap" is no price of zero or more; write for example "0.12"'),
    "grade price below zero": (grades(["resistor", "±1 %", None, -0.1]), "unreadable", "Grades!D2",
        'resistor price: "-0.1" is no price of zero or more; write for example "0.12"'),
    "grade price of two readings": (grades(["resistor", "±1 %", None, "1,250 €"]), "unreadable", "Grades!D2",
        'resistor price: "1,250" can be read with a decimal comma or with a thousands comma; write 1.250 or 1250'),
    "grade factor": (grades(["resistor", "±1 %", None, None, 0]), "not-positive", "Grades!E2",
        "resistor price factor must be above zero; found 0"),
    "grade factor text": (grades(["resistor", "±1 %", None, None, "double"]), "unreadable", "Grades!E2",
        'resistor price factor must be a number without unit; found "double"'),
    "grade tolerance bare": (grades(["resistor", 1, None, 0.1]), "bare-number", "Grades!B2",
        'resistor tolerance is the bare number 1; write "1 %" or give the cell a percent format'),
    "grade tolerance absolute for a kind": (grades(["capacitor", "±0.25 pF", None, 0.1]), "unreadable", "Grades!B2",
        'capacitor tolerance: "±0.25 pF" is absolute and the value is not known; write it in %, for example "±5 %"'),
    "grade law": (grades(["resistor", None, "warm", 0.1]), "unknown-law", "Grades!C2",
        "resistor temperature law: 'warm' is no temperature law; write one of: ±50 ppm/K, -220 ±100 ppm/K, 0.5 %/K, -2 mV/K, C0G, U2J, X7R, AT ±30 ppm -40..85 °C, AT ±2 arcmin, fork, fork -0.035 ±0.009 ppm/K² 25 ±5 °C, table NAME"),
    "grade law range": (grades(["R1", None, "table warm", 0.1]) | {"extra": {
            "Grades": [GRADES, ["R1", None, "table warm", 0.1]], "warm": [["Temperature", "Change"], [0, "0 %"], [25, 0], [60, "1 %"]]}},
        "law-range", "Grades!C2",
        "R1: table warm holds from 0 to 60 °C, the study goes from -20 to 60 °C; narrow the study or give another law"),
    "grade error cell": (grades(["resistor", "=1/0", None, 0.1]), "no-value", "Grades!B2",
        "Grades Tolerance: the cell holds a formula without a stored result; type the value itself"),
    "grade doubled": (grades(["resistor", "±1 %", None, 0.1], ["Resistors", "1 %", None, 0.2]), "doubled-grade", "Grades!3",
        "this grade of resistor stands at Grades!2 too; keep one row"),
    "grade column": ({"extra": {"Grades": [["Kind", "Tolerance", "Maker"], ["resistor", "±1 %"]]}}, "unknown-column", "Grades!C1",
        '"Maker" is no column of Grades; the columns are: Kind or Part, Tolerance, Temperature law, Price, Price factor'),
    "grade column misspelt": ({"extra": {"Grades": [["Part", "Tolerance", "Prise"], ["R1", "±1 %"]]}}, "unknown-column", "Grades!C1",
        '"Prise" is no column of Grades; did you mean "Price"?'),
    "grade column doubled": ({"extra": {"Grades": [["Part", "Kind", "Tolerance"], ["R1", None, "±1 %"]]}}, "doubled-column", "Grades!B1",
        'the column "Kind or Part" stands twice; keep one'),
    "grades without heading": ({"extra": {"Grades": [["Tolerance", "Price"], ["±1 %", 0.1]]}}, "missing-column", "Grades!A1",
        'Grades has no column "Kind or Part"; its first row must hold the headings'),
    "two currencies": (grades(["resistor", "±0.1 %", None, "0.12 €"], ["capacitor", "±2 %", None, "$0.30"]), "two-currencies", "Grades!D3",
        "the prices stand in several currencies: EUR (Grades!D2), USD (Grades!D3); write all of them in one"),
    "cost in another currency": ({"design": {"cost of a failed unit": "4 USD"}, "extra": {"Grades": [GRADES, ["R1", "±0.1 %", None, "0.12 €"]]}},
        "two-currencies", "Design!B9", "the prices stand in several currencies: EUR (Grades!D2), USD (Design!B9); write all of them in one"),
    "bom in another currency": (priced("$ 0.02") | {"extra": {"Grades": [GRADES, ["R1", "±0.1 %", None, "0.12 €"]]}},
        "two-currencies", "BOM!2", "the prices stand in several currencies: EUR (Grades!D2), USD (BOM!2); write all of them in one"),
    "alternate incomplete": (alternates(["R1"]), "alternate-incomplete", "Alternates!2",
        "this row has no Alternate; fill it in or clear it"),
    "alternate of nothing": (alternates([None, "PX-1", None, None, None, None, "±1 %"]), "alternate-incomplete", "Alternates!2",
        "this row has no Part; fill it in or clear it"),
    "alternate unknown part": (alternates(["R77", "PX-1"]), "unknown-part", "Alternates!A2",
        'Alternates names "R77", which no role names as its part'),
    "alternate other role": (alternates(["R1", "PX-1", "C1"]), "unknown-role", "Alternates!C2",
        'R1 does not play the role "C1"; it is R1'),
    "alternate doubled": (alternates(["R1", "PX-1"], ["R1", "PX-1", "R1"]), "doubled-role", "Alternates!3",
        "PX-1 for R1 has R1 twice; keep one row, or name the role of the other"),
    "alternate measured": (alternates(["R1", "PX-1", None, None, None, None, None, "measured"]), "no-measurements", "Alternates!H2",
        "PX-1 for R1: an alternate has no measured values; give Min and Max, or a tolerance"),
    "alternate bounds": (alternates(["R1", "PX-1", None, "17k", None, "16k"]), "bounds-order", "Alternates!2",
        "R1: Min 17 kΩ, Typ 15.8 kΩ, Max 16 kΩ do not rise"),
    "alternate both": (alternates(["R1", "PX-1", None, "15k", None, None, "±1 %"]), "two-spreads", "Alternates!G2",
        "R1 has both a tolerance and Min or Max; keep one of them"),
    "alternate source": (alternates(["R1", "PX-1", None, None, None, None, None, None, None, "hearsay"]), "unknown-source", "Alternates!J2",
        'R1 source is "hearsay"; write one of: guaranteed, characterised, typical, simulated, measured, assumed'),
    "alternate price": (alternates(["R1", "PX-1", *[None] * 8, "a lot"]), "unreadable", "Alternates!K2",
        'PX-1 price: "a lot" is no price of zero or more; write for example "0.12"'),
    "pilot column unknown": (pilot(*GOOD_PILOT, item="f"), "pilot-column", "Design!B9",
        'Pilot has no column "f"; its columns are: Board, Frequency'),
    "pilot column doubled": (pilot(["f", "F"], [1000, 1001], [1000, 1001], item="f"), "pilot-column", "Design!B9",
        'Pilot has several columns "f"; its columns are: f, F'),
    "pilot several": (pilot(["first", "second"], [1000, 1001], [1000, 1001]), "pilot-column", "Pilot",
        "Pilot has several columns with frequencies; name one in Design as pilot column: first, second"),
    "pilot none": (pilot(["Board"], [1], [2]), "pilot-column", "Pilot",
        "Pilot has no column with frequencies; name one in Design as pilot column: Board"),
    "pilot no sheet": ({"design": {"pilot column": "f"}}, "missing-sheet", "Design!B9",
        "pilot column is given, but there is no sheet Pilot; add it, or remove the item"),
    "pilot text": (pilot(["f"], [1000], ["fast"], [1001]), "unreadable", "Pilot!A3",
        'Pilot: "fast" is no frequency; write Hz, for example "8000120", or "no start"'),
    "pilot below zero": (pilot(["f"], [1000], [-1]), "unreadable", "Pilot!A3",
        'Pilot: "-1" is no frequency; write Hz, for example "8000120", or "no start"'),
    "pilot error": (pilot(["f"], [1000], ["=A2*2"], [1001]), "no-value", "Pilot!A3",
        "Pilot: the cell holds a formula without a stored result; type the value itself"),
    "pilot in kilohertz": (pilot(["f"], [1000], [1.001]), "pilot-far-off", "Pilot!A3",
        "Pilot: 1.001 is read as 1.001 Hz, more than ten times off the target; write its unit"),
    "pilot of one": (pilot(["f"], [1000], [None]), "too-few-boards", "Pilot!A1",
        "Pilot f has fewer than two boards; measure more"),
    "bias below zero": ({"design": {"measurement bias": "-2 ppm"}}, "not-positive", "Design!B9",
        "measurement bias must be zero or above, it is taken to either side; found -2 ppm"),
    "bias in volts": ({"design": {"measurement bias": "2 V"}}, "unreadable", "Design!B9",
        'measurement bias must be in Hz, ppm or %; found 2 V: write for example "0.2 ppm"'),
    "sd bare": ({"design": {"measurement sd": 2}}, "unreadable", "Design!B9",
        'measurement sd must be in Hz, ppm or %; found 2: write for example "0.2 ppm"'),
    "sd text": ({"design": {"measurement sd": "little"}}, "unreadable", "Design!B9",
        'measurement sd must be in Hz, ppm or %; found little: write for example "0.2 ppm"'),
    "sd zero": ({"design": {"measurement sd": "0 Hz"}}, "not-positive", "Design!B9",
        "measurement sd must be above zero; found 0 Hz"),
    "escape zero": ({"design": {"escape limit": "0 ppm"}}, "not-a-share", "Design!B9",
        "escape limit must lie between 0 % and 100 %, both left out; found 0 ppm"),
    "escape all": ({"design": {"escape limit": "1e6 ppm"}}, "not-a-share", "Design!B9",
        "escape limit must lie between 0 % and 100 %, both left out; found 1e6 ppm"),
    "escape bare": ({"design": {"escape limit": 100}}, "bare-number", "Design!B9",
        'escape limit is the bare number 100; write its unit, for example "100 ppm"'),
    "build": ({"design": {"build quantity": 0}}, "not-positive", "Design!B9", "build quantity must be above zero; found 0"),
    "cost": ({"design": {"cost of a failed unit": -1}}, "unreadable", "Design!B9",
        'cost of a failed unit: "-1" is no price of zero or more; write for example "0.12"'),
    "tested in the sun": ({"design": {"test temperature": "1000 °C"}}, "impossible", "Design!B9",
        "test temperature 1000 °C is no temperature of a board"),
    "trim upside down": (trim(trim_low="30k"), "trim-order", "Design!B10",
        "trim low 30 kΩ and trim high 20 kΩ must be above zero and rise"),
    "trim step too large": (trim(trim_step="11k"), "trim-order", "Design!B12",
        "trim step 11k must be above zero and fit between 10 kΩ and 20 kΩ"),
    "trim step in farads": (trim(trim_step="1 pF"), "unreadable", "Design!B12",
        'trim step: "1 pF" is in F, expected Ω: for example "4.7 kΩ"'),
    "trim step bare": (trim(trim_step=100), "bare-number", "Design!B12",
        'trim step is the bare number 100; write its unit, for example "100 Ω"'),
    "trim step tolerance": (trim(trim_step="100 Ω ±some"), "unreadable", "Design!B12",
        'trim step: "±some" is not a tolerance; write for example "±5 %", "+80/-20 %", "±0.25 pF" or "J"'),
    "trim series": (trim(trim_step="E25"), "unknown-series", "Design!B12",
        "trim step E25 is no series of preferred values; write one of E3, E6, E12, E24, E48, E96, E192"),
    "trim series too coarse": (trim(trim_low="11k", trim_high="14k", trim_step="E6"), "trim-order", "Design!B12",
        "E6 has fewer than two values between 11 kΩ and 14 kΩ; widen the trim"),
    "trim step alone": ({"design": {"trim step": "1k"}}, "trim-incomplete", "Design!B9",
        "a trim needs trim role, trim low and trim high; only trim step given"),
}  # fmt: skip
SAID = {
    "grade without price": (grades(["resistor", "±0.1 %"], ["capacitor", "±2 %"]), "note", "grade-without-price", "Grades!2",
        "no price and no price factor in Grades row 2, 3: upgrade shows what such a grade does to the yield, but not what it costs"),
    "grade idle": (grades(["crystals", "±20 ppm", None, 0.4]), "note", "grade-not-used", "Grades!2",
        "no role of this study is of the kind crystal: its grades are not used"),
    "pilot assumed": (pilot(*GOOD_PILOT), "note", "pilot-column-assumed", "Pilot!B1",
        "Design names no pilot column: Frequency was taken, the only one with frequencies"),
    "price unread": (priced(0.02, "ask"), "warning", "price-unread", "BOM!3",
        'C1 Unit price: "ask" is no price of zero or more; write for example "0.12"; it is left out'),
    "alternate with one bound": (alternates(["R1", "PX-1", None, "15k"]), "warning", "one-bound-only", "Alternates!D2",
        "R1 has only Min 15 kΩ: every unit gets that value, and the verdict holds on this condition; give the other bound to let it vary"),
}  # fmt: skip


def errors(findings):
    return [(f.code, str(f.place), f.text) for f in findings if f.level == "error"]


@pytest.mark.parametrize("name", REFUSED)
def test_refused(tmp_path, name):
    change, *expected = REFUSED[name]
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", **change))
    assert errors(caught.value.findings) == [tuple(expected)]


@pytest.mark.parametrize("name", SAID)
def test_said(tmp_path, name):
    change, *expected = SAID[name]
    found = load_study(write(tmp_path / "study.xlsx", **change)).findings
    told = [(f.level, f.code, str(f.place), f.text) for f in found]
    assert tuple(expected) in told
    assert len(told) - len(load_study(write(tmp_path / "plain.xlsx")).findings) == (2 if name == "price unread" else 1)


def test_grades_by_kind_and_by_part(tmp_path):
    change = grades(
        ["Resistors", "±0.1 %", None, "0.12 €"],
        ["C1", "±0.1 nF", "none", None, 1.3],
        ["CAPACITOR", None, "C0G", "0,5 EUR"],
    )
    made = load_study(write(tmp_path / "study.xlsx", **change)).grades
    assert [(g.target, g.by_part, g.law_text, g.price, g.price_factor, g.place) for g in made] == [
        ("resistor", False, None, 0.12, None, "Grades!2"),
        ("C1", True, "none", None, 1.3, "Grades!3"),
        ("capacitor", False, "C0G", 0.5, None, "Grades!4"),
    ]
    assert all(isinstance(g, GradeRow) for g in made)
    assert made[0].tolerance == (-0.001, 0.001)
    assert made[1].tolerance == pytest.approx((-0.01, 0.01))  # 0.1 nF of 10 nF
    assert (made[1].law, made[2].law.text, made[2].tolerance) == (None, "C0G", None)


def test_an_alternate_is_as_declared_where_it_says_nothing(tmp_path):
    study = load_study(
        write(
            tmp_path / "study.xlsx",
            roles={"R1": {"Solder": "±0.1 %"}},
            **alternates(
                ["R1", "PX-1", None, None, None, None, "±0.5 %", None, "±25 ppm/K", "typical", 0.3],
                ["r1", "PX-2", "R1", None, "16k"],
                ["R1", "PX-3", None, "15.7k", None, "15.9k"],
                ["C1", "PX-1", *[None] * 8, "0.20"],
            ),
        )
    )
    first, second, third, fourth = study.alternates
    declared = study.parameter("R1")
    assert [(a.part, a.name, a.price, a.place) for a in study.alternates] == [
        ("R1", "PX-1", 0.3, "Alternates!2"),
        ("R1", "PX-2", None, "Alternates!3"),
        ("R1", "PX-3", None, "Alternates!4"),
        ("C1", "PX-1", 0.2, "Alternates!5"),
    ]
    (p,) = first.parameters
    assert (p.role, p.part, p.nominal, p.solder, p.reel, p.pedigree) == ("R1", "R1", 15.8e3, (-0.001, 0.001), "PX-1", "typical")
    assert (p.low, p.high) == pytest.approx((15.8e3 * 0.995, 15.8e3 * 1.005))
    assert (p.law.text, declared.law.text) == ("±25 ppm/K", "±100 ppm/K")
    (p,) = second.parameters
    assert (p.low, p.nominal, p.high) == pytest.approx((16e3 * 0.99, 16e3, 16e3 * 1.01))  # the BOM's ±1 % of it
    assert (p.law, p.pedigree) == (declared.law, "guaranteed")
    (p,) = third.parameters
    assert (p.low, p.typical, p.high, p.shape.text) == (15.7e3, 15.8e3, 15.9e3, "min/typ/max")
    (p,) = fourth.parameters
    assert (p.low, p.high) == (study.parameter("C1").low, study.parameter("C1").high)


def test_an_alternate_drives_out_the_declared_way_to_state_a_spread(tmp_path):
    measured = [["R1"], *([15750 + i] for i in range(60))]
    change = alternates(["R1", "PX-1", None, None, None, None, "±2 %"], ["U1", "PX-9", "GBW", None, None, None, "±10 %"])
    change["extra"]["Measured"] = measured
    bom = [*BOM, ["U1", "dual amplifier", "", ""]]
    roles = {"R1": {"Shape": "measured"}, "GBW": {"Part": "U1"}}
    study = load_study(write(tmp_path / "study.xlsx", bom=bom, roles=roles, **change))
    (p,) = study.alternates[0].parameters
    assert (p.low, p.shape.text) == (pytest.approx(15.8e3 * 0.98), "uniform")
    (p,) = study.alternates[1].parameters
    assert (p.low, p.typical, p.high) == pytest.approx((0.9e6, 1e6, 1.1e6))


def test_a_part_of_several_roles_needs_the_role(tmp_path):
    bom = [*BOM, ["U1", "dual amplifier", "", ""]]
    roles = {"GBW": {"Part": "U1"}, "RO": {"Part": "U1", "Typ": "50 Ω", "Tolerance": "±20 %", "Source": "typical"}}
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", bom=bom, roles=roles, **alternates(["U1", "PX-9"])))
    assert errors(caught.value.findings) == [
        ("role-needed", "Alternates!2", "U1 plays several roles: GBW, RO; name one in the column Role")
    ]
    both = alternates(["U1", "PX-9", "GBW", None, "2 MHz", "3 MHz"], ["U1", "PX-9", "RO", None, "60 Ω"])
    (alternate,) = load_study(write(tmp_path / "good.xlsx", bom=bom, roles=roles, **both)).alternates
    assert {p.role: p.typical for p in alternate.parameters} == {"GBW": 2e6, "RO": 60.0}


def test_two_prices_of_one_alternate(tmp_path):
    bom = [*BOM, ["U1", "dual amplifier", "", ""]]
    roles = {"GBW": {"Part": "U1"}, "RO": {"Part": "U1", "Typ": "50 Ω", "Tolerance": "±20 %", "Source": "typical"}}
    rows = alternates(["U1", "PX-9", "GBW", *[None] * 7, 0.3], ["U1", "PX-9", "RO", *[None] * 7, 0.4])
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", bom=bom, roles=roles, **rows))
    assert errors(caught.value.findings) == [
        ("two-prices", "Alternates!K3", "PX-9 for U1 costs 0.3 in one row and 0.4 in another; keep one")
    ]


def test_a_fault_of_the_declared_part_is_told_once(tmp_path):
    change = alternates(["R1", "PX-1", None, None, None, None, "±2 %"])
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", roles={"R1": {"Part": "C1"}}, **change))
    assert [(code, place) for code, place, _ in errors(caught.value.findings)] == [
        ("wrong-kind", "Roles!B2"), ("unknown-part", "Alternates!A2"),
    ]  # fmt: skip


@pytest.mark.parametrize("item", [None, "FREQUENCY"])
def test_pilot_boards(tmp_path, item):
    study = load_study(write(tmp_path / "study.xlsx", **pilot(*GOOD_PILOT, item=item)))
    assert study.pilot == Pilot(column="Frequency", frequency_hz=(1001.5, 999.5), no_starts=3, place="Pilot!B1")
    assert study.pilot.boards == 5


def test_prices_of_the_bom(tmp_path):
    study = load_study(write(tmp_path / "study.xlsx", **priced(0.02, "0,15 €", "€ 0.01", "-", 9.9, None)))
    assert study.prices == {"R1": 0.02, "R2": 0.02, "C1": 0.15, "C2": 0.15, "R3": 0.01}  # R4 has none, C9 no role


@pytest.mark.parametrize(
    ("headings", "found"),
    [
        (("Price", "Unit price"), "Unit price"),
        (("Total price", "Preis"), "Preis"),
        (("Prix (EUR)",), "Prix (EUR)"),
        (("Cost each",), "Cost each"),
        (("Line price", "Price @1000", "Extended cost", "Total", "Quantity"), None),
    ],
)
def test_the_column_of_prices(headings, found):
    assert price_heading(headings) == found


def test_items_of_test_and_trim(tmp_path):
    items = {"measurement sd": "0.2 ppm", "measurement bias": "±0.01 %", "escape limit": "100 ppm", "build quantity": 5000,
             "cost of a failed unit": "4.50 €", "test temperature": "23 °C"}  # fmt: skip
    design = load_study(write(tmp_path / "study.xlsx", design=items)).design
    assert design.measurement_sd_hz == pytest.approx(0.2e-6 * 1000)
    assert design.measurement_bias_hz == pytest.approx(0.1)
    assert (design.escape_limit, design.build_quantity) == (pytest.approx(1e-4), 5000)
    assert (design.failed_unit_cost, design.test_temperature_c) == (4.5, 23.0)
    free = {"cost of a failed unit": 0, "measurement bias": 0}
    assert load_study(write(tmp_path / "free.xlsx", design=free)).design.failed_unit_cost == 0


@pytest.mark.parametrize(
    ("step", "expected"),
    [
        (None, (None, 0.0, None)),
        ("100 Ω", (100.0, 0.0, None)),
        ("0.5k ±5 %", (500.0, 0.05, None)),
        ("100 Ω +/-2 Ω", (100.0, 0.02, None)),
        ("e24", (None, 0.0, "E24")),
    ],
)
def test_steps_of_a_trim(tmp_path, step, expected):
    design = load_study(write(tmp_path / "study.xlsx", **trim(trim_step=step))).design
    assert (design.trim_role, design.trim_low, design.trim_high) == ("R1", 10e3, 20e3)
    assert (design.trim_step, design.trim_step_tolerance, design.trim_series) == expected


def test_a_blank_step_is_continuous(tmp_path):
    study = load_study(write(tmp_path / "study.xlsx", **trim(), rows=[("trim step", "")]))
    assert (study.design.trim_step, study.design.trim_series) == (None, None)


@pytest.mark.parametrize(
    ("before", "after"),
    [
        (grades(*LINK), grades(["R1", "±1 %", None, None, 1.6])),
        (grades(["R1", None, "±50 ppm/K", 0.1]), grades(["R1", None, "±40 ppm/K", 0.1])),
        (alternates(["R1", "PX-1"]), alternates(["R1", "PX-2"])),
        (alternates(["R1", "PX-1"]), alternates(["R1", "PX-1", None, None, "16k"])),
        (pilot(["f"], [1000], [1001]), pilot(["f"], [1000], [1002])),
        (pilot(["f"], [1000], [1001]), pilot(["f"], [1000], [1001], ["dead"])),
        (priced(0.02), priced(0.03)),
    ],
)
def test_the_digest_covers_it(tmp_path, before, after):
    plain = load_study(write(tmp_path / "plain.xlsx")).digest
    first, second = (load_study(write(tmp_path / f"{i}.xlsx", **change)).digest for i, change in enumerate((before, after)))
    assert len({plain, first, second}) == 3
