"""Every refusal and remark of the study reader, matched whole: what is wrong, where, what was found, what to do.

The texts are this project's own words; each row changes one cell of a good study.
"""

import pytest
from openpyxl import load_workbook

from tests.sheets.studies import write
from yieldosc.circuits import registry
from yieldosc.errors import InputError
from yieldosc.parts.shapes import Measured, Split
from yieldosc.sheets.study_file import is_study, load_study

BOM_NOTE = "bom-tolerance-missing"  # the importer's own remark on C9, tested with the importer

REFUSED = [
    (
        "no design",
        {"leave_out": ["Design"]},
        [
            (
                "error",
                "not-a-study",
                "study.xlsx",
                "study.xlsx has no sheet Design: it is a bare BOM; make a study of it with yieldosc draft study.xlsx --circuit NAME -o STUDY.xlsx",
            )
        ],
    ),
    (
        "no roles",
        {"leave_out": ["Roles"]},
        [("error", "missing-sheet", "Roles", "the study has no sheet Roles; add it, or draft a study from the BOM")],
    ),
    (
        "unknown item",
        {"design": {"target frequncy": "1 kHz"}},
        [
            (
                "error",
                "unknown-item",
                "Design!B9",
                '"target frequncy" is no item of Design; did you mean "target frequency"?',
            )
        ],
    ),
    (
        "far item",
        {"design": {"colour": "red"}},
        [
            (
                "error",
                "unknown-item",
                "Design!B9",
                '"colour" is no item of Design; the items are: circuit, option <name>, frequency limit low, frequency limit high, target frequency, least margin, longest start-up time, start-up ratio, most distortion, most drive, temperature low, temperature high, temperature points, supply, supply tolerance, life, yield target, confidence, default shape, reel share, bench frequency, build quantity, cost of a failed unit, test temperature, measurement sd, measurement bias, escape limit, trim role, trim low, trim high, trim step, pilot column',
            )
        ],
    ),
    (
        "missing limit",
        {"design": {"frequency limit low": None}},
        [("error", "missing-item", "Design", 'Design has no item "frequency limit low"; add it')],
    ),
    (
        "limits exclude",
        {"design": {"frequency limit low": "1 %"}},
        [
            (
                "error",
                "limits-exclude-target",
                "Design!B4",
                "the limits 1 % and 3 % do not enclose the target 1 kHz; the low one is negative as a deviation, or below the target in Hz",
            )
        ],
    ),
    (
        "upside",
        {"design": {"temperature low": "70 °C"}},
        [
            (
                "error",
                "temperatures-upside-down",
                "Design!B6",
                "temperature low 70 °C is above temperature high 60 °C; swap them",
            )
        ],
    ),
    (
        "bare",
        {"design": {"frequency limit high": 3}},
        [
            (
                "error",
                "bare-number",
                "Design!B5",
                'frequency limit high is the bare number 3; write its unit: "3 ppm", "3 %" or "3 Hz"',
            )
        ],
    ),
    (
        "bare temp",
        {"design": {"temperature low": -20}},
        [
            (
                "error",
                "bare-number",
                "Design!B6",
                'temperature low is the bare number -20; write its unit, for example "-20 °C"',
            )
        ],
    ),
    (
        "bare target",
        {"design": {"yield target": 99}},
        [
            (
                "error",
                "bare-number",
                "Design!B8",
                'yield target is the bare number 99; write its unit, for example "99 %"',
            )
        ],
    ),
    (
        "bad share",
        {"design": {"yield target": "120 %"}},
        [
            (
                "error",
                "not-a-share",
                "Design!B8",
                "yield target must lie between 0 % and 100 %, both left out; found 120 %",
            )
        ],
    ),
    (
        "bad quantity",
        {"design": {"target frequency": "fast"}},
        [
            (
                "error",
                "unreadable",
                "Design!B3",
                'target frequency: "fast" is not a quantity in Hz; write for example "8 MHz"',
            )
        ],
    ),
    (
        "wrong unit",
        {"design": {"target frequency": "1 kΩ"}},
        [("error", "unreadable", "Design!B3", 'target frequency: "1 kΩ" is in Ω, expected Hz: for example "8 MHz"')],
    ),
    (
        "zero target",
        {"design": {"target frequency": "0 Hz"}},
        [("error", "not-positive", "Design!B3", "target frequency must be above zero; found 0 Hz")],
    ),
    (
        "doubled",
        {"rows": [("Yield Target", "99 %")]},
        [("error", "doubled-item", "Design!B9", '"Yield Target" stands twice; keep one')],
    ),
    (
        "empty item",
        {"design": {"life": ""}, "rows": [("life", "")]},
        [
            ("error", "empty-item", "Design!B9", '"life" has no value; fill it in or remove the row'),
            ("error", "empty-item", "Design!B10", '"life" has no value; fill it in or remove the row'),
        ],
    ),
    (
        "unknown circuit",
        {"design": {"circuit": "wobble"}},
        [
            (
                "error",
                "circuit",
                "Design!B2",
                f"there is no circuit named 'wobble'; the circuits are {', '.join(registry.names())}",
            )
        ],
    ),
    (
        "option",
        {"design": {"option stage": "bjt"}},
        [("error", "circuit", "Design!B9", "wien_bridge has no option 'stage'; its options are: limiter")],
    ),
    (
        "supply no role",
        {"design": {"supply": "5 V"}},
        [
            (
                "error",
                "no-supply-role",
                "Design!B9",
                "wien_bridge with these options has no supply in its model; remove the item supply",
            )
        ],
    ),
    (
        "supply tol",
        {"design": {"supply tolerance": "±5 %"}},
        [("error", "supply-missing", "Design!B9", "supply tolerance without supply; add the item supply")],
    ),
    (
        "points",
        {"design": {"temperature points": 1}},
        [("error", "bad-count", "Design!B9", "temperature points must be a whole number from 2 to 1001; found 1")],
    ),
    (
        "shape",
        {"design": {"default shape": "bell"}},
        [
            (
                "error",
                "unknown-shape",
                "Design!B9",
                "default shape: 'bell' is no shape; write one of: uniform, normal, normal 2, normal-open, triangular, hollow, hollow 0.4, fixed, measured, min/typ/max",
            )
        ],
    ),
    (
        "reel",
        {"design": {"reel share": 1.5}},
        [("error", "not-a-share", "Design!B9", 'reel share must lie between 0 and 1; found "1.5"')],
    ),
    (
        "trim",
        {"design": {"trim role": "R1"}},
        [
            (
                "error",
                "trim-incomplete",
                "Design!B9",
                "a trim needs trim role, trim low and trim high; only trim role given",
            )
        ],
    ),
    (
        "trim role",
        {"design": {"trim role": "RX", "trim low": "1k", "trim high": "2k"}},
        [("error", "unknown-role", "Design!B9", "trim role RX is no role of this circuit")],
    ),
    (
        "margin",
        {"design": {"least margin": "a lot"}},
        [("error", "unreadable", "Design!B9", 'least margin must be a number without unit; found "a lot"')],
    ),
    (
        "role unknown",
        {"roles": {"RX": {"Part": "R9"}}},
        [
            (
                "error",
                "unknown-role",
                "Roles!9",
                "wien_bridge has no role RX with these options; its roles are R1, C1, R2, C2, CIN, RF, RG, RS_start, RS_full, RF_full, GBW, RO",
            ),
            (
                "note",
                "pedigree-assumed",
                "Roles",
                "no Source for RX: counted as assumed; a verdict then holds on that condition",
            ),
        ],
    ),
    (
        "role missing",
        {"roles": {"R1": None}},
        [("error", "circuit", "Roles", "wien_bridge: role R1 is missing: series arm")],
    ),
    (
        "no such part",
        {"roles": {"R1": {"Part": "R77"}}},
        [("error", "unknown-part", "Roles!B2", 'R1 names "R77", which is not in the BOM')],
    ),
    (
        "not fitted",
        {"roles": {"R1": {"Part": "R9", "Typ": "15k8", "Tolerance": "±1 %"}}},
        [("error", "not-fitted", "Roles!B2", "R1 names R9, which the BOM marks as not fitted")],
    ),
    (
        "wrong kind",
        {"roles": {"R1": {"Part": "C1"}}},
        [
            (
                "error",
                "wrong-kind",
                "Roles!B2",
                "R1 needs a resistor, but C1 is a capacitor (C1, C2 | 10 nF | ±5 % | ceramic C0G)",
            )
        ],
    ),
    (
        "wrong unit role",
        {"roles": {"GBW": {"Typ": "1 kΩ"}}},
        [("error", "unreadable", "Roles!D8", 'GBW Typ: "1 kΩ" is in Ω, expected Hz: for example "8 MHz"')],
    ),
    (
        "negative",
        {"roles": {"GBW": {"Min": "-1 MHz"}}},
        [("error", "not-positive", "Roles!C8", "GBW Min must be above zero; found -1 MHz")],
    ),
    (
        "zero",
        {"roles": {"R1": {"Typ": 0, "Tolerance": "±1 %"}}},
        [("error", "not-positive", "Roles!D2", "R1 Typ must be above zero; found 0")],
    ),
    (
        "no tolerance",
        {"roles": {"C1": {"Part": "C9"}}},
        [
            (
                "error",
                "tolerance-missing",
                "Roles!3",
                "C1 (C9) has no tolerance: it is asked for, never assumed; write it in the Tolerance column of Roles or of the BOM, give Min and Max, or give the shape fixed",
            )
        ],
    ),
    (
        "no value",
        {"roles": {"GBW": {"Min": None, "Typ": None, "Max": None}}},
        [("error", "value-missing", "Roles!8", "GBW has no value: give Typ with a tolerance, or Min and Max")],
    ),
    (
        "tol bare",
        {"roles": {"R1": {"Tolerance": 5}}},
        [
            (
                "error",
                "bare-number",
                "Roles!F2",
                'R1 tolerance is the bare number 5; write "5 %" or give the cell a percent format',
            )
        ],
    ),
    (
        "tol bad",
        {"roles": {"R1": {"Tolerance": "some"}}},
        [
            (
                "error",
                "unreadable",
                "Roles!F2",
                'R1 tolerance: "some" is not a tolerance; write for example "±5 %", "+80/-20 %", "±0.25 pF" or "J"',
            )
        ],
    ),
    (
        "both",
        {"roles": {"GBW": {"Tolerance": "±10 %"}}},
        [("error", "two-spreads", "Roles!F8", "GBW has both a tolerance and Min or Max; keep one of them")],
    ),
    (
        "order",
        {"roles": {"GBW": {"Min": "2 MHz"}}},
        [("error", "bounds-order", "Roles!8", "GBW: Min 2 MHz, Typ 1 MHz, Max 1.4 MHz do not rise")],
    ),
    (
        "role shape",
        {"roles": {"R1": {"Shape": "bell"}}},
        [
            (
                "error",
                "unknown-shape",
                "Roles!G2",
                "R1 shape: 'bell' is no shape; write one of: uniform, normal, normal 2, normal-open, triangular, hollow, hollow 0.4, fixed, measured, min/typ/max",
            )
        ],
    ),
    (
        "law",
        {"roles": {"R1": {"Temperature law": "wobble"}}},
        [
            (
                "error",
                "unknown-law",
                "Roles!H2",
                "R1 temperature law: 'wobble' is no temperature law; write one of: ±50 ppm/K, -220 ±100 ppm/K, 0.5 %/K, -2 mV/K, C0G, U2J, X7R, AT ±30 ppm -40..85 °C, AT ±2 arcmin, fork, fork -0.035 ±0.009 ppm/K² 25 ±5 °C, table NAME",
            )
        ],
    ),
    (
        "law range",
        {"roles": {"C1": {"Part": "C9", "Tolerance": "±10 %"}}, "design": {"temperature high": "130 °C"}},
        [
            (
                "error",
                "law-range",
                "BOM!A6",
                "C1: X7R holds from -55 to 125 °C, the study goes from -20 to 130 °C; narrow the study or give another law",
            )
        ],
    ),
    (
        "source",
        {"roles": {"R1": {"Source": "hearsay"}}},
        [
            (
                "error",
                "unknown-source",
                "Roles!L2",
                'R1 source is "hearsay"; write one of: guaranteed, characterised, typical, simulated, measured, assumed',
            )
        ],
    ),
    (
        "drift no life",
        {"roles": {"R1": {"Drift": "±0.5 %"}}},
        [("error", "life-missing", "Roles!J2", "R1 has a drift, but Design has no life; add the item life")],
    ),
    (
        "reel share",
        {"roles": {"R1": {"Reel share": 2}}},
        [("error", "not-a-share", "Roles!K2", 'R1 reel share must lie between 0 and 1; found "2"')],
    ),
    (
        "part alone no bom value",
        {"roles": {"R1": {"Part": None}}},
        [
            (
                "error",
                "value-missing",
                "Roles!2",
                "R1 has no value: give Typ with a tolerance, or Min and Max, or name its part of the BOM",
            )
        ],
    ),
    (
        "measured none",
        {"roles": {"R1": {"Shape": "measured"}}},
        [
            (
                "error",
                "no-measurements",
                "Roles!G2",
                "R1 has the shape measured, but Measured has no column for its part",
            )
        ],
    ),
    (
        "measured unknown",
        {"extra": {"Measured": [["Q7"], [1], [2]]}},
        [("error", "unknown-part", "Measured!A1", "Measured has a column 'Q7', which no role names as its part")],
    ),
    (
        "lamp half",
        {"roles": {"RS_start": {"Typ": "100 Ω", "Tolerance": "±10 %"}}},
        [
            (
                "error",
                "circuit",
                "Roles",
                "wien_bridge: a stabiliser in series with RG needs both RS_start and RS_full; give the missing one",
            )
        ],
    ),
]
SAID = [
    (
        "one bound",
        {"roles": {"GBW": {"Typ": None, "Max": None}}},
        [
            (
                "warning",
                "one-bound-only",
                "Roles!C8",
                "GBW has only Min 700 kHz: every unit gets that value, and the verdict holds on this condition; give the other bound to let it vary",
            )
        ],
    ),
    (
        "beats",
        {"roles": {"R1": {"Tolerance": "±0.5 %"}}},
        [("note", "roles-beat-bom", "Roles!F2", "R1: Roles says ±0.5 %, the BOM line of R1 says ±1 %; Roles is used")],
    ),
    (
        "measured few",
        {"roles": {"R1": {"Shape": "measured"}}, "extra": {"Measured": [["R1"], [15790], [15800], [15810]]}},
        [("warning", "few-measurements", "Measured!A1", "R1: 3 measured values; below 50 the tails are guesswork")],
    ),
]


def told(findings):
    return [(f.level, f.code, str(f.place), f.text) for f in findings if f.code != BOM_NOTE]


@pytest.mark.parametrize(("name", "change", "expected"), REFUSED, ids=[row[0] for row in REFUSED])
def test_refusals(tmp_path, name, change, expected):
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", **change))
    assert told(caught.value.findings) == expected


@pytest.mark.parametrize(("name", "change", "expected"), SAID, ids=[row[0] for row in SAID])
def test_remarks(tmp_path, name, change, expected):
    assert told(load_study(write(tmp_path / "study.xlsx", **change)).findings) == expected


def test_all_problems_of_a_file_come_at_once_in_the_order_of_the_sheets(tmp_path):
    path = write(
        tmp_path / "study.xlsx",
        design={"temperature low": -20, "yield target": "120 %", "colour": "red"},
        roles={"R1": {"Tolerance": 5}, "C1": {"Part": "C9"}, "RG": {"Source": "hearsay"}},
    )
    with pytest.raises(InputError) as caught:
        load_study(path)
    errors = [(f.code, str(f.place)) for f in caught.value.findings if f.level == "error"]
    assert errors == [
        ("bare-number", "Design!B6"),
        ("not-a-share", "Design!B8"),
        ("unknown-item", "Design!B9"),
        ("bare-number", "Roles!F2"),
        ("tolerance-missing", "Roles!3"),
        ("unknown-source", "Roles!L7"),
    ]


def test_a_good_study_is_understood(tmp_path):
    study = load_study(write(tmp_path / "study.xlsx"))
    r1, gbw = study.parameter("R1"), study.parameter("GBW")
    assert (r1.part, r1.trait, r1.nominal) == ("R1", "R", 15.8e3)
    assert (r1.low, r1.high) == pytest.approx((15.8e3 * 0.99, 15.8e3 * 1.01))
    assert r1.law.text == "±100 ppm/K"
    assert (gbw.part, gbw.low, gbw.typical, gbw.high, gbw.shape) == ("GBW", 0.7e6, 1e6, 1.4e6, Split())
    assert study.parameter("R2").reel == r1.reel
    assert study.parameter("RF").reel != r1.reel
    design = study.design
    assert (design.frequency_low_hz, design.frequency_high_hz) == pytest.approx((970.0, 1030.0))
    assert len(design.temperatures_c) == 10  # nine equal steps of 10 K miss 25 °C, which is added
    assert [(r.attribute, r.low, r.high) for r in study.requirements] == [
        ("frequency_hz", 970.0, 1030.0),
        ("startup_margin", 1.0, None),
    ]
    assert (r1.given["tolerance"].text, r1.given["tolerance"].place) == ("±1 %", "BOM!C2")


@pytest.mark.parametrize("limits", [("-3 %", "3 %"), ("-30000 ppm", "30000 ppm"), ("970 Hz", "1.03 kHz")])
def test_limits_in_ppm_per_cent_or_hertz_are_the_same_study(tmp_path, limits):
    plain = load_study(write(tmp_path / "plain.xlsx"))
    other = load_study(
        write(tmp_path / "other.xlsx", design={"frequency limit low": limits[0], "frequency limit high": limits[1]})
    )
    assert other.design.frequency_low_hz == pytest.approx(plain.design.frequency_low_hz, rel=1e-15)


def test_a_percent_cell_is_its_fraction(tmp_path):
    """Excel stores 5 % as 0.05: the cell's format tells it from the number 0.05."""
    roles = {"R1": {"Tolerance": 0.05}}
    study = load_study(write(tmp_path / "a.xlsx", roles=roles, percent=[("Roles", "F2")]))
    assert study.parameter("R1").high == pytest.approx(15.8e3 * 1.05)
    assert study.parameter("R1").given["tolerance"].text == "5 %"
    target = load_study(write(tmp_path / "b.xlsx", design={"yield target": 0.99}, percent=[("Design", "B8")]))
    assert target.design.yield_target == 0.99
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "c.xlsx", roles=roles))
    assert 'R1 tolerance is the bare number 0.05; write "0.05 %"' in str(caught.value)


def test_items_in_any_order_case_and_separator(tmp_path):
    plain = load_study(write(tmp_path / "plain.xlsx"))
    turned = {
        "Yield_Target": "99 %", "TEMPERATURE-HIGH": "60 °C", "temperature low": "-20 °C", "Frequency Limit High": "3 %",
        "frequency_limit_low": "-3 %", "target frequency": "1 kHz", "Circuit": "wien_bridge",
    }  # fmt: skip
    path = write(tmp_path / "turned.xlsx", design={**dict.fromkeys(plain.design_given, None), **turned})
    assert load_study(path).digest == plain.digest


def test_a_value_in_two_cells_is_the_same_as_in_one(tmp_path):
    path = write(tmp_path / "study.xlsx", design={"target frequency": None})
    book = load_workbook(path)
    book["Design"].append(["target frequency", 1, "kHz"])
    book.save(path)
    assert load_study(path).digest == load_study(write(tmp_path / "plain.xlsx")).digest


def test_error_cells_and_formulas_without_a_result_are_no_blanks(tmp_path):
    path = write(tmp_path / "study.xlsx", design={"yield target": "=1-0.01"}, roles={"R1": {"Tolerance": "=1/0"}})
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert told(caught.value.findings) == [
        (
            "error",
            "no-value",
            "Design!B8",
            "yield target: the cell holds a formula without a stored result; type the value itself",
        ),
        (
            "error",
            "no-value",
            "Roles!F2",
            "R1 tolerance: the cell holds a formula without a stored result; type the value itself",
        ),
    ]


def test_a_law_that_takes_the_value_away_is_refused(tmp_path):
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", roles={"R1": {"Temperature law": "-4 %/K"}}))
    assert told(caught.value.findings) == [
        ("error", "law-impossible", "Roles!H2",
         "R1: -4 %/K would leave nothing of the value at 60 °C; check its sign and its unit"),
    ]  # fmt: skip


def test_measured_values_become_the_population(tmp_path):
    values = [15700 + i for i in range(60)]
    path = write(
        tmp_path / "study.xlsx",
        roles={"R1": {"Shape": "measured"}},
        extra={"Measured": [["R1"], *([v] for v in values)]},
    )
    shape = load_study(path).parameter("R1").shape
    assert isinstance(shape, Measured)
    assert shape.values == tuple(map(float, values))


def test_a_temperature_table_of_ones_own(tmp_path):
    points = [["Temperature", "Change"], [-40, "-1 %"], [25, 0], [85, "2 %"]]
    study = load_study(
        write(tmp_path / "study.xlsx", roles={"R1": {"Temperature law": "table coil"}}, extra={"coil": points})
    )
    assert study.parameter("R1").law.change(55.0, {}) == pytest.approx(0.01)


def test_what_is_a_study(tmp_path):
    assert is_study(write(tmp_path / "study.xlsx"))
    assert not is_study(write(tmp_path / "bom.xlsx", leave_out=["Design"]))
    assert not is_study(tmp_path / "wien_bridge")
