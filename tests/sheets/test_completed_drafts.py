"""A draft of an invented BOM, completed in its marked cells and nowhere else, is a study that can be assessed."""

from pathlib import Path

import pytest
from openpyxl import load_workbook

import yieldosc
from yieldosc.sheets.draft import write_draft
from yieldosc.sheets.opening import open_book
from yieldosc.sheets.study_file import load_study

EXAMPLES = Path(__file__).parents[2] / "bom_examples"
HEAD = "Designator;Value;Description;Qty\n"
BRIDGE = HEAD + (
    "R1,R2;15k8;thick film 1% 100ppm/K;2\nC1,C2;10n;ceramic C0G 5%;2\nR3;22k;thick film 1% 100ppm/K;1\n"
    "R4;10k;thick film 1% 100ppm/K;1\nC3,C4;100n;ceramic X7R 10%;2\nU1;XA22;dual operational amplifier;1\n"
    "U2;XV5;regulator 5 V;1\n"
)
TANK = HEAD + (
    "L1;10uH;coil 5%;1\nC1;1n;ceramic C0G 5%;1\nC2;1n;ceramic C0G 5%;1\nC3,C4;10n;ceramic X7R 10%;2\n"
    "R1;33k;thick film 1% 100ppm/K;1\nR2;10k;thick film 1% 100ppm/K;1\nR3;1k;thick film 1% 100ppm/K;1\n"
    "R4;2k2;thick film 1% 100ppm/K;1\nQ1;XB547;NPN transistor;1\n"
)
LADDER = HEAD + (
    "R1,R2,R3;10k;thick film 1% 100ppm/K;3\nC1,C2,C3;10n;ceramic C0G 5%;3\nR4;1M;thick film 1% 100ppm/K;1\n"
    "R5;10k5;thick film 1% 100ppm/K;1\nU1;XA21;operational amplifier;1\n"
)
LIMITS = {
    "temperature low": "0 °C", "temperature high": "50 °C", "yield target": "90 %", "frequency limit low": "-15 %",
    "frequency limit high": "15 %",
}  # fmt: skip
COIL = {("temperature law", "L"): "±50 ppm/K", ("min", "L_dcr"): "0.1 Ω", ("typ", "L_dcr"): "0.2 Ω", ("max", "L_dcr"): "0.4 Ω"}
AMPLIFIER = {("min", "GBW"): "2 MHz", ("typ", "GBW"): "3 MHz", ("max", "GBW"): "5 MHz"}
CASES = {
    "pierce": (
        EXAMPLES / "buoy_clock_bom.csv", {"stage": "inverter"}, 8e6,
        {
            "frequency limit low": "-150 ppm", "frequency limit high": "150 ppm",
            ("temperature law", "FL"): "AT ±30 ppm -40..85 °C", ("temperature law", "RF"): "±200 ppm/K",
            ("min", "Cm"): "4 fF", ("typ", "Cm"): "5.5 fF", ("max", "Cm"): "7 fF",
            ("min", "C0"): "1.2 pF", ("typ", "C0"): "1.8 pF", ("max", "C0"): "2.5 pF",
            ("min", "ESR"): "20 Ω", ("typ", "ESR"): "40 Ω", ("max", "ESR"): "80 Ω",
            ("min", "gm"): "4 mS", ("typ", "gm"): "6 mS", ("max", "gm"): "10 mS",
        },
    ),
    "wien_bridge": (BRIDGE, {}, 1e3, {"target frequency": "1 kHz", **AMPLIFIER}),
    "colpitts": (
        TANK, {}, 2.25e6,
        {
            # 1/(2π·√(10 µH · 500 pF)) = 2.2508 MHz
            "target frequency": "2.25 MHz", "supply": "5 V", ("part", "RC"): "R4", ("part", "RB1"): "R1",
            ("part", "RB2"): "R2", ("part", "RE"): "R3", ("part", "CC"): "C3", ("part", "CE"): "C4",
            ("min", "hFE"): "110", ("typ", "hFE"): "200", ("max", "hFE"): "450",
            ("min", "fT"): "150 MHz", ("typ", "fT"): "300 MHz", ("max", "fT"): "500 MHz", **COIL,
        },
    ),
    "phase_shift": (
        # each section of a lead ladder and the last resistor of the stage are equal; 1/(2π·√6·RC) is 649.7 Hz
        LADDER, {"ladder": "lead"}, 650.0,
        {"target frequency": "650 Hz", ("part", "RIN"): "R5", ("part", "RF"): "R4", **AMPLIFIER},
    ),
}  # fmt: skip


def completed(tmp_path, circuit):
    """The draft with every marked cell filled, and no other touched."""
    bom, options, _, answers = CASES[circuit]
    source = bom if isinstance(bom, Path) else tmp_path / "bom.csv"
    if not isinstance(bom, Path):
        source.write_text(bom, encoding="utf-8")
    path = tmp_path / "study.xlsx"
    draft = write_draft(open_book(source), circuit=circuit, options=options, path=path)
    book = load_workbook(path)
    for cell in draft.open_cells:
        place, what = cell.split(": ", 1)
        sheet, coordinate = place.split("!")
        column, _, role = what.partition(" of ")
        answer = {**LIMITS, **answers}.get((column, role) if role else column, "guaranteed" if column == "source" else None)
        assert answer is not None, cell
        book[sheet][coordinate].value = answer
    book.save(path)
    return path


@pytest.mark.parametrize("circuit", CASES)
def test_a_completed_draft_is_assessed(tmp_path, circuit):
    study = load_study(completed(tmp_path, circuit))
    assert study.circuit.name == circuit
    assert study.design.target_frequency_hz == CASES[circuit][2]
    result = yieldosc.assess(study, units=4096)
    counted = result.to_dict()
    assert counted["yield"]["units"] == 4096
    assert sum(counted["outcomes"].values()) == 4096
    median = next(c["frequency_hz"]["q50"] for c in counted["corners"] if c["temperature_c"] == 25.0)
    assert median == pytest.approx(CASES[circuit][2], rel=0.15)
