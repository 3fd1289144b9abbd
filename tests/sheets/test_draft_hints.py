"""What a draft proposes for the roles of every circuit, and why: invented BOMs, texts whole."""

import pytest
from openpyxl import load_workbook

from tests.sheets.test_completed_drafts import BRIDGE, HEAD, LADDER, TANK
from yieldosc.circuits import registry
from yieldosc.sheets.draft import write_draft
from yieldosc.sheets.opening import open_book

CHECK = "check the schematic"


def drafted(tmp_path, bom, circuit, **options):
    source = tmp_path / "bom.csv"
    source.write_text(bom, encoding="utf-8")
    return write_draft(open_book(source), circuit=circuit, options=options, path=tmp_path / "study.xlsx")


def proposed(draft):
    return {p.role: (p.part, p.reason, p.doubt) for p in draft.proposals}


def roles_of(tmp_path):
    rows = load_workbook(tmp_path / "study.xlsx")["Roles"].iter_rows(min_row=2, values_only=True)
    return {row[0]: row for row in rows}


def test_equal_parts_a_gain_pair_and_an_amplifier(tmp_path):
    found = proposed(drafted(tmp_path, BRIDGE, "wien_bridge"))
    assert found["R2"] == ("R2", "one of 2 equal resistors (15.8 kΩ), equal by design", CHECK)
    assert found["RF"] == ("R3", "22 kΩ: with the other it sets a gain of about 3", CHECK)
    assert found["RG"] == ("R4", "10 kΩ: with the other it sets a gain of about 3", CHECK)
    assert found["GBW"] == ("U1", "the only ic whose line names such a part; figures from its data sheet", "")
    assert "data sheets often give only Typ" in roles_of(tmp_path)["GBW"][-1]


def test_a_lamp_is_proposed_as_stabiliser(tmp_path):
    found = proposed(drafted(tmp_path, BRIDGE + "H1;12V 40mA;filament lamp;1\nH2;red;LED lamp;1\n", "wien_bridge"))
    doubt = "delete the rows RS_start and RS_full where it stabilises nothing"
    assert found["RS_start"] == found["RS_full"] == ("H1", "its line names a lamp or a thermistor", doubt)
    assert "cold resistance of the lamp" in roles_of(tmp_path)["RS_start"][-1]
    assert "RS_start" not in proposed(drafted(tmp_path, BRIDGE, "wien_bridge"))


def test_a_tapped_coil_is_one_part_of_two_windings(tmp_path):
    bom = HEAD + "L7;20u;tapped coil 5% 50ppm/K;1\nC1;1n;ceramic C0G 5%;1\nC2;10n;ceramic X7R 10%;1\nR1;33k;1%;1\nQ1;XB1;NPN transistor;1\n"
    draft = drafted(tmp_path, bom, "hartley")
    found, rows = proposed(draft), roles_of(tmp_path)
    for role in ("L1", "L2"):
        assert found[role] == ("L7", "a winding of the only coil of the BOM", "give the inductance of this winding alone")
        assert found[f"{role}_dcr"] == ("L7", "belongs to L7", "")
        assert rows[role][1] == "L7"
    assert found["k"] == ("L7", "coupling of the two windings", "")
    assert sum("value of L" in cell for cell in draft.open_cells) == 2


def test_roles_without_which_a_stage_cannot_be_built(tmp_path):
    found = proposed(drafted(tmp_path, TANK, "colpitts"))
    four = "4 parts are possible: R1 33 kΩ, R2 10 kΩ, R3 1 kΩ, R4 2.2 kΩ"
    assert found["RC"] == (None, four, "the collector has no DC path: give RC, LCH or both")
    assert found["CC"][2] == "without C3 the coil would short the base bias: give CC"
    assert found["RB2"] == found["RE"] == (None, four, "delete the row where the board has none")
    assert found["hFE"] == found["fT"] == ("Q1", "the only transistor of the BOM; figures from its data sheet", "")
    assert "C3" not in roles_of(tmp_path)  # a Clapp's capacitor is not proposed for its number alone


def test_the_part_of_a_board_that_bears_the_name(tmp_path):
    bom = TANK.replace("R4;2k2", "RC;2k2").replace("R3;1k", "RE;1k")
    found = proposed(drafted(tmp_path, bom, "colpitts"))
    name = "a name alone is no proof: check the schematic"
    assert found["RC"] == ("RC", "bears the role's name", name)
    assert found["RE"] == ("RE", "bears the role's name", f"{name}; delete the row where the board has none")


@pytest.mark.parametrize(
    ("circuit", "options", "line", "role"),
    [
        ("timer_astable", {}, "U3;XT55;timer;1", "vh"),
        ("schmitt_rc", {}, "U3;XH14;hex schmitt trigger;1", "VTP"),
        ("pierce", {}, "U3;XHU4;unbuffered inverter;1", "gm"),
        ("colpitts", {"stage": "jfet"}, "Q3;XJ1;n-channel JFET;1", "IDSS"),
        ("colpitts", {"stage": "mosfet"}, "Q3;XM7;small MOSFET;1", "gfs"),
        ("quadrature", {}, "U3;XA2;precision op-amp;1", "GBW"),
    ],
)
def test_an_active_part_is_known_by_the_words_of_its_line(tmp_path, circuit, options, line, role):
    others = "U8;XV5;regulator 5 V;1\nU9;XE1;eeprom;1\nQ8;XB2;NPN transistor;1\nQ9;XB3;PNP transistor;1\n"
    found = proposed(drafted(tmp_path, LADDER.replace("U1;XA21;operational amplifier;1\n", "") + others + line, circuit, **options))
    kind = "transistor" if line.startswith("Q") else "ic"
    assert found[role] == (line[:2], f"the only {kind} whose line names such a part; figures from its data sheet", "")


@pytest.mark.parametrize("circuit", [name for name in registry.names() if name != "own_circuit"])
def test_every_circuit_can_be_drafted_from_any_bom(tmp_path, circuit):
    """Each row of Roles is a role; each open cell is one; no sentence speaks of a part of the kind "any"."""
    draft = drafted(tmp_path, TANK + BRIDGE.removeprefix(HEAD).replace("R1,", "R11,").replace("C1,", "C11,"), circuit)
    known = {role.name for role in registry.family(circuit).roles(registry.complete_options(circuit, {}))}
    assert set(roles_of(tmp_path)) <= known
    assert draft.open_cells
    assert not [p for p in draft.proposals if " any " in f" {p.reason} "]
