"""A study as text beside its BOM: the same digest as the workbook, and its own refusals whole."""

import csv
import os
from dataclasses import replace

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
        ('bom = "bom.csv"\npilot = "../pilot.csv"\n', "pilot = '../pilot.csv': the file must stand in the study's own folder"),
        ('bom = "bom.csv"\npilot = 3\n', "pilot must be tables: write each row below a line [[pilot]]"),
        ('bom = "bom.csv"\n[grades]\nR1 = 1\n', "grades must be tables: write each row below a line [[grades]]"),
        ('bom = "bom.csv"\nalternates = [1]\n', "alternates must be tables: write each row below a line [[alternates]]"),
        ('bom = "bom.csv"\nmeasured = 3\n', "measured must be a table of its own: write it below a line [measured]"),
        ('bom = "bom.csv"\n[tables]\ncoil = 3\n', 'the table coil must be a list of points: coil = [[-40, "-100 ppm"], [25, 0]]'),
        ('bom = "bom.csv"\ntemperature_points = inf\n', 'temperature points must be a number without unit; found "inf"'),
        ('bom = "bom.csv"\nleast_margin = nan\n', 'least margin must be a number without unit; found "nan"'),
        (f'bom = "bom.csv"\nbuild_quantity = 1{"0" * 400}\n', f'build quantity must be a number without unit; found "1{"0" * 38}…"'),
        ('bom = "bom.csv"\n[colour]\nred = 3\n', "'colour' is no table of a study; they are: bom, design, roles, tables, measured, circuit, grades, alternates, pilot"),
    ],
)
def test_refusals(tmp_path, head, text):
    with pytest.raises(InputError) as caught:
        load_study(text_study(tmp_path, head=head))
    assert [f.text for f in caught.value.findings if f.level == "error"] == [text]


def test_items_at_the_top_of_the_file(tmp_path):
    first = load_study(text_study(tmp_path, head='bom = "bom.csv"\nleast_margin = 1.5\n'))
    assert first.design.least_margin == 1.5


@pytest.mark.parametrize("roles", ["roles = 3", 'roles = ["R1"]', "[roles]\nR1 = 3"])
def test_roles_that_are_no_tables(tmp_path, roles):
    path = tmp_path / "study.toml"
    head = 'bom = "bom.csv"\n'
    text_study(tmp_path)
    text = path.read_text(encoding="utf-8")
    design = text[text.index("[design]") : text.index("[[roles]]")]
    path.write_text(head + (f"{roles}\n{design}" if roles.startswith("roles") else f"{design}{roles}\n"), encoding="utf-8")
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert [f.text for f in caught.value.findings if f.level == "error"] == [
        "roles must be tables: write [[roles]] with a key role, or [roles.NAME]"
    ]


def test_a_study_that_is_no_file_or_too_large(tmp_path):
    path = tmp_path / "study.toml"
    path.write_text("#" * 1_000_001)
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert str(caught.value) == "study.toml: the file has more than 1,000,000 bytes; a study has not"
    with pytest.raises(InputError) as caught:
        load_study(tmp_path / "gone.toml")
    assert str(caught.value) == f"gone.toml: there is no file '{tmp_path}/gone.toml'; check the path"


def test_a_file_that_is_no_toml(tmp_path):
    path = tmp_path / "study.toml"
    path.write_text("[design\n")
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert str(caught.value) == (
        "study.toml: the file is no valid TOML: Expected ']' at the end of a table declaration (at line 1, column 8); "
        "correct it there"
    )


@pytest.mark.parametrize(
    ("content", "text"),
    [
        ("x = " + "[" * 300_000, "study.toml: the file nests its tables too deeply; a study has no such tables"),
        ("x = " + "{a = " * 100_000, "study.toml: the file nests its tables too deeply; a study has no such tables"),
        (
            "\n" + ".".join("a" * 20_000) + " = 1",
            "study.toml!2: this line holds more than 300 points outside plain decimals; break it into several lines",
        ),
        (
            'x = {a = """\n""", ' + ".".join("b" * 20_000) + ' = "x"}',
            "study.toml!2: this line holds more than 300 points outside plain decimals; break it into several lines",
        ),
        (
            '["a"' + ".'b'" * 20_000 + "]",
            "study.toml!1: this line holds more than 300 points outside plain decimals; break it into several lines",
        ),
        (
            "x = " + "1" * 5000,
            "study.toml: the file is no valid TOML: Exceeds the limit (4300 digits) for integer string conversion: value "
            "has 5000 digits; use sys.set_int_max_str_digits() to increase the limit; correct it there",
        ),
        (
            b"x = '\xff'",
            "study.toml: the file is no valid TOML: 'utf-8' codec can't decode byte 0xff in position 5: invalid start "
            "byte; correct it there",
        ),
    ],
)
def test_hostile_toml(tmp_path, content, text):
    path = tmp_path / "study.toml"
    path.write_bytes(content if isinstance(content, bytes) else content.encode())
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert str(caught.value) == text


@pytest.mark.parametrize(
    ("line", "times", "text"),
    [
        ("x{} = 1", 499, "study.toml: the file has 509 items; at most 500 are read: delete what does not belong to the study"),
        ("[[grades]]\nx{} = 1", 400, "study.toml: the file has 160000 cells; at most 100000 are read: delete what does not belong to the study"),
        ("[[roles]]", 1000, "study.toml: the file has 1007 roles; at most 1000 are read: delete what does not belong to the study"),
    ],
)
def test_more_than_a_study_needs(tmp_path, line, times, text):
    """Seven items of design and seven roles stand there; bom, design and roles are keys of the file too."""
    more = "\n".join(line.format(i) for i in range(times)) + "\n"
    head = 'bom = "bom.csv"\n'
    path = text_study(tmp_path, head=head + more) if line.startswith("x") else text_study(tmp_path, extra=more)
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert str(caught.value) == text


def test_columns_of_very_different_length(tmp_path):
    columns = "R1 = [" + "1," * 2000 + "]\n" + "".join(f"x{i} = 1\n" for i in range(99))
    with pytest.raises(InputError) as caught:
        load_study(text_study(tmp_path, extra="[measured]\n" + columns))
    assert str(caught.value) == (
        "study.toml: the file has 200000 cells; at most 100000 are read: delete what does not belong to the study"
    )


def test_points_and_decimals_are_no_deep_keys(tmp_path):
    values = ", ".join(f"{15800 + i}.5" for i in range(400))
    path = text_study(tmp_path, extra=f'[measured]\nR1 = [{values}]\n# {"." * 100}\n[tables]\nx = [[25, 0]] # {"a." * 99}\n')
    content = path.read_text(encoding="utf-8").replace('role = "R1"', f'role = "R1"\nshape = "measured"\nnote = "{"." * 99}"')
    path.write_text(content, encoding="utf-8")
    assert len(load_study(path).parameter("R1").shape.values) == 400


@pytest.mark.parametrize("what", ["directory", "pipe", "device"])
def test_a_study_that_is_no_file(tmp_path, what):
    path = tmp_path / "study.toml"
    if what == "directory":
        path.mkdir()
    elif what == "pipe":
        os.mkfifo(path)
    else:
        path.symlink_to("/dev/zero")
    with pytest.raises(InputError) as caught:
        load_study(path)
    found = "a directory" if what == "directory" else "a device or a pipe"
    assert str(caught.value) == f"study.toml: the path is {found}, not a file; give the spreadsheet itself"


def test_a_wrong_column_and_a_wrong_role_at_once(tmp_path):
    path = text_study(tmp_path, extra='[[roles]]\nrole = "RX"\ncolour = "red"\n')
    with pytest.raises(InputError) as caught:
        load_study(path)
    assert [f.code for f in caught.value.findings if f.level == "error"] == ["unknown-column", "unknown-role"]


OFFERS = """
[[grades]]
kind_or_part = "resistors"
tolerance = "±0.1 %"
price = 0.12
[[grades]]
kind_or_part = "C1"
temperature_law = "table film"
price_factor = 1.5
[[alternates]]
part = "R1"
alternate = "PX-1"
tolerance = "±0.5 %"
price = "0.30 €"
[tables]
film = [[-40, "-1 %"], [25, 0], [85, "2 %"]]
"""
OFFER_SHEETS = {
    "Grades": [
        ["Kind or Part", "Tolerance", "Temperature law", "Price", "Price factor"],
        ["resistors", "±0.1 %", None, 0.12, None],
        ["C1", None, "table film", None, 1.5],
    ],
    "Alternates": [["Part", "Alternate", "Tolerance", "Price"], ["R1", "PX-1", "±0.5 %", "0.30 €"]],
    "film": [["Temperature", "Change"], [-40, "-1 %"], [25, 0], [85, "2 %"]],
    "Pilot": [["board", "frequency"], ["A", 1001.5], ["B", "no start"]],
}


def placeless(alternates):
    """BOM.csv and BOM.xlsx are other places of the same cells."""
    return [(a.part, a.name, a.price, a.place, [replace(p, given={}) for p in a.parameters]) for a in alternates]


PILOTS = {
    "rows": ("", '[[pilot]]\nboard = "A"\nfrequency = 1001.5\n[[pilot]]\nboard = "B"\nfrequency = "no start"\n'),
    "columns": ("", '[pilot]\nboard = ["A", "B"]\nfrequency = [1001.5, "no start"]\n'),
    "file": ('pilot = "pilot.csv"\n', ""),
}


@pytest.mark.parametrize("form", PILOTS)
def test_grades_alternates_and_pilot_as_text(tmp_path, form):
    (tmp_path / "pilot.csv").write_text("board,frequency\nA,1001.5\nB,no start\n", encoding="utf-8")
    above, below = PILOTS[form]
    text = load_study(text_study(tmp_path, head='bom = "bom.csv"\n' + above, extra=OFFERS + below))
    book = load_study(write(tmp_path / "study.xlsx", extra=OFFER_SHEETS))
    assert (text.grades, placeless(text.alternates), text.pilot) == (book.grades, placeless(book.alternates), book.pilot)
    assert text.pilot.frequency_hz == (1001.5,)
    assert text.digest == book.digest


@pytest.mark.parametrize("form", ["xlsx", "toml"])
def test_the_sheets_of_a_study_with_offers_are_that_study(tmp_path, form):
    """What the result workbook carries is all text, and says the same."""
    bom = [[*BOM[0], "Unit price"], *([*row, 0.25] for row in BOM[1:])]
    if form == "xlsx":
        study = load_study(write(tmp_path / "study.xlsx", extra=OFFER_SHEETS, bom=bom))
        assert study.prices["R1"] == 0.25
    else:
        study = load_study(text_study(tmp_path, extra=OFFERS + PILOTS["columns"][1]))
    sheets = dict(study_sheets(study))
    assert {"Grades", "Alternates", "film", "Pilot"} < set(sheets)
    again = load_study(write(tmp_path / "again.xlsx", bom=sheets["BOM"], extra={n: sheets[n] for n in OFFER_SHEETS}))
    assert (again.grades, again.prices) == (study.grades, study.prices)
    assert placeless(again.alternates) == placeless(study.alternates)
    assert again.digest == study.digest


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
