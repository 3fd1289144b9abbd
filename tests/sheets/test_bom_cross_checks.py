"""What a row says against its own reading: links, thermistors, footprints, tuning forks. Whole texts; invented rows."""

import pytest

from tests.sheets.clocks import write_clock
from tests.sheets.made_books import read, texts
from yieldosc.errors import InputError
from yieldosc.sheets.study_file import load_study

LAST = "state no tolerance"


def said(reading):
    return [text for text in texts(reading) if LAST not in text]


@pytest.mark.parametrize(
    ("value", "link"),
    [
        ("R1|4k7", "https://shop.example/resistor-0603-4-7-kohm-100-mw-1--p1.html"),
        ("R1|120R", "https://shop.example/smd-0603-120-ohm-p2.html"),
        ("R1|1M", "https://shop.example/smd-0603-1-mohm-p2.html"),
        ("C1|10u", "https://shop.example/electrolytic-10-f-25v-p3.html"),  # the link lost its µ
        ("L1|2.2uH", "https://shop.example/choke-2uh-10-p4"),  # and its decimals
        ("C1|100n", "https://shop.example/x7r-100nf-50v"),
        ("R1|270R", "https://shop.example/smd-resistor-of-120-pieces"),
    ],
)
def test_links_that_agree_say_nothing(value: str, link: str) -> None:
    assert said(read("Ref|Value|Shop", f"{value}|{link}")) == []


def test_a_link_to_another_part_is_a_contradiction() -> None:
    reading = read(
        "Ref|Value|Order number|Link",
        "R12|270R|CHIP 0603 120|https://shop.example/smd-0603-120-ohm-100-mw-p89.html",
        "C4|22p||https://shop.example/c0g-0402-22-nf",
    )
    assert [x.value for x in reading.lines] == [270.0, pytest.approx(22e-12)]
    assert said(reading) == [
        'warning bom-value-contradiction BOM!D2: the link says "120 ohm", the line 270 Ω; the line was taken: correct the wrong one',
        'warning bom-value-contradiction BOM!D3: the link says "22 nf", the line 22 pF; the line was taken: correct the wrong one',
    ]


def test_a_thermistor_by_its_number_is_asked_about() -> None:
    reading = read("Ref|Value|MPN", "R2|10kΩ|NTCX0603E3103F", "R3|10kΩ|ANTCR10", "RT1|10k|PTC-100")
    assert [x.kind for x in reading.lines] == ["resistor", "resistor", "other"]
    assert said(reading) == [
        'warning bom-thermistor BOM!C2: "NTCX0603E3103F" is the number of a thermistor; R2 was read as a resistor: '
        "where it is none, correct the line, else give its temperature law in Roles"
    ]


def test_a_footprint_of_another_kind_is_asked_about() -> None:
    reading = read(
        "Ref|Footprint|MPN",
        "U19, U24|IND-SMD_L5.7-W5.7|XCD5D18NP-100NC",
        "U1|SOIC-8_L5.0|dual amplifier",
        "Q1|C_0603|BC847",
        "FB1|L_0402|bead",
    )
    assert said(reading) == [
        'warning bom-kind-doubt BOM!B2: U19 is kept as ic by its letter, but the footprint "IND-SMD_L5.7-W5.7" is that '
        "of an inductor; correct the designator where it is one",
        'warning bom-kind-doubt BOM!B4: Q1 is kept as transistor by its letter, but the footprint "C_0603" is that '
        "of a capacitor; correct the designator where it is one",
    ]


def test_a_letter_against_the_words_is_asked_about() -> None:
    reading = read("Ref|Value|Description", "L1|680u|electrolytic capacitor", "L2|680uH|choke beside the capacitor")
    assert [(x.kind, x.value) for x in reading.lines] == [("inductor", 680e-6), ("inductor", 680e-6)]
    assert said(reading) == [
        "warning bom-kind-contradiction BOM!2: L1 has the letter of an inductor, but its line names a capacitor; it was "
        "read as inductor: correct the designator or the line"
    ]


FORKS = [
    # text, tolerance, law, what is said beside it
    ("watch crystal 12.5pF ±20ppm", 20e-6, "fork", []),
    ("±20ppm -0.034 ppm/°C² 12.5pF 70kΩ", 20e-6, "fork -0.034 ppm/K² 25 ±5 °C", None),
    ("20PPM 0,034±0,006ppm/K^2", 20e-6, "fork -0.034 ±0.006 ppm/K² 25 ±5 °C", None),
    (
        "±20ppm -40~85°C", 20e-6, "fork",
        ['warning bom-fork BOM!C2: "±20ppm" seems to hold over temperature, where a tuning fork holds no such limit; '
         '"±20ppm" was read as the tolerance at 25 °C: write tolerance and law in Roles where it is another crystal'],
    ),
    (
        "10ppm @25°C, 30ppm over -20~70°C", 10e-6, "fork",
        ['warning bom-fork BOM!C2: "30ppm" seems to hold over temperature, where a tuning fork holds no such limit; '
         '"10ppm" was read as the tolerance at 25 °C: write tolerance and law in Roles where it is another crystal'],
    ),
]  # fmt: skip


@pytest.mark.parametrize(("text", "tolerance", "law", "more"), FORKS)
def test_a_watch_crystal_is_a_tuning_fork(text: str, tolerance: float, law: str, more: list[str] | None) -> None:
    """32.768 kHz is 2^15 Hz; no other cut is made for it (from memory)."""
    reading = read("Ref|Value|Description", f"Y1|32.768kHz|{text}")
    (line,) = reading.lines
    assert (line.kind, line.value, line.temperature_law) == ("crystal", 32768.0, law)
    assert line.tolerance == pytest.approx((-tolerance, tolerance))
    assumed = (
        'note bom-fork BOM!2: "32.768kHz" is the frequency of a tuning fork, whose usual law (fork) is assumed; '
        "write another in Roles where it is none"
    )
    assert said(reading) == ([] if more is None else [*more, assumed])


def test_a_megahertz_crystal_is_no_fork() -> None:
    assert read("Ref|Value|Description", "Y1|8MHz|±20ppm").lines[0].temperature_law is None


def clock(tmp_path, description, value="32.768 kHz"):
    bom = [["Designator", "Value", "Tolerance", "Description"], ["Y1", value, "±20 ppm", description],
           ["C1, C2", "15 pF", "±5 %", "ceramic C0G"], ["R1", "10M", "±5 %", "thick film, 200 ppm/K"]]  # fmt: skip
    design = {"target frequency": value}
    return write_clock(tmp_path / "clock.xlsx", bom=bom, design=design, roles={"FL": {"Temperature law": None}})


def test_a_fork_from_the_bom_is_the_law_of_its_role(tmp_path) -> None:
    study = load_study(clock(tmp_path, "watch crystal 12.5 pF"))
    assert study.parameter("FL").law.text == "fork"
    assert [str(f) for f in study.findings if f.code == "crystal-law-assumed"] == [
        "BOM!A2: FL: the BOM gives the frequency of a tuning fork and no law; its usual law is assumed; write the law in Roles"
    ]


def test_a_stated_curvature_is_no_assumption(tmp_path) -> None:
    study = load_study(clock(tmp_path, "watch crystal 12.5 pF -0.034 ppm/°C²"))
    assert study.parameter("FL").law.text == "fork -0.034 ppm/K² 25 ±5 °C"
    assert "crystal-law-assumed" not in [f.code for f in study.findings]


def test_an_at_cut_is_assumed_and_said_and_another_asked_for(tmp_path) -> None:
    study = load_study(clock(tmp_path, "crystal 12 pF ±30 ppm over -40..85 °C", "8 MHz"))
    assert study.parameter("FL").law.text == "AT ±30 ppm -40..85 °C"
    assert [str(f) for f in study.findings if f.code == "crystal-law-assumed"] == [
        "BOM!A2: FL: the BOM gives ±30 ppm -40..85 °C over temperature; an AT cut is assumed; write the law in Roles"
    ]
    with pytest.raises(InputError) as caught:
        load_study(clock(tmp_path, "crystal 12 pF ±30 ppm over -40..85 °C", "455 kHz"))
    assert str(caught.value) == (
        "BOM!A2: FL: the BOM gives ±30 ppm -40..85 °C over temperature, but not the cut; write the law in Roles, "
        "for example fork or AT ±30 ppm -40..85 °C"
    )
