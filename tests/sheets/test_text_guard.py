"""Text from strangers reaches neither a terminal as a command nor a spreadsheet as a formula."""

import unicodedata

import pytest
from hypothesis import given
from hypothesis import strategies as st

from yieldosc.sheets.text_guard import formula_proof, printable


@given(st.text())
def test_no_control_character_survives(text: str) -> None:
    assert not any(unicodedata.category(character).startswith("C") for character in printable(text))


def test_escape_sequences_and_direction_marks() -> None:
    assert printable("R1\x1b[31m\u202e4k7\u200b\x07\nnext\u2028line") == "R1[31m4k7 next line"
    assert printable("10 µF ±5 % Ω 電容") == "10 µF ±5 % Ω 電容"


@pytest.mark.parametrize("text", ["=1+1", "+1", "-1", "@sum", "\t=1", "\r=1", " =1", "＝1", "-220 ppm/K"])
def test_text_that_begins_like_a_formula_is_marked(text: str) -> None:
    assert formula_proof(text) == f"'{text}"


@pytest.mark.parametrize("text", ["4k7", "±5 %", "", "R1-R4", "1+1"])
def test_other_text_stays(text: str) -> None:
    assert formula_proof(text) == text
