"""Mutates spreadsheets and reads them; every answer must be parts or findings, in time. Run by hand:

    python tests/fuzz_sheets.py --cases 3000 --seed 1

Not collected by the normal run: thousands of child processes take minutes.
"""

from __future__ import annotations

import argparse
import collections
import io
import random
import sys
import tempfile
import time
import zipfile
from pathlib import Path

import openpyxl

sys.path.insert(0, str(Path(__file__).resolve().parents[1]))

from tests.sheets.made_books import ods, package, sheet_xml, text_cell
from yieldosc.errors import InputError
from yieldosc.sheets.bom import read_bom
from yieldosc.sheets.opening import open_book

ROWS = (
    ("Designator", "Qty", "Value", "Tolerance", "Description"),
    ("C1, C2", 2, "22 pF", "±5 %", "C0G 50V"),
    ("R1-R4", 4, "4k7", "1 %", "RES 100ppm/K"),
    ("Y1", 1, "8 MHz", "", "crystal 20ppm 12pF 60R"),
    ("R5", 1, 4700, 0.05, "=1+1"),
)
FRAGMENTS = (
    b"\0",
    b"\xff\xfe",
    b"<",
    b">",
    b"&a;",
    b'"',
    b"<!DOCTYPE x>",
    b"1e999",
    b"-1",
    b"4294967295",
    b'r="XFD1048576"',
    b't="e"',
    b"=cmd|' /C calc'!A0",
    b"\x1b]0;x\x07",
    b"PK\x03\x04",
    b"R1-R99999999",
    b"C[",
    "…±µΩ".encode(),
    b"9" * 50,
)


def samples() -> list[bytes]:
    """Files of several kinds with the same invented table."""
    workbook = openpyxl.Workbook()
    sheet = workbook.active
    assert sheet is not None
    for row in ROWS:
        sheet.append(row)
    sheet["D5"].number_format = "0 %"
    stream = io.BytesIO()
    workbook.save(stream)
    text = "\n".join(",".join(f'"{cell}"' for cell in row) for row in ROWS)
    cells = "".join(
        f'<row r="{r}">'
        + "".join(text_cell(f"{column}{r}", str(v)) for column, v in zip("ABCDE", row, strict=True))
        + "</row>"
        for r, row in enumerate(ROWS, 1)
    )
    ods_rows = "".join(
        "<table:table-row>"
        + "".join(f'<table:table-cell office:value-type="string"><text:p>{v}</text:p></table:table-cell>' for v in row)
        + "</table:table-row>"
        for row in ROWS
    )
    return [stream.getvalue(), package(sheet_xml(cells)), ods(ods_rows), text.encode(), text.encode("utf-16")]


def bytes_mutated(data: bytes, dice: random.Random) -> bytes:
    """A few bytes flipped, cut, doubled or replaced by a fragment."""
    out = bytearray(data)
    for _ in range(dice.randint(1, 6)):
        if not out:
            break
        at = dice.randrange(len(out))
        match dice.randrange(5):
            case 0:
                out[at] = dice.randrange(256)
            case 1:
                del out[at : at + dice.randint(1, 200)]
            case 2:
                out[at:at] = out[at : at + dice.randint(1, 200)]
            case 3:
                out[at:at] = dice.choice(FRAGMENTS)
            case _:
                out[at : at + 4] = dice.randbytes(4)
    return bytes(out)


def parts_mutated(data: bytes, dice: random.Random) -> bytes:
    """A part of a zip package mutated inside, dropped or renamed, and packed again whole."""
    buffer = io.BytesIO()
    with zipfile.ZipFile(io.BytesIO(data)) as old, zipfile.ZipFile(buffer, "w", zipfile.ZIP_DEFLATED) as new:
        victim = dice.choice(old.namelist())
        for name in old.namelist():
            content = old.read(name)
            if name == victim:
                if dice.random() < 0.1:
                    continue
                content = bytes_mutated(content, dice)
            new.writestr(name, content)
    return buffer.getvalue()


def main() -> int:
    parser = argparse.ArgumentParser(description=__doc__)
    parser.add_argument("--cases", type=int, default=3000)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--minutes", type=float, default=60.0, help="stop after so long, with what was done")
    options = parser.parse_args()
    dice, originals, outcomes, slowest, failures = random.Random(options.seed), samples(), collections.Counter(), 0.0, 0
    began = time.monotonic()
    with tempfile.TemporaryDirectory() as folder:
        path = Path(folder) / "case"
        for case in range(options.cases):
            if time.monotonic() - began > 60 * options.minutes:
                options.cases = case
                break
            data = dice.choice(originals)
            packed = data[:2] == b"PK" and dice.random() < 0.7
            path.write_bytes(parts_mutated(data, dice) if packed else bytes_mutated(data, dice))
            start = time.monotonic()
            try:
                outcomes["read"] += len(read_bom(open_book(path)).lines) > 0
            except InputError as refusal:
                outcomes[refusal.findings[0].code] += 1
            except Exception as error:
                failures += 1
                kept = Path(tempfile.gettempdir()) / f"fuzz_{options.seed}_{case}"
                kept.write_bytes(path.read_bytes())
                print(f"case {case}: {error!r}, kept as {kept}")
            slowest = max(slowest, time.monotonic() - start)
    print(f"{options.cases} cases, seed {options.seed}: {failures} failures, slowest {slowest:.2f} s")
    for outcome, count in outcomes.most_common():
        print(f"  {count:6d}  {outcome}")
    return 1 if failures or slowest > 5 else 0


if __name__ == "__main__":
    sys.exit(main())
