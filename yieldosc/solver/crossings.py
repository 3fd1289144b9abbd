"""Where a pole pair crosses the jω axis as the gain rises, and at which gain.

With P(jω) = Pe(x) + jω Po(x), x = ω²:  F(x) = Ao Be − Ae Bo = 0,  g_c = −(Ae Be + x Ao Bo)/(Be² + x Bo²).
A pair enters the right half plane (for rising |g|) where sign(g) F'(x) < 0: differentiate D(s(g), g) = 0 at s = jω.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.solver.polynomials import (
    ComplexArray,
    Number,
    Poly,
    difference,
    even_odd,
    product,
    roots,
    value,
    value_and_slope,
)

Array = NDArray[np.float64]
REAL_ROOT = 1e-7  # relative imaginary part below which a computed root of F is tried as a real one


@dataclass(frozen=True, slots=True)
class Split:
    """Even and odd parts of A and B of n units."""

    ae: list[Array]
    ao: list[Array]
    be: list[Array]
    bo: list[Array]

    @classmethod
    def of(cls, a: Poly, b: Poly) -> Split:
        return cls(*even_odd(a), *even_odd(b))

    def condition(self, x: Array) -> tuple[Array, Array]:
        """F(x) and F'(x)."""
        ae, dae = value_and_slope(self.ae, x)
        ao, dao = value_and_slope(self.ao, x)
        be, dbe = value_and_slope(self.be, x)
        bo, dbo = value_and_slope(self.bo, x)
        return ao * be - ae * bo, dao * be + ao * dbe - dae * bo - ae * dbo

    def gain(self, x: Number) -> Number:
        """g_c at x; also for complex x, where it is the gain that puts a pole at √−x."""
        ae, ao, be, bo = (value(p, x) for p in (self.ae, self.ao, self.be, self.bo))
        with np.errstate(divide="ignore", invalid="ignore"):
            total: Number = -(ae * be + x * ao * bo) / (be * be + x * bo * bo)
        return total

    def take(self, rows: NDArray[np.intp]) -> Split:
        """The same for some of the units."""
        return Split(*([c[rows] for c in part] for part in (self.ae, self.ao, self.be, self.bo)))

    def polynomial(self) -> list[Array]:
        """Coefficients of F(x)."""
        return difference(product(self.ao, self.be), product(self.ae, self.bo))

    def all_roots(self) -> ComplexArray:
        """Every root of F (n, degree), complex ones included, nan where there is none."""
        poly = self.polynomial()
        while len(poly) > 1 and not np.any(poly[-1]):
            poly.pop()
        return roots(poly)


def real_roots(split: Split, found: ComplexArray) -> tuple[Array, Array]:
    """Positive real roots x of F among `found` (n, c), polished, and F' there; nan where a root is not one."""
    with np.errstate(invalid="ignore"):
        candidate = (found.real > 0) & (np.abs(found.imag) <= REAL_ROOT * np.abs(found))
    x = np.where(candidate, found.real, np.nan)
    slope = np.full(x.shape, np.nan)
    for k in range(x.shape[1]):
        rows = np.flatnonzero(candidate[:, k])
        if rows.size:
            polished, good, steep = newton(split.take(rows), x[rows, k])
            near = good & (np.abs(polished - x[rows, k]) <= 1e-5 * x[rows, k])
            x[rows, k] = np.where(near, polished, np.nan)
            slope[rows, k] = steep
    return x, slope


TO_ROUNDING = 1e-9  # quadratic convergence: a relative step this small leaves an error far below rounding


def newton(
    split: Split, x: Array, *, steps: int = 12, settle: float = TO_ROUNDING, known: Sequence[Array] = ()
) -> tuple[Array, NDArray[np.bool_], Array]:
    """Root of F near x (n,): the root, whether it converged (last relative step below `settle`), and F' there.

    Roots `known` already are divided out (Maehly 1954), so that a rough start is not led to one of them again.
    A settled unit stands still while others move on, so that its digits do not depend on the rest of its block.
    """
    settled = np.zeros(np.shape(x), dtype=bool)
    slope = np.full(np.shape(x), np.nan)
    with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
        for _ in range(steps):
            f, steep = split.condition(x)
            pull = steep
            for other in known:
                pull = pull - f / (x - other)
            step = np.where(settled, 0.0, f / pull)
            slope = np.where(settled, slope, steep)
            x = x - step
            settled = settled | (np.abs(step) <= settle * np.abs(x))
            if settled.all():
                break
        good = settled & np.isfinite(x) & (x > 0)
    return x, good, slope


@dataclass(frozen=True, slots=True)
class Crossings:
    """All crossings with the sign of g, per unit, ordered by |g_c| rising; padded with nan, direction 0.

    omega (n, c) is 0 for a real pole through the origin and inf for one through infinity; direction +1 enters.
    poles: how many roots move, 2 for a pair and 1 for a real one.
    """

    omega: Array
    gain: Array
    direction: NDArray[np.int64]
    poles: NDArray[np.int64]


def real_crossings(a: Poly, b: Poly, sign: Array) -> tuple[Array, Array, NDArray[np.int64]]:
    """(omega, gain, direction) (n, 2) of real poles through 0 and infinity; gain nan where there is none.

    At s = 0: ds/dg = −b0/(a1 + g b1); at infinity the same for 1/s with the coefficients reversed.
    """
    top = max(len(a), len(b), 2)
    zero = np.zeros_like(a[0])
    low_a, low_b = ([poly[k] if k < len(poly) else zero for k in range(top)] for poly in (a, b))
    ends = []
    for pa, pb, omega in ((low_a, low_b, 0.0), (low_a[::-1], low_b[::-1], np.inf)):
        # the usual case: this end coefficient never changes its sign
        if not np.any((np.sign(pa[0]) * np.sign(pb[0])) * sign < 0):
            ends.append((np.full_like(zero, omega), np.full_like(zero, np.nan), np.zeros(len(zero), dtype=np.int64)))
            continue
        with np.errstate(divide="ignore", invalid="ignore"):
            gain = np.where((pb[0] != 0) & (pa[0] != 0), -pa[0] / np.where(pb[0] != 0, pb[0], 1.0), np.nan)
            gain = np.where(gain * sign > 0, gain, np.nan)
            speed = -pb[0] / (pa[1] + gain * pb[1])
            direction = np.where(np.isfinite(gain), np.where(sign * speed > 0, 1, -1), 0)
        ends.append((np.full_like(gain, omega), gain, direction.astype(np.int64)))
    stacked_omega = np.stack([e[0] for e in ends], axis=1)
    stacked_gain = np.stack([e[1] for e in ends], axis=1)
    return stacked_omega, stacked_gain, np.stack([e[2] for e in ends], axis=1)


def all_crossings(a: Poly, b: Poly, sign: Array) -> tuple[Crossings, ComplexArray]:
    """Every crossing of every unit from all roots of F, and those roots (for units without a crossing)."""
    split = Split.of(a, b)
    found = split.all_roots()
    x, slope = real_roots(split, found)
    gain = np.stack([split.gain(column) for column in x.T], axis=1) if x.size else x
    with np.errstate(invalid="ignore"):
        wanted = np.isfinite(x) & np.isfinite(gain) & (gain * sign[:, None] > 0)
        enters = np.where(sign[:, None] * slope < 0, 1, -1)
    omega = np.where(wanted, np.sqrt(x), np.nan)
    real_omega, real_gain, real_direction = real_crossings(a, b, sign)
    return (
        ordered(
            np.concatenate([omega, np.where(np.isfinite(real_gain), real_omega, np.nan)], axis=1),
            np.concatenate([np.where(wanted, gain, np.nan), real_gain], axis=1),
            np.concatenate([np.where(wanted, enters, 0), real_direction], axis=1),
            np.concatenate([np.where(wanted, 2, 0), np.abs(real_direction)], axis=1),
        ),
        found,
    )


def ordered(
    omega: Array, gain: Array, direction: NDArray[np.int64], poles: NDArray[np.int64]
) -> Crossings:
    """Crossings (n, c) sorted by |g_c|, nan last."""
    order = np.argsort(np.where(np.isnan(gain), np.inf, np.abs(gain)), axis=1, kind="stable")
    return Crossings(
        np.take_along_axis(omega, order, axis=1),
        np.take_along_axis(gain, order, axis=1),
        np.take_along_axis(direction, order, axis=1),
        np.take_along_axis(poles, order, axis=1),
    )
