"""Polynomials with many digits, lowest power first: what the independent solution needs of them."""

from __future__ import annotations

from collections.abc import Sequence

import mpmath
import numpy as np

DIGITS = 80
mpf = mpmath.mpf


def value(poly: Sequence[mpf], x: object) -> object:
    total = poly[-1]
    for c in reversed(poly[:-1]):
        total = total * x + c
    return total


def slope(poly: Sequence[mpf]) -> list[mpf]:
    return [k * c for k, c in enumerate(poly)][1:] or [mpf(0)]


def times(left: Sequence[mpf], right: Sequence[mpf]) -> list[mpf]:
    out = [mpf(0)] * (len(left) + len(right) - 1)
    for i, a in enumerate(left):
        for j, b in enumerate(right):
            out[i + j] += a * b
    return out


def trim(poly: Sequence[mpf], size: mpf) -> list[mpf]:
    """Without leading coefficients that are rounding residue of an interpolation of that size."""
    out = list(poly)
    while len(out) > 1 and abs(out[-1]) <= size * mpf(10) ** (-DIGITS + 22):
        out.pop()
    return out


def all_roots(poly: Sequence[mpf], starts: Sequence[complex] = ()) -> list:
    """Every root with many digits: companion (or given) starting values, Newton, checked by the sum of all roots."""
    degree = len(poly) - 1
    if degree < 1:
        return []
    derivative = slope(poly)
    if not len(starts):
        scale = abs(poly[0] / poly[-1]) ** (mpf(1) / degree) if poly[0] != 0 else mpf(1)
        plain = [complex(c * scale**k / (poly[-1] * scale**degree)) for k, c in enumerate(poly)]
        starts = [complex(z) * float(scale) for z in np.roots(plain[::-1])]
    found = []
    for start in starts:
        z = mpmath.mpc(start)
        for _ in range(60):
            steep = value(derivative, z)
            if steep == 0:
                break
            step = value(poly, z) / steep
            z -= step
            if abs(step) <= abs(z) * mpf(10) ** -40:
                break
        found.append(z)
    total = mpmath.fsum(found)
    wanted = -poly[-2] / poly[-1]
    if abs(total - wanted) > mpf(10) ** -25 * (mpmath.fsum(abs(z) for z in found) + 1):
        found = mpmath.polyroots(list(reversed(poly)), maxsteps=400, extraprec=600)
    return list(found)
