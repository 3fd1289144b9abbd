"""A file on disk → Book. Its type is judged by its bytes; binary formats are parsed in a child process under limits.

Every way in which a file cannot be used is one InputError with one sentence, within five seconds: the parent only reads
bytes and JSON lines, so that whatever a spreadsheet does to its reader happens elsewhere.
"""

from __future__ import annotations

import importlib.util
import json
import os
import stat
import subprocess
import sys
import tempfile
from pathlib import Path
from typing import Any, cast

from yieldosc.errors import Finding, InputError, Place, refusal
from yieldosc.sheets.delimited import read_delimited
from yieldosc.sheets.grid import EMPTY, Book, Cell, CellKind, Grid
from yieldosc.sheets.text_guard import printable

FILE_BYTES = 20 * 2**20
CHILD_SECONDS = 4.0
OUTPUT_BYTES = 48 * 2**20

_OLE = b"\xd0\xcf\x11\xe0\xa1\xb1\x1a\xe1"
_FOREIGN = (
    (b"%PDF", "a PDF document"),
    (b"\x89PNG", "a picture"),
    (b"\xff\xd8\xff", "a picture"),
    (b"GIF8", "a picture"),
    (b"{\\rtf", "an RTF document"),
    (b"7z\xbc\xaf", "a packed archive"),
    (b"Rar!", "a packed archive"),
    (b"\x1f\x8b", "a packed archive"),
    (b"BZh", "a packed archive"),
    (b"\xfd7zXZ", "a packed archive"),
    (b"\x7fELF", "a program"),
    (b"MZ", "a program"),
)
# The package's own start-up is skipped: it loads numerical libraries that the reader does not need.
_START = """
import sys, types
for name, folder in (("yieldosc", sys.argv[1]), ("yieldosc.sheets", sys.argv[2])):
    module = types.ModuleType(name)
    module.__path__ = [folder]
    sys.modules[name] = module
sys.path.append(sys.argv[3])
from yieldosc.sheets.child import main
main()
"""


def open_book(path: Path) -> Book:
    """All sheets of a spreadsheet or text file. Raises InputError when the file cannot be used."""
    place = Place(printable(path.name))
    data = read_file(path, place)
    what = next((name for start, name in _FOREIGN if data.startswith(start)), None)
    if what is not None:
        raise refusal("file-type", f"the file is {what}; give a spreadsheet (xlsx, xls, xlsb, ods) or csv", place)
    if data.startswith(_OLE):
        if "EncryptedPackage".encode("utf-16-le") in data:
            raise refusal("file-encrypted", f"the file is encrypted; {_NEXT['file-encrypted']}", place)
        return _in_child(path, data, place)
    if data.startswith((b"PK\x03\x04", b"PK\x05\x06")):
        return _in_child(path, data, place)
    return read_delimited(str(path), place, data)


_NEXT = {
    "file-broken": "open it in a spreadsheet program and save it again",
    "file-type": "give a spreadsheet (xlsx, xls, xlsb, ods) or csv",
    "file-limit": "delete what is not the BOM and save it again",
    "file-nested": "delete embedded files and save it again",
    "file-entities": "open it in a spreadsheet program and save it again",
    "file-encrypted": "save it without a password and try again",
}


def read_file(path: Path, place: Place) -> bytes:
    """The bytes of a regular file that keeps still while it is read."""
    flags = os.O_RDONLY | getattr(os, "O_NONBLOCK", 0) | getattr(os, "O_BINARY", 0)
    try:
        handle = os.open(path, flags)
    except FileNotFoundError:
        raise refusal("file-not-found", f"there is no file {printable(str(path))!r}; check the path", place) from None
    except (OSError, ValueError) as error:
        reason = error.strerror if isinstance(error, OSError) and error.strerror else "the path cannot be used"
        raise refusal("file-unreadable", f"the file cannot be read ({reason}); check the path and the rights",
                      place) from None  # fmt: skip
    before = os.fstat(handle)
    if not stat.S_ISREG(before.st_mode):
        os.close(handle)
        raise _not_regular("a directory" if stat.S_ISDIR(before.st_mode) else "a device or a pipe", place)
    with os.fdopen(handle, "rb") as stream:
        if before.st_size > FILE_BYTES:
            raise _too_big(before.st_size, place)
        try:
            data = stream.read(FILE_BYTES + 1)
        except OSError as error:
            raise refusal("file-unreadable", f"the file cannot be read ({error.strerror}); check the path and the "
                          "rights", place) from None  # fmt: skip
        after = os.fstat(stream.fileno())
    if (before.st_size, before.st_mtime_ns) != (after.st_size, after.st_mtime_ns) or len(data) != before.st_size:
        raise refusal(
            "file-changed", "the file changed while it was read; close the program that writes it and try again", place
        )
    if not data.strip(b" \t\r\n\xef\xbb\xbf"):
        raise refusal("file-empty", "the file is empty; give a file that holds a BOM", place)
    return data


def _not_regular(what: str, place: Place) -> InputError:
    return refusal("file-not-regular", f"the path is {what}, not a file; give the spreadsheet itself", place)


def _too_big(size: int, place: Place) -> InputError:
    return refusal(
        "file-limit",
        f"the file has {size / 1e6:.0f} MB, more than {FILE_BYTES / 1e6:.0f} MB; "
        "delete what is not the BOM and save it again",
        place,
    )


def _in_child(path: Path, data: bytes, place: Place) -> Book:
    """The book as the child process read it; its refusals, its death and its silence as findings."""
    sheets = Path(__file__).parent
    reader = importlib.util.find_spec("python_calamine")
    home = "" if reader is None or reader.origin is None else str(Path(reader.origin).parents[1])
    command = [sys.executable, "-I", "-c", _START, str(sheets.parent), str(sheets), home]
    with tempfile.TemporaryFile() as source, tempfile.TemporaryFile() as result:
        source.write(data)
        source.seek(0)
        process = subprocess.Popen(command, stdin=source, stdout=result, stderr=subprocess.DEVNULL)
        try:
            status = process.wait(CHILD_SECONDS)
        except subprocess.TimeoutExpired:
            process.kill()
            process.wait()
            raise refusal("reader-timeout", f"reading the file took more than {CHILD_SECONDS} s and was stopped; "
                          + _NEXT["file-limit"], place) from None  # fmt: skip
        except BaseException:
            process.kill()
            process.wait()
            raise
        result.seek(0)
        text = result.read(OUTPUT_BYTES).decode("utf-8", "replace")
    return _book(path, text, status, place)


def _book(path: Path, text: str, status: int, place: Place) -> Book:
    lines: list[dict[str, Any]] = []
    for line in text.splitlines():
        try:
            lines.append(json.loads(line))
        except json.JSONDecodeError:
            break
    last = lines[-1] if lines else {}
    if "refused" in last:
        code = str(last["refused"])
        raise refusal(code, f"{printable(str(last['text']))}; {_NEXT.get(code, _NEXT['file-broken'])}", place)
    if status != 0 or not last.get("end"):
        raise refusal(
            "reader-died",
            "the file made its reader fail (too much memory or a damaged structure); " + _NEXT["file-broken"],
            place,
        )
    grids = _grids(lines)
    file_type = str(lines[0]["type"])
    findings: tuple[Finding, ...] = ()
    if file_type in ("xls", "xlsb"):
        note = (
            f"error cells and percent formats of a .{file_type} file cannot be told from blanks and plain numbers; "
            "save it as .xlsx where that matters"
        )
        findings = (Finding("note", "file-blind", note, place),)
    return Book(str(path), file_type, grids, findings)


def _grids(lines: list[dict[str, Any]]) -> tuple[Grid, ...]:
    grids: list[Grid] = []
    rows: list[tuple[Cell, ...]] = []
    name, hidden = "", False

    def close() -> None:
        if name:
            grids.append(Grid(name, tuple(rows), hidden))

    for line in lines:
        if "sheet" in line:
            close()
            name, hidden, rows = str(line["sheet"]) or "(no name)", bool(line["hidden"]), []
        elif "row" in line:
            rows.extend([()] * (int(line["row"]) - len(rows)))
            cells = [EMPTY] * (line["cells"][-1][0] + 1)
            for column, kind, text, number in line["cells"]:
                cells[column] = Cell(cast("CellKind", kind), text, number)
            rows.append(tuple(cells))
    close()
    return tuple(grids)
