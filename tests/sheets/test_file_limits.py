"""Every limit of a file and of a study, each answered by one whole sentence; the numbers are this project's own."""

import io
import struct
import time
import zipfile
from pathlib import Path

import pytest

from tests.sheets.made_books import book, grid, ods, package, sheet_xml
from tests.sheets.studies import COLUMNS, write
from tests.sheets.test_opening import ONE, refused
from yieldosc.cli import main
from yieldosc.errors import Finding, InputError, Place
from yieldosc.sheets import opening
from yieldosc.sheets.bom import read_bom
from yieldosc.sheets.peek import sheet_names
from yieldosc.sheets.size_limits import few_alike
from yieldosc.sheets.study_file import is_study, load_study

LESS = "delete what is not the BOM and save it again"
AGAIN = "open it in a spreadsheet program and save it again"


def sheets(count: int) -> dict[str, bytes | str]:
    """The parts of a workbook that lists so many sheets."""
    names = "".join(f'<sheet name="S{i}" sheetId="{i}" r:id="rId1"/>' for i in range(1, count + 1))
    start = package(ONE)
    with zipfile.ZipFile(io.BytesIO(start)) as archive:
        text = archive.read("xl/workbook.xml").decode()
    return {"xl/workbook.xml": text.replace('<sheet name="BOM" sheetId="1" r:id="rId1"/>', names)}


def row_of(count: int) -> str:
    return "".join(f"<row>{'<c><v>1</v></c>' * 500}</row>" for _ in range(count))


def renamed_size(data: bytes, name: bytes, size: int) -> bytes:
    """The package with another unpacked size written beside a part, in its own header and in the list of parts."""
    out = bytearray(data)
    for mark, offset, at in ((b"PK\x03\x04", 22, 30), (b"PK\x01\x02", 24, 46)):
        start = 0
        while (start := out.find(mark, start)) >= 0:
            if out[start + at : start + at + len(name)] == name:
                struct.pack_into("<L", out, start + offset, size)
            start += 4
    return bytes(out)


def encrypted(data: bytes) -> bytes:
    """The package with the flag of encryption set in its list of parts."""
    out = bytearray(data)
    start = out.find(b"PK\x01\x02")
    out[start + 8] |= 1
    return bytes(out)


def _zip(parts: dict[str, str]) -> bytes:
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w") as archive:
        for name, text in parts.items():
            archive.writestr(name, text)
    return buffer.getvalue()


def _ods_encrypted() -> bytes:
    return _zip({
        "mimetype": "application/vnd.oasis.opendocument.spreadsheet", "content.xml": "<x/>",
        "META-INF/manifest.xml": "<manifest:encryption-data/>",
    })  # fmt: skip


FILES = {
    "sheets": (lambda: package(ONE, sheets(101)), "file-limit", f"the file holds 101 sheets, more than 100; {LESS}"),
    "columns": (
        lambda: package(sheet_xml('<row r="1"><c r="SS1"><v>1</v></c></row>')), "file-limit",
        f"a sheet reaches row 1 and column 513; at most 10000 rows and 512 columns are read; {LESS}",
    ),
    "rows": (
        lambda: package(sheet_xml('<row r="10001"><c r="A10001"><v>1</v></c></row>')), "file-limit",
        f"a sheet reaches row 10001 and column 1; at most 10000 rows and 512 columns are read; {LESS}",
    ),
    "filled cells": (
        lambda: package(sheet_xml(row_of(201))), "file-limit", f"the file holds more than 100000 filled cells; {LESS}",
    ),
    "listed cells": (
        lambda: package(sheet_xml("".join(f"<row>{'<c/>' * 500}</row>" for _ in range(401)))), "file-limit",
        f"a sheet lists more than 200000 cells; {LESS}",
    ),
    "parts": (
        lambda: package(ONE, {f"xl/media/{i}.txt": "" for i in range(2000)}), "file-limit",
        f"the file holds 2005 packed parts, more than 2000; {LESS}",
    ),
    "encrypted zip": (
        lambda: encrypted(package(ONE)), "file-encrypted", "the file is encrypted; save it without a password and try again",
    ),
    "encrypted ods": (
        _ods_encrypted, "file-encrypted",
        "the file is encrypted; save it without a password and try again",
    ),
    "no spreadsheet": (
        lambda: _zip({"readme.txt": "x"}), "file-type",
        "the file is a zip archive that holds no spreadsheet; give a spreadsheet (xlsx, xls, xlsb, ods) or csv",
    ),
    "damaged part": (
        lambda: renamed_size(package(ONE), b"xl/worksheets/sheet1.xml", 3), "file-broken",
        f"part 'xl/worksheets/sheet1.xml' of the file is damaged; {AGAIN}",
    ),
    "gzip inside": (
        lambda: package(ONE, {"xl/more.bin": b"\x1f\x8b\x08rest"}), "file-nested",
        "part 'xl/more.bin' of the file is an archive itself; delete embedded files and save it again",
    ),
    "text columns": (
        lambda: b",".join([b"a"] * 513) + b"\n", "file-limit",
        f"a sheet reaches row 1 and column 513; at most 10000 rows and 512 columns are read; {LESS}",
    ),
    "text cells": (
        lambda: (b",".join([b"a"] * 500) + b"\n") * 201, "file-limit", f"the file holds more than 100000 cells; {LESS}",
    ),
    "text cell": (
        lambda: b"Ref,Value\nR1," + b"a" * 10_001 + b"\n", "file-limit",
        f"a cell holds 10001 characters, more than 10000; {LESS}",
    ),
}  # fmt: skip


@pytest.mark.parametrize("name", FILES)
def test_limits_of_a_file(tmp_path: Path, name: str) -> None:
    make, code, text = FILES[name]
    found = refused(tmp_path, make())
    assert found[0] == code
    assert found[1].startswith(text) if name == "text cell" else found[1] == text


def test_a_reader_without_memory_is_a_finding(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    short = "import yieldosc.sheets.child_limits as limits\nlimits.MEMORY_BYTES = 60_000_000\nfrom yieldosc.sheets.child import main"
    monkeypatch.setattr(opening, "_START", opening._START.replace("from yieldosc.sheets.child import main", short))
    code, text = refused(tmp_path, package(ONE, {"xl/media/a.txt": b" " * 50_000_000}))
    assert (code, text) in [
        ("file-limit", f"reading the file needs too much memory; {LESS}"),
        ("reader-died", f"the file made its reader fail (too much memory or a damaged structure); {AGAIN}"),
    ]


def test_a_bom_larger_than_any_board() -> None:
    rows = [f"R{i}|1k" for i in range(5001)]
    with pytest.raises(InputError) as caught:
        read_bom(book(grid("Ref|Value", *rows)))
    assert str(caught.value) == (
        "made.xlsx: the BOM holds 5001 rows with 33897 characters; at most 5000 and 1000000 are read: give the BOM of one "
        "board"
    )
    with pytest.raises(InputError) as caught:
        read_bom(book(grid("Ref|Value", *(f"R{i}|{'x' * 9_000}" for i in range(112)))))
    assert str(caught.value) == (
        "made.xlsx: the BOM holds 112 rows with 1008338 characters; at most 5000 and 1000000 are read: give the BOM of one "
        "board"
    )
    with pytest.raises(InputError) as caught:
        read_bom(book(grid("Ref|Value", *(f"R{i}01-R{i}99|1k" for i in range(1, 103)))))
    assert str(caught.value) == (
        "made.xlsx: the BOM holds more than 10000 parts; at most 10000 parts are read: give the BOM of one board"
    )


@pytest.mark.parametrize(
    ("name", "rows", "text"),
    [
        ("Roles", [COLUMNS, *([f"X{i}"] for i in range(1000))], "1001 rows and 13 columns; at most 1000"),
        ("Grades", [["Part", *["x"] * 50]], "1 rows and 51 columns; at most 1000"),
        ("Alternates", [["Part"], *(["R1"] for _ in range(1000))], "1001 rows and 1 columns; at most 1000"),
        ("Design", [["Item", "Value"], *([f"x{i}", 1] for i in range(500))], "501 rows and 2 columns; at most 500"),
    ],
)
def test_a_study_larger_than_any_study(tmp_path: Path, name: str, rows: list[list[object]], text: str) -> None:
    start = time.monotonic()
    with pytest.raises(InputError) as caught:
        load_study(write(tmp_path / "study.xlsx", extra={name: rows}))
    assert time.monotonic() - start < 5
    assert str(caught.value) == (
        f"{name}: the sheet {name} has {text} and 50 are read: delete what does not belong to the study"
    )


def test_findings_of_one_sort_are_told_two_hundred_times() -> None:
    made = [Finding("error", "unreadable", f"row {i}", Place("Pilot", i)) for i in range(1, 251)]
    other = Finding("note", "unreadable", "a note", Place("Roles", 3))
    told = few_alike([*made, other])
    assert told[:200] == made[:200]
    assert told[200] == other
    assert [(f.level, f.code, f.text, str(f.place)) for f in told[201:]] == [
        ("error", "more-findings", "50 more findings of this sort (unreadable) are not listed; correct those above first", "Pilot")
    ]
    assert few_alike(made[:200]) == made[:200]


def test_names_of_sheets_without_reading_them(tmp_path: Path) -> None:
    assert sheet_names(write(tmp_path / "study.xlsx").read_bytes()) == ("BOM", "Design", "Roles")
    assert sheet_names(package(ONE)) == ("BOM",)
    for unknown in (ods(""), b"PK\x03\x04", b"Ref,Value\n", package(ONE)[:-30], _zip({"x": "y"})):
        assert sheet_names(unknown) is None
    many = package(ONE, {f"xl/media/{i:060d}.txt": "" for i in range(5000)})
    assert sheet_names(many) is None  # its list of parts alone is too long
    huge = package(ONE, {"xl/workbook.xml": "<sheets>" + " " * 1_000_001 + '<sheet name="Design"/></sheets>'})
    assert sheet_names(huge) is None
    path = tmp_path / "spaced.ods"
    path.write_bytes(ods(""))
    assert not is_study(path)


STEERING = "\x1b]0;title\x07\x1b[31m\u202eR\u200b1\x9b2J"


def cells_with(text: str) -> list[list[object]]:
    return [["Designator", "Value", "Tolerance", "Description"], ["R1, R2", "15k8", "±1 %", text], [text, "1k", text, text]]


@pytest.mark.parametrize("command", ["check", "draft"])
def test_no_control_character_of_a_cell_reaches_the_terminal(tmp_path: Path, capsys, command: str) -> None:
    path = tmp_path / "bom.csv"
    lines = [",".join(f'"{cell}"' for cell in row) for row in cells_with(STEERING)]
    path.write_text("\n".join(lines), encoding="utf-8")
    words = [command, str(path)] + (["--circuit", "pierce", "-o", str(tmp_path / "s.xlsx")] if command == "draft" else [])
    assert main(words) == 0
    captured = capsys.readouterr()
    assert captured.out
    assert not any(c in captured.out + captured.err for c in "\x1b\x07\u202e\u200b\x9b")


def test_no_control_character_of_a_study_reaches_the_terminal(tmp_path: Path, capsys) -> None:
    """A workbook keeps only what XML can hold: direction marks, zero-width and C1 control characters."""
    steering = "\u202eR\u200b1\x9b2J"
    path = write(
        tmp_path / "study.xlsx",
        design={steering: "1", "circuit": steering, "option x": steering, "yield target": steering, "trim role": steering,
                "pilot column": steering},
        roles={steering: {"Part": steering}, "R1": {"Part": steering, "Source": steering, "Shape": steering, "Tolerance": steering}},
        extra={"Grades": [["Part", "Tolerance", steering], [steering, steering]], "Measured": [[steering], [steering]],
               "Alternates": [["Part", "Alternate", "Tolerance"], ["C1", steering, steering], [steering, steering]],
               "Pilot": [[steering], [steering], [steering]]},
    )  # fmt: skip
    assert main(["check", str(path)]) == 2
    wrong_circuit = capsys.readouterr()
    path = write(
        tmp_path / "other.xlsx",
        design={"trim role": steering, "trim low": "1k", "trim high": "2k", "pilot column": steering},
        roles={"R1": {"Note": steering, "Source": steering}, "GBW": {"Typ": steering}},
        extra={"Grades": [["Part", "Tolerance"], [steering, steering]], "Pilot": [[steering], [steering], [steering]],
               "Alternates": [["Part", "Alternate", "Tolerance"], ["C1", steering, steering], [steering, steering]]},
    )  # fmt: skip
    assert main(["check", str(path)]) == 2
    captured = capsys.readouterr()
    text = wrong_circuit.err + captured.err
    assert "unknown" in text or "which" in text
    assert not any(c in text + captured.out for c in "\u202e\u200b\x9b\x1b")
