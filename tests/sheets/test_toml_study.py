"""A study as text beside its BOM: the same digest as the workbook, and its own refusals whole."""

import csv

import pytest

from tests.sheets.studies import BOM, COLUMNS, DESIGN, ROLES, write
from yieldosc.errors import InputError
from yieldosc.sheets.study_file import load_study
from yieldosc.sheets.write_study import study_sheets


def text_study(folder, *, head='bom = "bom.csv"\n', design=None, extra=""):
    with (folder / "bom.csv").open("w", newline="", encoding="utf-8") as file:
        csv.writer(file).writerows(BOM)
    lines = [head, "[design]"]
    lines += [f'{k.replace(" ", "_")} = "{v}"' for k, v in {**DESIGN, **(design or {})}.items()]
    for role, cells in ROLES.items():
        lines += ["[[roles]]", f'role = "{role}"', *(f'{k.lower().replace(" ", "_")} = "{v}"' for k, v in cells.items())]
    path = folder / "study.toml"
    path.write_text("\n".join(lines) + "\n" + extra, encoding="utf-8")
    return path


def test_same_study_same_digest(tmp_path):
    text, book = load_study(text_study(tmp_path)), load_study(write(tmp_path / "study.xlsx"))
    assert text.digest == book.digest
    assert [p.role for p in text.parameters] == [p.role for p in book.parameters]


def test_another_value_another_digest(tmp_path):
    first = load_study(text_study(tmp_path)).digest
    assert load_study(text_study(tmp_path, design={"yield target": "98 %"})).digest != first


def test_tables_and_measurements_as_text(tmp_path):
    extra = '[tables]\ncoil = [[-40, "-1 %"], [25, 0], [85, "2 %"]]\n[measured]\nR4 = ["9.99k", 10010, "10k"]\n'
    path = text_study(tmp_path, extra=extra)
    content = path.read_text(encoding="utf-8")
    content = content.replace('role = "R1"', 'role = "R1"\ntemperature_law = "table coil"')
    path.write_text(content.replace('role = "RG"', 'role = "RG"\nshape = "measured"'), encoding="utf-8")
    study = load_study(path)
    assert study.parameter("R1").law.change(85.0, {}) == pytest.approx(0.02)
    assert study.parameter("RG").shape.values == (9990.0, 10010.0, 10000.0)


@pytest.mark.parametrize(
    ("head", "text"),
    [
        ("", 'study.toml names no BOM; add a line bom = "FILE.csv"'),
        ('bom = "../bom.csv"\n', "bom = '../bom.csv': the BOM must stand in the study's own folder"),
        ('bom = "/etc/passwd"\n', "bom = '/etc/passwd': the BOM must stand in the study's own folder"),
        ('bom = "bom.csv"\n[colour]\nred = 3\n', "'colour' is no table of a study; they are: bom, design, roles, tables, measured, circuit, grades, alternates, pilot"),
    ],
)
def test_refusals(tmp_path, head, text):
    with pytest.raises(InputError) as caught:
        load_study(text_study(tmp_path, head=head))
    assert [f.text for f in caught.value.findings if f.level == "error"] == [text]


def test_a_file_that_is_no_toml(tmp_path):
    path = tmp_path / "study.toml"
    path.write_text("[design\n")
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert str(caught.value).startswith("study.toml: study.toml is no valid TOML: ")


def test_a_wrong_column_and_a_wrong_role_at_once(tmp_path):
    path = text_study(tmp_path, extra='[[roles]]\nrole = "RX"\ncolour = "red"\n')
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert [f.code for f in caught.value.findings if f.level == "error"] == ["unknown-column", "unknown-role"]


def test_the_sheets_of_a_study_are_that_study(tmp_path):
    """What the result workbook carries: written as text, read again, the same inputs."""
    study = load_study(
        write(
            tmp_path / "study.xlsx",
            design={"yield target": 0.99, "life": "10 years"},
            roles={"R1": {"Tolerance": 0.005, "Drift": "±0.2 %", "Solder": "±0.1 %"}},
            percent=[("Design", "B8"), ("Roles", "F2")],
        )
    )
    sheets = dict(study_sheets(study))
    assert list(sheets) == ["BOM", "Design", "Roles"]
    assert sheets["Roles"][0] == tuple(COLUMNS)
    assert all(isinstance(cell, str) for rows in sheets.values() for row in rows for cell in row)
    names = [row[0] for row in sheets["Roles"][1:]]
    again = load_study(
        write(
            tmp_path / "again.xlsx",
            bom=sheets["BOM"],
            design={**dict.fromkeys(DESIGN), **{row[0]: f"{row[1]} {row[2]}".strip() for row in sheets["Design"][1:]}},
            roles=dict(zip(names, (dict(zip(COLUMNS, row, strict=True)) for row in sheets["Roles"][1:]), strict=True)),
        )
    )
    assert again.digest == study.digest
