"""Designator cells as people write them (each notation counted in real BOMs)."""

import pytest

from yieldosc.sheets.designators import MOST, looks_like_designators, parse_designators


def numbered(prefix: str, *numbers: int) -> tuple[str, ...]:
    return tuple(f"{prefix}{number}" for number in numbers)


@pytest.mark.parametrize(
    ("text", "names"),
    [
        ("C7-8", numbered("C", 7, 8)),
        ("R27-R30", numbered("R", 27, 28, 29, 30)),
        ("C1 - C4", numbered("C", 1, 2, 3, 4)),
        ("IC1..IC3", numbered("IC", 1, 2, 3)),
        ("R21…R31", numbered("R", *range(21, 32))),
        ("R1 to R4", numbered("R", 1, 2, 3, 4)),
        ("Q101,102", numbered("Q", 101, 102)),
        ("C[2,9-12,15]", numbered("C", 2, 9, 10, 11, 12, 15)),
        ("C5-7,115,116", numbered("C", 5, 6, 7, 115, 116)),
        ("C11, C21, …., C81", numbered("C", *range(11, 82, 10))),
        ("R101, R201,…, R801\nR103, R203,…R803", numbered("R", *range(101, 802, 100), *range(103, 804, 100))),
        ("LED1…3", numbered("LED", 1, 2, 3)),
        ("U1,…U8", numbered("U", *range(1, 9))),
        ("C1 C2  C4,", numbered("C", 1, 2, 4)),
        ("R1;R2; R3", numbered("R", 1, 2, 3)),
        ("R1/R2", numbered("R", 1, 2)),
        ("M0:C1, M1:C1", ("M0:C1", "M1:C1")),
        ("R1A, R2B", ("R1A", "R2B")),
        ("X1,x2", ("X1", "x2")),
        ("+VS, -VS, GND", ("VS", "-VS", "GND")),
        ("Socket strip", ("Socket strip",)),
        ("--", ()),
        ("n/a", ()),
        ("", ()),
    ],
)
def test_lists_ranges_and_sets(text: str, names: tuple[str, ...]) -> None:
    found = parse_designators(text)
    assert (found.names, found.junk, found.count) == (names, (), None)


@pytest.mark.parametrize("text", ["R1,x5", "R1 x5", "R1(5)", "R1*5"])
def test_counts_that_are_glued_on(text: str) -> None:
    found = parse_designators(text)
    assert (found.names, found.count) == (("R1",), 5)


@pytest.mark.parametrize(
    ("text", "names", "junk"),
    [
        ("100", (), ("100",)),
        ("R5-R2", (), ("R5-R2",)),
        ("R1-C4", (), ("R1-C4",)),
        ("R1-R900000", (), ("R1-R900000",)),
        ("R1, ###", ("R1",), ("###",)),
    ],
)
def test_junk_is_kept_apart(text: str, names: tuple[str, ...], junk: tuple[str, ...]) -> None:
    found = parse_designators(text)
    assert (found.names, found.junk) == (names, junk)


def test_no_cell_yields_more_names_than_the_limit() -> None:
    found = parse_designators(",".join(f"R{i}01-R{i}99" for i in range(1, 99)))
    assert len(found.names) == MOST


def test_what_looks_like_designators() -> None:
    assert looks_like_designators("C1, C3-C6")
    assert not any(map(looks_like_designators, ["4k7", "100", "100n 50V", "resistor", "crystal 8 MHz"]))
