"""Opening files of strangers: every format in, every trap answered by one sentence within the limits."""

import io
import os
import time
from pathlib import Path

import openpyxl
import pytest

from tests.sheets.made_books import ods, package, sheet_xml, text_cell
from yieldosc.errors import InputError
from yieldosc.sheets import opening
from yieldosc.sheets.grid import Grid
from yieldosc.sheets.opening import open_book

OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
LIMITS = "at most 10000 rows and 512 columns are read; delete what is not the BOM and save it again"


def texts(grid: Grid) -> list[list[str]]:
    return [[cell.text for cell in row] for row in grid.rows]


def opened(folder: Path, data: bytes, name: str = "file.bin") -> Grid:
    path = folder / name
    path.write_bytes(data)
    return open_book(path).sheets[0]


def refused(folder: Path, data: bytes) -> tuple[str, str]:
    """Code and whole text of the one finding, with the time checked."""
    path = folder / "file.xlsx"
    path.write_bytes(data)
    start = time.monotonic()
    with pytest.raises(InputError) as caught:
        open_book(path)
    assert time.monotonic() - start < 5.0
    (finding,) = caught.value.findings
    assert (finding.level, finding.place.sheet) == ("error", "file.xlsx")
    return finding.code, finding.text


TABLE = "Reference,Value\nR1,4k7 ±1 % Ω\n"


@pytest.mark.parametrize("encoding", ["utf-8", "utf-8-sig", "utf-16", "utf-16-le", "utf-16-be"])
def test_text_in_every_encoding(tmp_path: Path, encoding: str) -> None:
    assert texts(opened(tmp_path, TABLE.encode(encoding))) == [["Reference", "Value"], ["R1", "4k7 ±1 % Ω"]]


@pytest.mark.parametrize(
    ("text", "encoding"),
    [
        ("Bauteil;Wert\nC1;4,7µF ±10 %\nR1;Widerstand für Größe\n", "cp1252"),
        ("Обозначение;Номинал\nC1;4,7мкФ\nR1;10кОм резистор\n", "cp1251"),
        ("位号;值;备注\nR1;10k;贴片电阻器件\nC1;100n;陶瓷电容\n", "gb18030"),
        ("リファレンス;値\nR1;コンデンサ\n", "cp932"),
    ],
)
def test_text_of_eight_bit_encodings_is_told_by_its_letters(tmp_path: Path, text: str, encoding: str) -> None:
    path = tmp_path / "bom.csv"
    path.write_bytes(text.encode(encoding))
    book = open_book(path)
    assert texts(book.sheets[0]) == [line.split(";") for line in text.splitlines()]
    assert [f.text for f in book.findings] == [
        f"the file does not say its encoding; it was read as {encoding}; save it as UTF-8 where letters look wrong"
    ]


@pytest.mark.parametrize("separator", [",", ";", "\t", "|"])
@pytest.mark.parametrize("end", ["\n", "\r\n", "\r"])
def test_separators_and_line_ends(tmp_path: Path, separator: str, end: str) -> None:
    rows = [["Ref", "Value", "Note"], ["R1", "2,2k" if separator != "," else "2.2k", ""], ["C1", "10n", "x"]]
    found = opened(tmp_path, end.join(separator.join(row) for row in rows).encode())
    assert texts(found) == rows


def test_whole_records_quoted_as_one_field(tmp_path: Path) -> None:
    assert texts(opened(tmp_path, b'"Ref,Value"\n"R1,4k7"\n"C1,10n"\n')) == [
        ["Ref", "Value"],
        ["R1", "4k7"],
        ["C1", "10n"],
    ]


def test_stray_quotation_mark_swallows_no_rows(tmp_path: Path) -> None:
    rows = "\n".join(f"R{i},{i}k,x" for i in range(2, 9))
    found = opened(tmp_path, f'Ref,Value,Note\nR1,1k,"0.1 inch\n{rows}\n'.encode())
    assert [row[0] for row in texts(found)] == ["Ref", *(f"R{i}" for i in range(1, 9))]


def test_separator_line_and_quoted_line_breaks(tmp_path: Path) -> None:
    assert texts(opened(tmp_path, b'sep=;\nRef;Value\n"R1\nR2";4k7\n'))[1:] == [["Ref", "Value"], ["R1\nR2", "4k7"]]


def test_workbook_cells_keep_percent_error_and_empty_formula(tmp_path: Path) -> None:
    workbook = openpyxl.Workbook()
    sheet = workbook.active
    assert sheet is not None
    sheet.append(["R1", 0.05, 0.05, "=1+1", True])
    sheet["C1"].number_format = "0.0 %"
    stream = io.BytesIO()
    workbook.save(stream)
    (row,) = opened(tmp_path, stream.getvalue()).rows
    assert [(cell.kind, cell.text) for cell in row] == [
        ("text", "R1"), ("number", "0.05"), ("percent", "5 %"), ("formula_without_result", ""), ("boolean", "TRUE"),
    ]  # fmt: skip
    error = package(sheet_xml('<row r="1"><c r="B1" t="e"><f>1/0</f><v>#DIV/0!</v></c></row>'))
    assert opened(tmp_path, error).cell(0, 1).text == "#DIV/0!"
    assert opened(tmp_path, error).cell(0, 1).kind == "error"


def test_cells_without_addresses_and_broken_styles(tmp_path: Path) -> None:
    data = package(sheet_xml("<row><c><v>1</v></c><c><v>2</v></c></row>"), {"xl/styles.xml": "<styleSheet><broken"})
    assert texts(opened(tmp_path, data)) == [["1", "2"]]


def test_opendocument_percent_and_error(tmp_path: Path) -> None:
    rows = (
        '<table:table-row><table:table-cell office:value-type="percentage" office:value="0.05"><text:p>5 %</text:p>'
        '</table:table-cell><table:table-cell table:formula="of:=1/0" office:value-type="string" '
        'office:string-value="" '
        'calcext:value-type="error"><text:p>#DIV/0!</text:p></table:table-cell></table:table-row>'
    )
    (row,) = opened(tmp_path, ods(rows)).rows
    assert [(cell.kind, cell.number) for cell in row] == [("percent", 0.05), ("error", None)]


ONE = sheet_xml('<row r="1"><c r="A1"><v>1</v></c></row>')


def test_hostile_packages(tmp_path: Path) -> None:
    corner = '<row r="1"><c r="A1"><v>1</v></c></row><row r="1048576"><c r="XFD1048576"><v>1</v></c></row>'
    assert refused(tmp_path, package(sheet_xml(corner))) == (
        "file-limit",
        f"a sheet reaches row 1048576 and column 16384; {LIMITS}",
    )
    bomb = package(ONE, {"xl/sharedStrings.xml": b"<sst>" + b" " * 300_000_000 + b"</sst>"})
    assert len(bomb) < 2**20
    assert refused(tmp_path, bomb) == (
        "file-limit",
        "the file unpacks to 300 MB, more than 67 MB; delete what is not the BOM and save it again",
    )
    assert refused(tmp_path, package(ONE, {"xl/sharedStrings.xml": "<sst>" + "<si/>" * 200_001 + "</sst>"})) == (
        "file-limit",
        "the file holds more than 200000 shared strings; delete what is not the BOM and save it again",
    )
    assert refused(tmp_path, package(ONE, {"xl/embeddings/more.xlsx": package(ONE)})) == (
        "file-nested",
        "part 'xl/embeddings/more.xlsx' of the file is an archive itself; delete embedded files and save it again",
    )
    entities = ONE.replace("<worksheet", '<!DOCTYPE x [<!ENTITY a "aaaa">]><worksheet', 1)
    assert refused(tmp_path, package(entities)) == (
        "file-entities",
        "part 'xl/worksheets/sheet1.xml' of the file declares a document type or entities; open it in a spreadsheet "
        "program and save it again",
    )
    long_cell = package(sheet_xml(f'<row r="1">{text_cell("A1", "a" * 10_001)}</row>'))
    assert refused(tmp_path, long_cell) == (
        "file-limit",
        "a cell holds 10001 characters, more than 10000; delete what is not the BOM and save it again",
    )
    assert refused(tmp_path, package(ONE)[:-100]) == (
        "file-broken",
        "the file begins like a zip archive but is damaged; open it in a spreadsheet program and save it again",
    )


def test_a_sheet_that_repeats_its_cells_without_end(tmp_path: Path) -> None:
    rows = (
        '<table:table-row table:number-rows-repeated="1000000"><table:table-cell office:value-type="string" '
        'table:number-columns-repeated="16000"><text:p>x</text:p></table:table-cell></table:table-row>'
    )
    assert refused(tmp_path, ods(rows)) == ("file-limit", f"a sheet reaches row 1000000 and column 16000; {LIMITS}")


def test_deep_nesting_that_kills_its_reader_is_a_finding(tmp_path: Path) -> None:
    deep = package(sheet_xml("<row>" + "<c>" * 200_000 + "</c>" * 200_000 + "</row>"))
    assert refused(tmp_path, deep)[0] in ("reader-died", "file-broken")


def test_a_reader_that_hangs_is_stopped(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(opening, "_START", "import time; time.sleep(60)")
    monkeypatch.setattr(opening, "CHILD_SECONDS", 0.3)
    assert refused(tmp_path, package(ONE)) == (
        "reader-timeout",
        "reading the file took more than 0.3 s and was stopped; delete what is not the BOM and save it again",
    )


def test_a_reader_that_aborts_is_a_finding(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(opening, "_START", "import os; os.abort()")
    assert refused(tmp_path, package(ONE)) == (
        "reader-died",
        "the file made its reader fail (too much memory or a damaged structure); open it in a spreadsheet program and "
        "save it again",
    )


def test_foreign_and_encrypted_files(tmp_path: Path) -> None:
    give = "give a spreadsheet (xlsx, xls, xlsb, ods) or csv"
    encrypted = ("file-encrypted", "the file is encrypted; save it without a password and try again")
    assert refused(tmp_path, OLE + bytes(100) + "EncryptedPackage".encode("utf-16-le") + bytes(600)) == encrypted
    assert refused(tmp_path, b"%PDF-1.7 ...") == ("file-type", f"the file is a PDF document; {give}")
    assert refused(tmp_path, b"a,b\n1,\0\n") == ("file-type", f"the file holds NUL bytes or is not text; {give}")
    assert refused(tmp_path, b"<html><table>") == (
        "file-type",
        "the file is HTML or XML whatever its name says; open it in a spreadsheet program and save it as xlsx or csv",
    )
    assert refused(tmp_path, b" \r\n") == ("file-empty", "the file is empty; give a file that holds a BOM")
    assert refused(tmp_path, OLE + bytes(2000)) == (
        "file-broken",
        "the file is damaged or holds no spreadsheet; open it in a spreadsheet program and save it again",
    )
    assert refused(tmp_path, b"R1\n" * 10_002) == ("file-limit", f"a sheet reaches row 10003 and column 1; {LIMITS}")


def test_paths_that_are_no_files(tmp_path: Path) -> None:
    os.mkfifo(tmp_path / "pipe")
    for path, code, text in (
        (tmp_path, "file-not-regular", "the path is a directory, not a file; give the spreadsheet itself"),
        (
            tmp_path / "pipe",
            "file-not-regular",
            "the path is a device or a pipe, not a file; give the spreadsheet itself",
        ),
        (
            Path("/dev/null"),
            "file-not-regular",
            "the path is a device or a pipe, not a file; give the spreadsheet itself",
        ),
        (tmp_path / "none", "file-not-found", f"there is no file {str(tmp_path / 'none')!r}; check the path"),
        (
            Path("a\0b"),
            "file-unreadable",
            "the file cannot be read (the path cannot be used); check the path and the rights",
        ),
    ):
        with pytest.raises(InputError) as caught:
            open_book(path)
        assert [(f.code, f.text) for f in caught.value.findings] == [(code, text)]


def test_large_files_are_refused_unread(tmp_path: Path) -> None:
    path = tmp_path / "file.xlsx"
    with path.open("wb") as stream:
        stream.truncate(30_000_000)
    with pytest.raises(InputError) as caught:
        open_book(path)
    assert caught.value.findings[0].text == (
        "the file has 30 MB, more than 21 MB; delete what is not the BOM and save it again"
    )


def test_a_file_that_changes_while_it_is_read(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "file.csv"
    path.write_bytes(b"Ref,Value\nR1,1k\n")
    real = os.fstat

    def growing(handle: int) -> os.stat_result:
        found = real(handle)
        path.write_bytes(b"Ref,Value\nR1,1k\nR2,2k\n")
        return found

    monkeypatch.setattr(opening.os, "fstat", growing)
    with pytest.raises(InputError) as caught:
        open_book(path)
    assert caught.value.findings[0].text == (
        "the file changed while it was read; close the program that writes it and try again"
    )
