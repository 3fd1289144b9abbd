"""A second solution of a linear oscillator that shares no code with the package.

The circuit is a list of elements. Its modified nodal equations (node voltages, coil and arm currents, arm voltages,
amplifier currents; Ho, Ruehli & Brennan 1975) are a descriptor pencil E ẋ = A x. Its determinant, interpolated with
80 digits, gives D(s) = A(s) + g B(s) as numbers; its poles come from scipy's generalised eigenvalues and are polished
on that polynomial. Nothing is expanded, no tree is counted, no admittance is multiplied out.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace

import mpmath
import numpy as np
import scipy.linalg

from tests.many_digits import DIGITS, all_roots, slope, times, trim, value

mpf = mpmath.mpf
GROUND = "gnd"
POINTS = (0, 1, -1, 2, -2, 3, -3, 4, -4, 5, -5, 6, -6, 7, -7, 8, -8, 9, -9)


@dataclass(frozen=True)
class Element:
    """kind, nodes, values: R (ohm), G (siemens), C, L (henry, series ohm), arm (Lm, Cm, Rm), pair (L1, L2, k, r1, r2),
    gm (siemens; from, to, control+, control−), opamp (tau; out, +, −), gain (K, tau; out, +, −).
    `gain` marks the element whose first value is the unknown of the start-up question."""

    kind: str
    nodes: tuple[str, ...]
    values: tuple[float, ...]
    gain: bool = False


def from_branches(branches: Sequence, symbols: Mapping[str, float], gain_symbol: str) -> list[Element]:
    """Elements of a branch table with the symbol values of one unit."""
    kinds = {"crystal": "arm", "coupled": "pair", "transconductance": "gm", "conductance": "G"}
    out = []
    for row in branches:
        values = tuple(float(symbols[name]) for name in row.symbols)
        if row.kind in ("L", "opamp") and len(values) < (2 if row.kind == "L" else 1):
            values = (*values, 0.0)
        if row.kind == "coupled" and len(values) == 3:
            values = (*values, 0.0, 0.0)
        if row.kind == "gain" and len(values) == 1:
            values = (*values, 0.0)
        out.append(Element(kinds.get(row.kind, row.kind), row.nodes, values, gain_symbol in row.symbols))
    return out


# -- scaling: ohms by r0, seconds by 1/w0 ---------------------------------------------------------------------------

SI = {
    "R": ((1, 0),),
    "G": ((-1, 0),),
    "C": ((-1, 1),),
    "L": ((1, 1), (1, 0)),
    "arm": ((1, 1), (-1, 1), (1, 0)),
    "pair": ((1, 1), (1, 1), (0, 0), (1, 0), (1, 0)),
    "gm": ((-1, 0),),
    "opamp": ((0, 1),),
    "gain": ((0, 0), (0, 1)),
}


def _scaled(elements: Sequence[Element], w0: float, r0: float) -> list[Element]:
    """Values in units of r0 and 1/w0, as 80-digit numbers."""
    out = []
    for e in elements:
        values = tuple(
            mpf(v) * mpf(r0) ** -ohms * mpf(w0) ** seconds
            for v, (ohms, seconds) in zip(e.values, SI[e.kind], strict=True)
        )
        out.append(replace(e, values=values))
    return out


def _gain_unit(elements: Sequence[Element], w0: float, r0: float) -> mpf:
    (kind,) = {e.kind for e in elements if e.gain}
    ohms, seconds = SI[kind][0]
    return mpf(r0) ** -ohms * mpf(w0) ** seconds


# -- the pencil -----------------------------------------------------------------------------------------------------


class _Pencil:
    """Rows of F x + s E x = 0; entries are plain numbers of any kind."""

    def __init__(self, elements: Sequence[Element]) -> None:
        names = [n for e in elements for n in e.nodes if n != GROUND]
        self.index = {n: i for i, n in enumerate(dict.fromkeys(names))}
        extra = {"L": 1, "arm": 2, "pair": 2, "opamp": 1, "gain": 1}
        size = len(self.index) + sum(1 if e.kind == "R" and e.gain else extra.get(e.kind, 0) for e in elements)
        self.f = [[0] * size for _ in range(size)]
        self.e = [[0] * size for _ in range(size)]
        self.next = len(self.index)
        for element in elements:
            getattr(self, "_" + element.kind)(element)

    def _add(self, table: list, row: str | int, column: str | int, value: object) -> None:
        i = row if isinstance(row, int) else self.index.get(row)
        j = column if isinstance(column, int) else self.index.get(column)
        if i is not None and j is not None:
            table[i][j] = table[i][j] + value

    def _admittance(self, table: list, a: str, b: str, y: object) -> None:
        for row, sign in ((a, 1), (b, -1)):
            self._add(table, row, a, sign * y)
            self._add(table, row, b, -sign * y)

    def _current(self, a: str, b: str) -> int:
        """A new current unknown that leaves a and enters b."""
        k = self.next
        self.next += 1
        self._add(self.f, a, k, 1)
        self._add(self.f, b, k, -1)
        return k

    def _across(self, row: int, a: str, b: str, sign: int = 1) -> None:
        self._add(self.f, row, a, sign)
        self._add(self.f, row, b, -sign)

    def _R(self, x: Element) -> None:  # noqa: N802 -- named after the element's kind
        a, b = x.nodes
        if not x.gain:
            self._admittance(self.f, a, b, 1 / x.values[0])
            return
        k = self._current(a, b)  # v_a − v_b = R i: linear in R
        self._across(k, a, b)
        self._add(self.f, k, k, -x.values[0])

    def _G(self, x: Element) -> None:  # noqa: N802
        self._admittance(self.f, *x.nodes, x.values[0])

    def _C(self, x: Element) -> None:  # noqa: N802
        self._admittance(self.e, *x.nodes, x.values[0])

    def _L(self, x: Element) -> None:  # noqa: N802
        a, b = x.nodes
        k = self._current(a, b)
        self._across(k, a, b)
        self._add(self.f, k, k, -x.values[1])
        self._add(self.e, k, k, -x.values[0])

    def _arm(self, x: Element) -> None:
        a, b = x.nodes
        inductance, capacitance, resistance = x.values
        k = self._current(a, b)
        v = self.next
        self.next += 1
        self._across(k, a, b)
        self._add(self.f, k, k, -resistance)
        self._add(self.e, k, k, -inductance)
        self._add(self.f, k, v, -1)
        self._add(self.f, v, k, 1)
        self._add(self.e, v, v, -capacitance)

    def _pair(self, x: Element) -> None:
        a, b, c, d = x.nodes
        first, second, k, r1, r2 = x.values
        mutual = k * (first * second) ** 0.5
        one, two = self._current(a, b), self._current(c, d)
        self._across(one, a, b)
        self._across(two, c, d)
        for row, own, r, other in ((one, first, r1, two), (two, second, r2, one)):
            self._add(self.f, row, row, -r)
            self._add(self.e, row, row, -own)
            self._add(self.e, row, other, -mutual)

    def _gm(self, x: Element) -> None:
        a, b, plus, minus = x.nodes
        for row, sign in ((a, 1), (b, -1)):
            self._add(self.f, row, plus, sign * x.values[0])
            self._add(self.f, row, minus, -sign * x.values[0])

    def _opamp(self, x: Element) -> None:
        out, plus, minus = x.nodes
        k = self._current(out, GROUND)
        self._across(k, plus, minus, -1)
        self._add(self.e, k, out, x.values[0])

    def _gain(self, x: Element) -> None:
        out, plus, minus = x.nodes
        k = self._current(out, GROUND)
        self._add(self.f, k, out, 1)
        self._add(self.e, k, out, x.values[1])
        self._add(self.f, k, plus, -x.values[0])
        self._add(self.f, k, minus, x.values[0])


def _with_gain(elements: Sequence[Element], g: object) -> list[Element]:
    return [replace(e, values=(g, *e.values[1:])) if e.gain else e for e in elements]


def _determinant(rows: list[list[mpf]]) -> mpf:
    """Gaussian elimination with partial pivoting."""
    m = [list(row) for row in rows]
    size, total = len(m), mpf(1)
    for k in range(size):
        pivot = max(range(k, size), key=lambda i: abs(m[i][k]))
        if m[pivot][k] == 0:
            return mpf(0)
        if pivot != k:
            m[k], m[pivot] = m[pivot], m[k]
            total = -total
        total *= m[k][k]
        for i in range(k + 1, size):
            if m[i][k] != 0:
                factor = m[i][k] / m[k][k]
                m[i] = m[i][: k + 1] + [
                    x - factor * y if y != 0 else x for x, y in zip(m[i][k + 1 :], m[k][k + 1 :], strict=True)
                ]
    return total


def _coefficients(pencil: _Pencil) -> list[mpf]:
    """det(F + sE), lowest power first, by Newton's divided differences at small whole numbers."""
    reactive = [any(x != 0 for x in row) for row in pencil.e]
    points = [mpf(p) for p in POINTS[: sum(reactive) + 1]]
    values = []
    for s in points:
        rows = [[f + s * e for f, e in zip(fr, er, strict=True)] for fr, er in zip(pencil.f, pencil.e, strict=True)]
        values.append(_determinant([[mpf(x) for x in row] for row in rows]))
    table = list(values)
    for order in range(1, len(points)):
        for i in range(len(points) - 1, order - 1, -1):
            table[i] = (table[i] - table[i - 1]) / (points[i] - points[i - order])
    poly = [table[-1]]
    for i in range(len(points) - 2, -1, -1):  # poly · (s − p_i) + table_i
        shifted = [mpf(0), *poly]
        poly = [shifted[k] - points[i] * (poly[k] if k < len(poly) else 0) for k in range(len(shifted))]
        poly[0] += table[i]
    return poly


@dataclass(frozen=True)
class Crossing:
    omega: mpf
    gain: mpf
    enters: bool


class Unit:
    """One unit, solved: w0 [rad/s] and r0 [Ω] only scale the arithmetic."""

    def __init__(self, elements: Sequence[Element], *, w0: float, r0: float = 1e3) -> None:
        with mpmath.workdps(DIGITS):
            self.w0 = mpf(w0)
            self.elements = _scaled(elements, w0, r0)
            (self.g,) = (e.values[0] for e in self.elements if e.gain)
            self.gain_unit = _gain_unit(elements, w0, r0)
            a = _coefficients(_Pencil(_with_gain(self.elements, mpf(0))))
            both = _coefficients(_Pencil(_with_gain(self.elements, mpf(1))))
            size = max(map(abs, [*a, *both]))
            floor = size * mpf(10) ** (-DIGITS + 22)
            clean = [
                [c if abs(c) > floor else mpf(0) for c in p] for p in (a, [y - x for x, y in zip(a, both, strict=True)])
            ]
            lowest = next(k for k, pair in enumerate(zip(*clean, strict=True)) if any(pair))
            self.a, self.b = (trim(p[lowest:], mpf(0)) for p in clean)
            self.crossings, self.x_roots = self._crossings()
            self.matrices: tuple[np.ndarray, np.ndarray, np.ndarray] | None = None

    # D(s) at a gain in the elements' own SI unit
    def polynomial(self, gain: object = None) -> list[mpf]:
        g = self.g if gain is None else mpf(gain) * self.gain_unit
        size = max(len(self.a), len(self.b))
        total = [(self.a[k] if k < len(self.a) else 0) + g * (self.b[k] if k < len(self.b) else 0) for k in range(size)]
        return trim(total, mpf(0))

    def _crossings(self) -> tuple[list[Crossing], list]:
        def split(p: Sequence[mpf]) -> tuple[list[mpf], list[mpf]]:
            even = [c * (-1) ** (k // 2) for k, c in enumerate(p) if k % 2 == 0]
            odd = [c * (-1) ** (k // 2) for k, c in enumerate(p) if k % 2 == 1]
            return even, odd or [mpf(0)]

        (ae, ao), (be, bo) = split(self.a), split(self.b)
        one, two = times(ao, be), times(ae, bo)
        size = max(len(one), len(two))
        f = [(one[k] if k < len(one) else mpf(0)) - (two[k] if k < len(two) else mpf(0)) for k in range(size)]
        f = trim(f, max(map(abs, [*one, *two])))
        lowest = next((k for k, c in enumerate(f) if c != 0), 0)
        roots = all_roots(f[lowest:])
        out = []
        for x in roots:
            if abs(x.imag) < abs(x) * mpf(10) ** -30 and x.real > 0:
                w = mpmath.sqrt(x.real)
                g = self._gain_at(1j * w)
                if g.real * self.g > 0:
                    out.append(Crossing(w * self.w0, g.real / self.gain_unit, self._enters(w, g.real)))
        return sorted(out, key=lambda c: abs(c.gain)), roots

    def _gain_at(self, s: object) -> object:
        return -value(self.a, s) / value(self.b, s)

    def _enters(self, w: mpf, g: mpf) -> bool:
        """ds/d|g| at the crossing, from the polynomial itself."""
        s = mpmath.mpc(0, w)
        d = [
            (self.a[k] if k < len(self.a) else 0) + g * (self.b[k] if k < len(self.b) else 0)
            for k in range(max(len(self.a), len(self.b)))
        ]
        speed = -value(self.b, s) / value(slope(d), s)
        return bool((speed * mpmath.sign(g)).real > 0)

    # -- poles ------------------------------------------------------------------------------------------------------

    def _matrices(self) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
        """F without the gain, F's part in the gain, E: double precision."""
        none, one = (_Pencil(_with_gain(self.elements, mpf(g))) for g in (0, 1))
        f, both, e = (np.array([[float(x) for x in row] for row in table]) for table in (none.f, one.f, none.e))
        return f, both - f, e

    def eigenvalues(self, gain: object = None) -> np.ndarray:
        """Generalised eigenvalues of the pencil in double precision, in units of w0, infinite ones left out."""
        g = float(self.g if gain is None else mpf(gain) * self.gain_unit)
        if self.matrices is None:
            self.matrices = self._matrices()
        f, part, e = self.matrices
        f = f + g * part
        values = scipy.linalg.eig(-f, e, right=False, homogeneous_eigvals=True)
        keep = np.abs(values[1]) > 1e-13 * np.abs(values[0])
        return values[0][keep] / values[1][keep]

    def poles(self, gain: object = None) -> list:
        """Every pole [1/s] with many digits."""
        with mpmath.workdps(DIGITS):
            poly = self.polynomial(gain)
            found = self.eigenvalues(gain)
            nonzero = found[np.abs(found) > 1e-12]
            starts = nonzero if len(nonzero) == len(poly) - 1 else ()
            return [z * self.w0 for z in all_roots(poly, starts)]

    def growing(self, gain: object = None) -> list:
        """Poles in the right half plane [1/s]."""
        return [p for p in self.poles(gain) if p.real > 0]

    def follow(self, crossing: Crossing, gain: float, *, steps: int = 120) -> complex:
        """The root that stands at jω at the crossing's gain, at another gain: small steps of the pencil's eigenvalues,
        each matched to the prediction from the last two; then polished with many digits. [1/s]"""
        ends = np.log(abs(float(crossing.gain))), np.log(abs(gain))
        sign = 1.0 if crossing.gain > 0 else -1.0
        last = before = 1j * complex(crossing.omega / self.w0)
        for at in np.linspace(*ends, steps)[1:]:
            found = self.eigenvalues(sign * np.exp(at))
            guess = last + (last - before)
            before, last = last, complex(found[np.argmin(np.abs(found - guess))])
        with mpmath.workdps(DIGITS):
            return complex(min(self.poles(gain), key=lambda p: abs(complex(p) - last * float(self.w0))))
