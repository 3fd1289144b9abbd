"""The linear network around a limiter, derived from the circuit's own branch table.

The gain element becomes a source that the limiter drives: D = A + K B gives H = −K B/A from the limiter's output to
its input (gain included, both as pure numbers of the same scale). Watching another pair of nodes instead of the
control nodes gives the transfer to the circuit's output from the same rows.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from functools import lru_cache

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch, Circuit, Derived
from yieldosc.circuits.network import GROUND, Network, network
from yieldosc.solver.polynomials import value, value_and_slope
from yieldosc.solver.scaled import Scale, scaled

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
Symbols = Mapping[str, Array]
GAIN, LAG = "limited gain", "limited gain lag"  # blanks keep them apart from every role and stage symbol


class NoLimiterError(ValueError):
    """The gain element of this circuit has no model of the limiter that was asked for; the text says why."""


@dataclass(frozen=True)
class LimitedLoop:
    """`loop` sees the limiter's input, `output` the circuit's output; both are driven by the limiter.

    voltage: the limiter bounds a voltage (op-amp or gain row), else a current.
    """

    loop: Network
    output: Network
    extended: Callable[[Symbols], dict[str, Array]]  # the circuit's symbols with those of the changed rows
    voltage: bool


@dataclass(frozen=True)
class Response:
    """H = b/a and the output's transfer out_b/out_a of n units: polynomials in scaled s, lowest power first."""

    a: list[Array]
    b: list[Array]
    out_a: list[Array]
    out_b: list[Array]

    def take(self, rows: NDArray[np.intp]) -> Response:
        """The same for some of the units."""
        return Response(*([c[rows] for c in part] for part in (self.a, self.b, self.out_a, self.out_b)))

    def normalised(self, omega: Array) -> Response:
        """The same in the variable s/omega, each unit by its own omega (n,): shifts keep all their digits."""
        return Response(
            *([c * omega**k for k, c in enumerate(part)] for part in (self.a, self.b, self.out_a, self.out_b))
        )

    def with_gain(self, factor: Array) -> Response:
        """The same with the loop gain times factor (n,)."""
        return Response(self.a, [c * factor for c in self.b], self.out_a, self.out_b)

    def at(self, s: ComplexArray) -> ComplexArray:
        """H at s (n, k)."""
        return np.asarray(value(_columns(self.b), s) / value(_columns(self.a), s))

    def parts_at(self, s: ComplexArray) -> tuple[ComplexArray, ComplexArray, ComplexArray, ComplexArray]:
        """Denominator, its slope, numerator, its slope at s (n, k)."""
        return (*value_and_slope(_columns(self.a), s), *value_and_slope(_columns(self.b), s))

    def output_at(self, s: ComplexArray) -> ComplexArray:
        """Transfer from the limiter's output to the circuit's output at s (n, k)."""
        return np.asarray(value(_columns(self.out_b), s) / value(_columns(self.out_a), s))


def limited_loop(circuit: Circuit) -> LimitedLoop:
    """The loop of a circuit; NoLimiterError where its gain element is no source that could be limited."""
    return _limited(circuit.branches, circuit.gain_symbol)


@lru_cache(maxsize=64)
def _limited(branches: tuple[Branch, ...], gain_symbol: str) -> LimitedLoop:
    element = next(row for row in branches if row.gain_element)
    if element.kind == "R":
        rows, source, extended = _clipping_opamp(branches, element)
        gain, voltage = GAIN, True
    else:
        rows, source, gain = branches, element, gain_symbol
        extended, voltage = dict, element.kind == "gain"
    watched = (source.nodes[0], GROUND) if voltage else source.nodes[:2]
    probe = replace(source, nodes=(*source.nodes[: 1 if voltage else 2], *watched))
    seen = tuple(probe if row is source else row for row in rows)
    return LimitedLoop(network(rows, gain), network(seen, gain), extended, voltage)


def _clipping_opamp(
    branches: tuple[Branch, ...], feedback: Branch
) -> tuple[tuple[Branch, ...], Branch, Callable[[Symbols], dict[str, Array]]]:
    """(s τ) v_q = v_p − v_m with RF q–m and one resistor from m becomes v_q (1 + s N τ) = K v_in; both resistors stay.

    They then load the network as they do while the output is clipped and m is no virtual ground.
    """
    amplifier, other, far = _feedback_pair(branches, feedback)
    inverting = far != GROUND
    names = (GAIN, LAG) if amplifier.symbols else (GAIN,)
    control = (GROUND, far) if inverting else (amplifier.nodes[1], GROUND)
    source = Branch(amplifier.name, "gain", (amplifier.nodes[0], *control), names, True)
    rows = tuple(
        source if row is amplifier else replace(row, gain_element=False) if row is feedback else row for row in branches
    )
    rf, rest, tau = feedback.symbols[0], other.symbols[0], amplifier.symbols[:1]

    def extended(symbols: Symbols) -> dict[str, Array]:
        ratio = symbols[rf] / symbols[rest]
        lag = {LAG: (1 + ratio) * symbols[tau[0]]} if tau else {}
        return {**symbols, GAIN: ratio if inverting else 1 + ratio, **lag}

    return rows, source, extended


def _feedback_pair(branches: tuple[Branch, ...], feedback: Branch) -> tuple[Branch, Branch, str]:
    """The op-amp whose output and inverting input RF joins, the other resistor at that input, and its far node."""
    for row in branches:
        if row.kind != "opamp" or {row.nodes[0], row.nodes[2]} != set(feedback.nodes):
            continue
        minus = row.nodes[2]
        others = [r for r in branches if minus in r.nodes and r is not row and r is not feedback]
        if len(others) == 1 and others[0].kind == "R":
            far = next(node for node in others[0].nodes if node != minus)
            if GROUND in (far, row.nodes[1]):
                return row, others[0], far
    raise NoLimiterError(
        "clipping is modelled for an op-amp whose inverting input carries the feedback resistor and one other resistor"
    )


def response(loop: LimitedLoop, symbols: Symbols, scale: Scale, n: int) -> Response:
    """H and the output's transfer of n units."""
    whole = Derived(loop.extended(symbols))
    near, far = (scaled(net, scale, whole, n) for net in (loop.loop, loop.output))
    return Response(
        a=near.a,
        b=[-near.g * c for c in near.b],
        out_a=far.a,
        out_b=[-c for c in far.b],
    )


def _columns(poly: list[Array]) -> list[Array]:
    return [c[:, None] for c in poly]
