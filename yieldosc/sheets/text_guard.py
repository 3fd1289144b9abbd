"""Text from strangers made harmless: for terminals, and for workbooks and csv files that we write."""

from __future__ import annotations

import unicodedata

_FORMULA_STARTS = "=+-@\t\r\n＝＋－＠"  # spreadsheets take the full-width forms for the same signs


def printable(text: str) -> str:
    """The text without what could steer a terminal or turn a line round.

    Control characters (escape sequences lose their escape), bidirectional overrides, zero-width and unassigned
    characters are removed; line breaks and tabs become blanks.
    """
    kept = []
    for character in text:
        if character in "\t\n\r\v\f\x85\u2028\u2029":
            kept.append(" ")
        elif not unicodedata.category(character).startswith("C"):
            kept.append(character)
    return "".join(kept)


def begins_like_formula(text: str) -> bool:
    """True for text that a spreadsheet would take for a formula when it is typed or read from csv."""
    return text.lstrip(" \xa0\ufeff")[:1] in tuple(_FORMULA_STARTS) or text[:1] in tuple(_FORMULA_STARTS)


def formula_proof(text: str) -> str:
    """The text for a csv cell: an apostrophe before text that begins like a formula, else unchanged.

    In a workbook no apostrophe is needed: the writer sets the cell's type to string (openpyxl: `data_type = "s"`),
    which no reader evaluates.
    """
    return f"'{text}" if begins_like_formula(text) else text
