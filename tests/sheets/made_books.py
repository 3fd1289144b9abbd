"""Spreadsheets made by hand for tests: small packages with exactly the parts that a test needs, and grids of text."""

from __future__ import annotations

import io
import zipfile

from yieldosc.sheets.bom import BomReading, read_bom
from yieldosc.sheets.bomline import BomLine
from yieldosc.sheets.grid import EMPTY, Book, Cell, Grid

_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_RELATIONS = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE = "http://schemas.openxmlformats.org/package/2006"


def sheet_xml(rows: str, after: str = "") -> str:
    """One worksheet around the given <row> elements."""
    return f'<?xml version="1.0"?><worksheet xmlns="{_MAIN}"><sheetData>{rows}</sheetData>{after}</worksheet>'


def package(sheet: str, extra: dict[str, bytes | str] | None = None) -> bytes:
    """The smallest xlsx file with one sheet "BOM" of that XML, and further parts."""
    parts: dict[str, bytes | str] = {
        "[Content_Types].xml": f'<?xml version="1.0"?><Types xmlns="{_PACKAGE}/content-types">'
        '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        '<Default Extension="xml" ContentType="application/xml"/></Types>',
        "_rels/.rels": f'<?xml version="1.0"?><Relationships xmlns="{_PACKAGE}/relationships"><Relationship Id="rId1" '
        f'Type="{_RELATIONS}/officeDocument" Target="xl/workbook.xml"/></Relationships>',
        "xl/workbook.xml": f'<?xml version="1.0"?><workbook xmlns="{_MAIN}" xmlns:r="{_RELATIONS}"><sheets>'
        '<sheet name="BOM" sheetId="1" r:id="rId1"/></sheets></workbook>',
        "xl/_rels/workbook.xml.rels": f'<?xml version="1.0"?><Relationships xmlns="{_PACKAGE}/relationships">'
        f'<Relationship Id="rId1" Type="{_RELATIONS}/worksheet" Target="worksheets/sheet1.xml"/></Relationships>',
        "xl/worksheets/sheet1.xml": sheet,
        **(extra or {}),
    }
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        for name, content in parts.items():
            archive.writestr(name, content)
    return buffer.getvalue()


def text_cell(address: str, text: str) -> str:
    return f'<c r="{address}" t="inlineStr"><is><t>{text}</t></is></c>'


def ods(rows: str) -> bytes:
    """The smallest OpenDocument sheet around the given rows."""
    spaces = " ".join(
        f'xmlns:{name}="urn:oasis:names:tc:opendocument:xmlns:{name}:1.0"' for name in ("office", "table", "text")
    )
    content = (
        f"<office:document-content {spaces} "
        'xmlns:calcext="urn:org:documentfoundation:names:experimental:calc:xmlns:calcext:1.0">'
        f'<office:body><office:spreadsheet><table:table table:name="BOM">{rows}</table:table></office:spreadsheet>'
        "</office:body></office:document-content>"
    )
    buffer = io.BytesIO()
    with zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as archive:
        archive.writestr("mimetype", "application/vnd.oasis.opendocument.spreadsheet")
        archive.writestr("content.xml", content)
        archive.writestr(
            "META-INF/manifest.xml",
            '<manifest:manifest xmlns:manifest="urn:oasis:names:tc:opendocument:xmlns:manifest:1.0"/>',
        )
    return buffer.getvalue()


def grid(*rows: str, name: str = "BOM", separator: str = "|") -> Grid:
    """A sheet of text cells from lines such as "R1|4k7|1 %"."""
    cells = [
        tuple(Cell("text", text.strip()) if text.strip() else EMPTY for text in row.split(separator)) for row in rows
    ]
    return Grid(name, tuple(cells))


def book(*grids: Grid) -> Book:
    return Book("made.xlsx", "xlsx", grids)


def read(*rows: str, name: str = "BOM") -> BomReading:
    """A BOM read from lines such as "R1|4k7|1 %"."""
    return read_bom(book(grid(*rows, name=name)))


def only(reading: BomReading) -> BomLine:
    """The one line of a reading."""
    (line,) = reading.lines
    return line


def texts(reading: BomReading, *without: str) -> list[str]:
    """All findings as "LEVEL CODE PLACE: TEXT", except the closing note on tolerances and the codes named."""
    skipped = ("bom-tolerance-missing", *without)
    return [f"{f.level} {f.code} {f.place}: {f.text}" for f in reading.findings if f.code not in skipped]
