"""Quantities: every notation of the trade in, one out. Expected values are what the notation means by definition."""

import math
import re

import pytest
from hypothesis import given
from hypothesis import strategies as st

from yieldosc.quantities import (
    QuantityError,
    format_quantity,
    parse_deviation,
    parse_fraction,
    parse_quantity,
    parse_tolerance,
)


@pytest.mark.parametrize(
    ("text", "value", "si_unit"),
    [
        ("4k7", 4700.0, None),
        ("4.7k", 4700.0, None),
        ("4K7", 4700.0, None),
        ("4.7 kΩ", 4700.0, "Ω"),
        ("470R", 470.0, "Ω"),
        ("0R", 0.0, "Ω"),
        ("2R2", 2.2, "Ω"),
        ("R47", 0.47, "Ω"),
        ("1M", 1e6, None),
        ("100n", 100e-9, None),
        ("22p", 22e-12, None),
        ("0u1", 0.1e-6, None),
        ("10uH", 10e-6, "H"),
        ("2,2k", 2200.0, None),
        ("5м", 5e-3, None),
        ("4,7 мкФ", 4.7e-6, "F"),
        ("10кОм", 10e3, "Ω"),
        ("22 пФ", 22e-12, "F"),
        ("10 нФ", 10e-9, "F"),
        ("8 МГц", 8e6, "Hz"),
        ("1 µF", 1e-6, "F"),
        ("1 μF", 1e-6, "F"),
        ("1uF", 1e-6, "F"),
        ("10UF", 10e-6, "F"),
        ("4.7uf", 4.7e-6, "F"),
        ("1 kΩ", 1e3, "Ω"),
        ("1 k\u2126", 1e3, "Ω"),
        ("10 kohm", 10e3, "Ω"),
        ("20 KOHM", 20e3, "Ω"),
        ("10 MOhm", 10e6, "Ω"),
        ("100 ohms", 100.0, "Ω"),
        ("470E", 470.0, "Ω"),
        ("㏀", None, None),
        ("4.7㏀", 4700.0, "Ω"),
        ("1Meg", 1e6, None),
        ("12MHz", 12e6, "Hz"),
        ("16 Mhz", 16e6, "Hz"),
        ("12mhz", 12e6, "Hz"),
        ("8 mHz", 8e-3, "Hz"),
        ("32.768KHZ", 32768.0, "Hz"),
        ("32k768", 32768.0, None),
        ("3V3", 3.3, "V"),
        ("6V3", 6.3, "V"),
        ("100 mA", 0.1, "A"),
        ("100 µW", 100e-6, "W"),
        ("5 mS", 5e-3, "S"),
        ("5 ms", 5e-3, "s"),
        ("10 years", 10.0, "years"),
        ("-40 °C", -40.0, "°C"),
        ("−40 °C", -40.0, "°C"),
        ("85C", 85.0, "°C"),
        ("99.5 %", 0.995, "1"),
        ("30 ppm", 30e-6, "1"),
        ("-50 ppm", -50e-6, "1"),
        ("1e-9", 1e-9, None),
        ("1.5E-9F", 1.5e-9, "F"),
        ("4n7F", 4.7e-9, "F"),
        ("10 000 Ω", 1e4, "Ω"),
        ("1,000,000", 1e6, None),
        ("1.234,5", 1234.5, None),
        ("0,125", 0.125, None),
        (".5k", 500.0, None),
        ("10\u00a0k\u202fΩ", 10e3, "Ω"),
    ],
)
def test_notations(text: str, value: float | None, si_unit: str | None) -> None:
    if value is None:
        with pytest.raises(QuantityError):
            parse_quantity(text)
        return
    found = parse_quantity(text)
    assert (found.value, found.si_unit) == (value, si_unit)


@pytest.mark.parametrize(
    ("text", "si_unit", "message"),
    [
        ("abc", None, '"abc" is not a quantity; write for example "4.7 kΩ"'),
        ("4 7k", "Ω", '"4 7k" is not a quantity in Ω; write for example "4.7 kΩ"'),
        ("10 nF", "Ω", '"10 nF" is in F, expected Ω: for example "4.7 kΩ"'),
        ("5 %", "Hz", '"5 %" is in % or ppm, expected Hz: for example "8 MHz"'),
        ("", "F", 'the cell is empty; write for example "10 nF"'),
        ("12,500", None, '"12,500" can be read with a decimal comma or with a thousands comma; write 12.500 or 12500'),
        ("1e999", None, '"1e999" is not a quantity; write for example "4.7 kΩ"'),
        ("1e99999999", None, '"1e99999999" is not a quantity; write for example "4.7 kΩ"'),
        ("nan", None, '"nan" is not a quantity; write for example "4.7 kΩ"'),
        ("x" * 60, None, f'"{"x" * 39}…" is not a quantity; write for example "4.7 kΩ"'),
        ("a\x1b[31m", None, '"a [31m" is not a quantity; write for example "4.7 kΩ"'),
    ],
)
def test_refusals(text: str, si_unit: str | None, message: str) -> None:
    with pytest.raises(QuantityError) as caught:
        parse_quantity(text, si_unit)
    assert str(caught.value) == message


def test_decimal_comma_is_read_where_the_caller_says_so() -> None:
    assert parse_quantity("32,768 KHZ", decimal_comma=True).value == 32768.0


@pytest.mark.parametrize(
    ("value", "si_unit", "text"),
    [
        (4700.0, "Ω", "4.7 kΩ"),
        (1e-8, "F", "10 nF"),
        (1591.0, "Hz", "1.591 kHz"),
        (8e6, "Hz", "8 MHz"),
        (0.0, "Ω", "0 Ω"),
        (999.96, "Ω", "1 kΩ"),
        (-2.2e-6, "H", "-2.2 µH"),
        (0.995, "1", "0.995"),
        (-40.0, "°C", "-40 °C"),
        (4700.0, None, "4.7 k"),
        (1e-20, "F", "1e-20 F"),
        (10.0, "years", "10 years"),
        (math.inf, "Hz", "inf Hz"),
    ],
)
def test_printing(value: float, si_unit: str | None, text: str) -> None:
    assert format_quantity(value, si_unit) == text


@given(
    st.floats(min_value=1e-14, max_value=9e11),
    st.sampled_from(["Ω", "F", "H", "Hz", "V", "A", "W", "S", "s"]),
    st.integers(min_value=2, max_value=12),
)
def test_what_is_printed_reads_back_exactly(value: float, si_unit: str, digits: int) -> None:
    shown = float(f"{value:.{digits - 1}e}")
    found = parse_quantity(format_quantity(value, si_unit, digits))
    assert (found.value, found.si_unit) == (shown, si_unit)


PREFIXES = {"p": -12, "n": -9, "u": -6, "µ": -6, "μ": -6, "m": -3, "": 0, "k": 3, "K": 3, "M": 6, "мк": -6, "к": 3}
UNITS = {"Ω": "Ω", "\u2126": "Ω", "ohm": "Ω", "F": "F", "H": "H", "Hz": "Hz", "V": "V", "Ф": "F", "Гн": "H", "Ом": "Ω"}


@given(
    st.integers(min_value=1, max_value=999),
    st.integers(min_value=0, max_value=99),
    st.sampled_from(sorted(PREFIXES)),
    st.sampled_from(sorted(UNITS)),
    st.sampled_from([".", ","]),
)
def test_any_notation_reads_back(whole: int, part: int, prefix: str, unit: str, point: str) -> None:
    expected = float(f"{whole}.{part:02d}e{PREFIXES[prefix]}")
    for text in (f"{whole}{point}{part:02d}{prefix}{unit}", f"{whole}{point}{part:02d} {prefix}{unit}"):
        found = parse_quantity(text)
        assert (found.value, found.si_unit) == (expected, UNITS[unit])
    if prefix in ("p", "n", "u", "k", "M"):
        found = parse_quantity(f"{whole}{prefix}{part:02d}")
        assert (found.value, found.si_unit) == (expected, None)


@given(
    st.sampled_from(
        ["4.7kΩ", "100nF", "10uH", "8MHz", "4.7k", "100n", "50V", "5mS", "5ms", "99.5%", "30ppm", "-40°C", "470R"]
    ),
    st.lists(st.sampled_from([" ", "\u00a0", "  ", "\t"]), min_size=2, max_size=2),
)
def test_blanks_never_change_the_kind(text: str, blanks: list[str]) -> None:
    number = re.match(r"-?[\d.]+", text)
    assert number is not None
    spaced = blanks[0] + number[0] + blanks[1] + text[number.end() :]
    assert parse_quantity(spaced) == parse_quantity(text)


@given(st.text(max_size=30))
def test_any_text_is_read_or_refused(text: str) -> None:
    try:
        assert math.isfinite(parse_quantity(text).value)
    except QuantityError as refusal:
        assert "write" in str(refusal)


@pytest.mark.parametrize(
    ("text", "low", "high"),
    [
        ("±5 %", -0.05, 0.05),
        ("5%", -0.05, 0.05),
        ("%5", -0.05, 0.05),
        ("+/-1%", -0.01, 0.01),
        ("<= 5%", -0.05, 0.05),
        ("+80/-20 %", -0.2, 0.8),
        ("-20+80%", -0.2, 0.8),
        ("+80%/-20%", -0.2, 0.8),
        ("-3..+1 %", -0.03, 0.01),
        ("-3...+1 %", -0.03, 0.01),
        ("-3…+1 %", -0.03, 0.01),
        ("-3.5..+1.5 %", -0.035, 0.015),
        ("-3 to +1 %", -0.03, 0.01),
        ("-1 ppm to +2 ppm", -1e-6, 2e-6),
        ("-3,5 / +1,5 %", -0.035, 0.015),
        ("-.5/+.5 %", -0.005, 0.005),
        ("-0/+50 ppm", 0.0, 50e-6),
        ("30 ppm", -30e-6, 30e-6),
        ("20PPM", -20e-6, 20e-6),
        ("± 0,5 %", -0.005, 0.005),
        ("0", 0.0, 0.0),
        ("0 %", 0.0, 0.0),
        ("F", -0.01, 0.01),
        ("J", -0.05, 0.05),
        ("k", -0.1, 0.1),
        ("M", -0.2, 0.2),
        ("Z", -0.2, 0.8),
    ],
)
def test_tolerances(text: str, low: float, high: float) -> None:
    assert parse_tolerance(text) == (low, high)


def test_absolute_tolerances_are_divided_by_the_value() -> None:
    assert parse_tolerance("±0.25 pF", nominal=5e-12, si_unit="F") == pytest.approx((-0.05, 0.05), rel=1e-12)
    assert parse_tolerance("D", nominal=5e-12, si_unit="F") == pytest.approx((-0.1, 0.1), rel=1e-12)
    assert parse_tolerance("D", nominal=100e-12, si_unit="F") == (-0.005, 0.005)
    assert parse_tolerance("D", nominal=5.0, si_unit="Ω") == (-0.005, 0.005)


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("5", '"5" has no unit; write "5 %" or "5 ppm"'),
        ("+5%", '"+5%" names one side only; write "±5 %" or "-0/+50 ppm"'),
        ("100%", '"100%" lets the value reach zero; write a tolerance below 100 %'),
        ("±0.25 pF", '"±0.25 pF" is absolute and the value is not known; write it in %, for example "±5 %"'),
        ("tight", '"tight" is not a tolerance; write for example "±5 %", "+80/-20 %", "±0.25 pF" or "J"'),
        ("", 'the cell is empty; write a tolerance, for example "±5 %"'),
    ],
)
def test_tolerance_refusals(text: str, message: str) -> None:
    with pytest.raises(QuantityError) as caught:
        parse_tolerance(text)
    assert str(caught.value) == message


def test_absolute_tolerance_in_another_unit_is_refused() -> None:
    with pytest.raises(QuantityError) as caught:
        parse_tolerance("±0.25 pF", nominal=1e3, si_unit="Ω")
    assert str(caught.value) == '"±0.25 pF" is in F but the value is in Ω; write it in %, for example "±5 %"'


def test_frequency_limits() -> None:
    assert parse_deviation("-50 ppm", 8e6) == pytest.approx(8e6 - 400, rel=1e-12)
    assert parse_deviation("2 %", 1000.0) == pytest.approx(1020.0, rel=1e-12)
    assert parse_deviation("7.9996 MHz", 8e6) == 7999600.0


@pytest.mark.parametrize(
    ("text", "message"),
    [
        ("±50 ppm", '"±50 ppm" names two limits; write one in each cell: "-50 ppm" and "50 ppm"'),
        ("50", '"50" is not a frequency limit; write "-50 ppm", "-1 %" or "7.9996 MHz"'),
        ("-5 Hz", '"-5 Hz" is no frequency; write the limit itself, "7.9996 MHz", or "-50 ppm"'),
    ],
)
def test_frequency_limit_refusals(text: str, message: str) -> None:
    with pytest.raises(QuantityError) as caught:
        parse_deviation(text, 8e6)
    assert str(caught.value) == message


def test_fractions_need_their_unit() -> None:
    assert parse_fraction("99.5 %") == 0.995
    with pytest.raises(QuantityError) as caught:
        parse_fraction("5")
    assert str(caught.value) == '"5" has no unit; write "5 %" or "5 ppm"'


def test_a_bare_f_is_neither_femto_nor_farad():
    with pytest.raises(QuantityError) as caught:
        parse_quantity("15f", "F")
    assert str(caught.value) == (
        '"15f" may be femtofarads or farads; write "15 fF" for femtofarads, "15 F" for farads'
    )
    assert parse_quantity("15 fF", "F").value == 15e-15
    assert parse_quantity("10uf", "F").value == pytest.approx(10e-6)
