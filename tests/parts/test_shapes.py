"""Shapes against their moments and distributions in SciPy."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy import stats

from yieldosc.parts.shapes import (
    Fixed,
    Hollow,
    Measured,
    Normal,
    ShapeError,
    Split,
    Triangular,
    Uniform,
    parse_shape,
)

BOUNDED = [Uniform(), Split(), Normal(), Normal(2.0), Triangular(), Hollow(), Hollow(0.7)]
GRID = (np.arange(200_000) + 0.5) / 200_000


@pytest.mark.parametrize(
    ("shape", "reference"),
    [
        (Uniform(), stats.uniform(-1, 2)),
        (Normal(), stats.truncnorm(-3, 3, scale=1 / 3)),
        (Normal(2.0), stats.truncnorm(-2, 2, scale=1 / 2)),
        (Normal(cut=False), stats.norm(scale=1 / 3)),
        (Triangular(), stats.triang(0.5, -1, 2)),
    ],
)
def test_quantiles_agree_with_scipy(shape, reference):
    u = np.linspace(0.001, 0.999, 401)
    assert np.allclose(shape.initial(-1.0, 0.0, 1.0, u), reference.ppf(u), atol=1e-12)


def test_hollow_moments_in_closed_form():
    # flat on ±[h, 1]: variance (1 − h³)/(3 (1 − h))
    values = Hollow(0.4).initial(-1.0, 0.0, 1.0, GRID)
    assert values.var() == pytest.approx((1 - 0.4**3) / (3 * 0.6), rel=1e-6)
    assert np.abs(values).min() >= 0.4


def test_min_typ_max_puts_half_the_units_on_each_side():
    values = Split().initial(1.0, 2.0, 4.0, GRID)
    assert np.mean(values < 2.0) == pytest.approx(0.5)
    assert values[values > 2].mean() == pytest.approx(3.0, rel=1e-4)


def test_unequal_bounds_scale_each_side():
    values = Normal().initial(-0.2, 0.0, 0.8, np.array([0.0, 0.5, 1.0]))
    assert values == pytest.approx([-0.2, 0.0, 0.8])
    flat = Uniform().initial(-0.2, 0.0, 0.8, np.array([0.0, 0.5, 1.0]))
    assert flat == pytest.approx([-0.2, 0.3, 0.8])  # flat inside the tolerance, wherever the typical value lies


@pytest.mark.parametrize("shape", BOUNDED, ids=lambda s: s.text)
@given(u=st.lists(st.floats(0, 1), min_size=2, max_size=20))
def test_bounded_shapes_rise_and_stay_inside(shape, u):
    values = shape.initial(0.9, 1.0, 1.3, np.sort(np.array(u)))
    assert np.all(np.diff(values) >= -1e-15)
    assert values.min() >= 0.9 - 1e-15
    assert values.max() <= 1.3 + 1e-15


@pytest.mark.parametrize("shape", BOUNDED, ids=lambda s: s.text)
def test_ends_are_exact(shape):
    assert shape.initial(0.9, 1.0, 1.3, np.array([0.0, 1.0])) == pytest.approx([0.9, 1.3], abs=1e-15)


def test_measured_takes_every_value_equally_often():
    values, counts = np.unique(Measured((3.0, 1.0, 2.0)).initial(0, 0, 0, GRID), return_counts=True)
    assert values.tolist() == [1.0, 2.0, 3.0]
    assert np.ptp(counts) <= 1


@pytest.mark.parametrize(
    ("text", "shape"),
    [("uniform", Uniform()), ("Normal", Normal()), ("normal 2", Normal(2.0)), ("normal-open", Normal(cut=False)),
     ("triangular", Triangular()), ("hollow", Hollow()), ("hollow 0.4", Hollow(0.4)), ("fixed", Fixed()),
     ("min/typ/max", Split())],
)  # fmt: skip
def test_texts_name_shapes(text, shape):
    assert parse_shape(text) == shape


@pytest.mark.parametrize("shape", [*BOUNDED, Normal(cut=False), Normal(2.0, cut=False), Fixed()], ids=lambda s: s.text)
def test_a_shapes_own_text_names_it(shape):
    assert parse_shape(shape.text) == shape


@pytest.mark.parametrize(
    "text", ["bell", "hollow 1.4", "hollow -0.4", "normal 0", "normal -2", "normal 2 3", "uniform 3"]
)
def test_refusals(text):
    with pytest.raises(ShapeError) as caught:
        parse_shape(text)
    assert str(caught.value) == (
        f"{text!r} is no shape; write one of: uniform, normal, normal 2, normal-open, triangular, hollow, hollow 0.4, "
        "fixed, measured, min/typ/max"
    )


def test_measured_is_not_made_from_its_name_alone():
    with pytest.raises(ShapeError) as caught:
        parse_shape("measured")
    assert str(caught.value) == (
        "'measured' needs measured values: write it in the Shape of one role, and the values in the sheet Measured"
    )


@pytest.mark.parametrize(
    "reference",
    [
        (Normal(), lambda s: stats.truncnorm(-3, 3, scale=s / 3)),
        (Triangular(), lambda s: stats.triang(0.5, -s, 2 * s)),
        (Split(), lambda s: stats.uniform(-s, 2 * s)),
    ],
    ids=["normal", "triangular", "min/typ/max"],
)
def test_each_side_has_its_own_scale(reference):
    # half the units below the typical value as if the tolerance were ±0.2 on both sides, half above as if ±0.8
    shape, at = reference
    below, above = np.linspace(0.001, 0.499, 101), np.linspace(0.501, 0.999, 101)
    assert np.allclose(shape.initial(-0.2, 0.0, 0.8, below), at(0.2).ppf(below), atol=1e-12)
    assert np.allclose(shape.initial(-0.2, 0.0, 0.8, above), at(0.8).ppf(above), atol=1e-12)


@pytest.mark.parametrize(
    ("shape", "reference"),
    [(Uniform(), stats.uniform(-1, 2)), (Normal(), stats.truncnorm(-3, 3, scale=1 / 3)),
     (Normal(2.0), stats.truncnorm(-2, 2, scale=1 / 2)), (Triangular(), stats.triang(0.5, -1, 2))],
    ids=lambda s: getattr(s, "text", ""),
)  # fmt: skip
def test_moments_agree_with_scipy(shape, reference):
    values = shape.initial(-1.0, 0.0, 1.0, GRID)
    expected = reference.stats(moments="mvsk")
    found = (values.mean(), values.var(), stats.skew(values), stats.kurtosis(values))
    assert found == pytest.approx([float(e) for e in expected], abs=1e-4)  # midpoint rule with 200,000 points


def test_a_normal_that_is_cut_is_not_one_that_is_open():
    # negative control: 3 standard deviations cut or not differ by 0.27 % of the units and 1.3 % of the variance
    cut = Normal().initial(-1.0, 0.0, 1.0, GRID)
    left_open = Normal(cut=False).initial(-1.0, 0.0, 1.0, GRID)
    assert np.mean(np.abs(left_open) > 1) == pytest.approx(2 * stats.norm.sf(3), rel=0.01)
    assert cut.var() / left_open.var() < 0.99
