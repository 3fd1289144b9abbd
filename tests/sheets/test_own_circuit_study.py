"""A study of the user's own branch table: the sheet Circuit and its text form, and refusals whole."""

import pytest

from tests.sheets.studies import ROLES, write
from yieldosc.errors import InputError
from yieldosc.sheets.study_file import load_study
from yieldosc.sheets.write_study import study_sheets
from yieldosc.unit import evaluate_nominal

HEAD = ["Name", "Kind", "From", "To", "Control+", "Control-", "Values", "Gain"]
BRIDGE = [
    HEAD,
    ["R1", "R", "o", "n"],
    ["C1", "C", "n", "p"],
    ["R2", "R", "p", "gnd"],
    ["C2", "C", "p", "gnd"],
    ["RF", "R", "o", "m", None, None, None, "1 + g/RG"],
    ["RG", "R", "m", "gnd"],
    ["amplifier", "op-amp", "o", None, "p", "m", "GBW"],
]
OWN = {"design": {"circuit": "own_circuit"}, "extra": {"Circuit": BRIDGE}}


def test_an_own_bridge_is_the_built_in_bridge(tmp_path):
    own = load_study(write(tmp_path / "own.xlsx", **OWN))
    built_in = load_study(write(tmp_path / "wien.xlsx"))
    one, other = evaluate_nominal(own), evaluate_nominal(built_in)
    assert one.frequency_hz == pytest.approx(other.frequency_hz, rel=1e-12)
    assert one.startup_margin == pytest.approx(other.startup_margin, rel=1e-12)
    assert own.digest != built_in.digest


def test_its_sheets_are_carried_and_its_digest_knows_the_branches(tmp_path):
    study = load_study(write(tmp_path / "own.xlsx", **OWN))
    assert dict(study_sheets(study))["Circuit"][1][:4] == ("R1", "R", "o", "n")
    moved = [row if row[0] != "C2" else ["C2", "C", "p", "m"] for row in BRIDGE]
    other = load_study(write(tmp_path / "moved.xlsx", design=OWN["design"], extra={"Circuit": moved}))
    assert other.digest != study.digest


@pytest.mark.parametrize(
    ("change", "texts"),
    [
        (
            {"design": {"circuit": "own_circuit"}},
            ["own_circuit needs a sheet Circuit with its branches: name, kind, from, to, control+, control-, values, gain"],
        ),
        (
            {**OWN, "roles": {"GBW": None}},
            ["the branches name the value GBW, but Roles has no row for it; add it"],
        ),
        (
            {**OWN, "roles": {"RX": {"Typ": "1k", "Tolerance": "±1 %"}}},
            ["the branches name no value RX; they name R1, C1, R2, C2, RF, RG, GBW"],
        ),
        (
            {**OWN, "design": {"circuit": "own_circuit", "option stage": "bjt"}},
            ["own_circuit has no option 'stage'; its branches are in the sheet Circuit"],
        ),
    ],
)
def test_refusals(tmp_path, change, texts):
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", **change))
    assert [f.text for f in caught.value.findings if f.level == "error"] == texts


def test_the_same_branches_as_text(tmp_path):
    book = load_study(write(tmp_path / "own.xlsx", **OWN))
    (tmp_path / "bom.csv").write_text(
        "Designator,Value,Tolerance,Description\n\"R1, R2\",15k8,±1 %,\"thick film, 100 ppm/K\"\n"
        '"C1, C2",10 nF,±5 %,ceramic C0G\nR3,22k,±1 %,"thick film, 100 ppm/K"\nR4,10k,±1 %,"thick film, 100 ppm/K"\n',
        encoding="utf-8",
    )
    lines = ['bom = "bom.csv"', "[design]"]
    lines += [f'{item[0].replace(" ", "_")} = "{item[1]}"' for item in book.design_rows]
    for role, cells in ROLES.items():
        lines += ["[[roles]]", f'role = "{role}"', *(f'{k.lower().replace(" ", "_")} = "{v}"' for k, v in cells.items())]
    for row in BRIDGE[1:]:
        cells = {h: v for h, v in zip(HEAD, row, strict=False) if v}
        lines += ["[[circuit]]", *(f'"{h}" = "{v}"' for h, v in cells.items())]
    (tmp_path / "own.toml").write_text("\n".join(lines) + "\n", encoding="utf-8")
    assert load_study(tmp_path / "own.toml").digest == book.digest
