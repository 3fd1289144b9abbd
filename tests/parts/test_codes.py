"""Letter codes and preferred numbers against published tables; each source stands beside its values."""

import pytest

from yieldosc.parts.codes import class1_code, class2_code, e_series, neighbours_e, resistor_tcr_letter, tolerance_letter


@pytest.mark.parametrize(
    ("letter", "percent"),
    # IEC 60062:2016 by way of a calculator's table (seen); H and N from memory
    [("L", 0.01), ("P", 0.02), ("W", 0.05), ("B", 0.1), ("C", 0.25), ("D", 0.5), ("F", 1), ("G", 2), ("J", 5),
     ("K", 10), ("M", 20), ("H", 3), ("N", 30)],
)  # fmt: skip
def test_resistor_tolerance_letters(letter, percent):
    assert tolerance_letter(letter).fractions(1.0) == pytest.approx((-percent / 100, percent / 100))


@pytest.mark.parametrize(
    ("letter", "capacitance_f", "expected"),
    # maker's table and an EIA list (both seen): picofarads below 10 pF, per cent above
    [("B", 5e-12, (-0.02, 0.02)), ("C", 5e-12, (-0.05, 0.05)), ("D", 5e-12, (-0.1, 0.1)), ("C", 100e-12, (-0.0025, 0.0025)),
     ("J", 1e-9, (-0.05, 0.05)), ("Z", 1e-7, (-0.2, 0.8))],
)  # fmt: skip
def test_capacitor_tolerance_letters(letter, capacitance_f, expected):
    assert tolerance_letter(letter, capacitance_f).fractions(capacitance_f) == pytest.approx(expected)


def test_a_letter_that_is_no_tolerance():
    assert tolerance_letter("X") is None
    assert tolerance_letter("Z") is None  # of capacitors only


@pytest.mark.parametrize(
    ("code", "ppm"),
    # maker's tables of EIA-198 codes (seen)
    [("C0G", 0), ("U2J", -750), ("P3K", -1500), ("S2H", -330), ("T2H", -470), ("R3L", -2200), ("U1G", -75),
     ("P2G", -150), ("B2G", -30), ("M7G", 100)],
)  # fmt: skip
def test_class_1_codes(code, ppm):
    assert class1_code(code)[0] == pytest.approx(ppm * 1e-6, abs=1e-12)


def test_class_1_limits_and_other_spellings():
    assert class1_code("C0G")[1] == pytest.approx(30e-6)  # maker's examples: C0G 0 ± 30, U2J −750 ± 120 (seen)
    assert class1_code("U2J")[1] == pytest.approx(120e-6)
    assert class1_code("np0") == class1_code("NPO") == class1_code("COG") == class1_code("C0G")
    assert class1_code("X7R") is None


@pytest.mark.parametrize(
    ("letter", "band"),
    # EIA-198 third letters by way of a distributor and an application report (seen)
    [("A", (-1.0, 1.0)), ("B", (-1.5, 1.5)), ("C", (-2.2, 2.2)), ("D", (-3.3, 3.3)), ("E", (-4.7, 4.7)),
     ("F", (-7.5, 7.5)), ("P", (-10, 10)), ("R", (-15, 15)), ("S", (-22, 22)), ("T", (-33, 22)), ("U", (-56, 22)),
     ("V", (-82, 22))],
)  # fmt: skip
def test_class_2_codes(letter, band):
    found = class2_code(f"X7{letter}")
    assert (found.change_low * 100, found.change_high * 100) == pytest.approx(band)
    assert (found.low_c, found.high_c) == (-55, 125)


def test_class_2_temperatures():
    assert (class2_code("Y5V").low_c, class2_code("Y5V").high_c) == (-30, 85)
    assert (class2_code("Z5U").low_c, class2_code("X8R").high_c) == (10, 150)
    assert class2_code("C0G") is None


def test_preferred_numbers_up_to_e24():
    # IEC 60063 by way of an encyclopedia (seen): sum 90.1 and the eight values that are not rounded powers
    values = e_series(24)
    assert sum(values) == pytest.approx(90.1)
    odd = {v for i, v in enumerate(values) if v != round(10 ** (i / 24), 1)}
    assert odd == {2.7, 3.0, 3.3, 3.6, 3.9, 4.3, 4.7, 8.2}
    assert e_series(12) == values[::2]
    assert e_series(3) == (1.0, 2.2, 4.7)


@pytest.mark.parametrize(("count", "total"), [(48, 183.13), (96, 370.70), (192, 745.99)])
def test_finer_preferred_numbers(count, total):
    # IEC 60063: sums of E48 and E96 from a mirror of an encyclopedia (seen); E192 from the list as remembered
    assert sum(e_series(count)) == pytest.approx(total, abs=1e-9)


def test_the_one_exception_of_e192():
    assert e_series(192)[185] == 9.20


def test_a_series_that_does_not_exist():
    with pytest.raises(ValueError) as caught:
        e_series(20)
    assert str(caught.value) == "E20 is not a series of preferred numbers; use E3, E6, E12, E24, E48, E96 or E192"


@pytest.mark.parametrize(
    ("value", "count", "expected"), [(4700.0, 12, (3900.0, 5600.0)), (1e-8, 6, (6.8e-9, 1.5e-8)), (0.5, 24, (0.47, 0.51))]
)
def test_neighbours(value, count, expected):
    assert neighbours_e(value, count) == pytest.approx(expected)


def test_temperature_coefficient_letters():
    assert resistor_tcr_letter("R") == pytest.approx(100e-6)  # IEC 60062, from memory
    assert resistor_tcr_letter("X") is None
