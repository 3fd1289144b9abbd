"""From role values to loops that are ready to be balanced: the limiter's network, excess gain, rails and scale."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit
from yieldosc.circuits.stages import thermal_voltage_v
from yieldosc.settle.crossing import first_harmonic
from yieldosc.settle.limiter import LIMITERS, Limiter
from yieldosc.settle.transfer import GAIN, LimitedLoop, Response, limited_loop, response
from yieldosc.solver.scaled import Scale
from yieldosc.solver.solution import Solution, Status

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
Values = Mapping[str, Array]


@dataclass(frozen=True)
class Prepared:
    """m live units (of n): their loops, normalised to the zero-phase frequency of each.

    even: even harmonics arise; voltage: the limiter bounds a voltage, else a current; rows (m,): which units; first_hz:
    zero-phase frequency of the limited loop; excess: loop gain there; skew: of the rails; in_v, out_v: volts at the
    limiter's input and at the output per unit of x and of the output transfer (nan where the scale is not known).
    lost: units that grow although the limited loop has no zero-phase frequency with a gain above 1; not among `rows`.
    """

    limiter: Limiter
    even: bool
    voltage: bool
    rows: NDArray[np.intp]
    network: Response
    first_hz: Array
    excess: Array
    skew: Array
    in_v: Array
    out_v: Array
    lost: NDArray[np.intp]

    def take(self, at: NDArray[np.intp]) -> Prepared:
        """Some of the live units."""
        return Prepared(
            self.limiter,
            self.even,
            self.voltage,
            self.rows[at],
            self.network.take(at),
            self.first_hz[at],
            self.excess[at],
            self.skew[at],
            self.in_v[at],
            self.out_v[at],
            self.lost,
        )


def prepare(
    circuit: Circuit,
    values: Values,
    temperature_c: float,
    solution: Solution,
    *,
    limiter: str,
    own_law: frozenset[str] = frozenset(),
    growing_only: bool = True,
) -> Prepared:
    """Units that settle somewhere other than at their crossing: those that grow, and under `agc` only those whose level
    control is at its stop, with the gain that is left there. NoLimiterError where the circuit has no such limiter.

    growing_only = False takes every unit whose loop has a zero-phase frequency, whatever its gain there.
    """
    loop = limited_loop(circuit)
    n = len(solution.frequency_hz)
    model = LIMITERS["clip" if limiter == "agc" else limiter]
    rows = np.flatnonzero(_live(solution, limiter, growing_only=growing_only))
    derived = circuit.derive(values, temperature_c, own_law).symbols
    symbols = _as_limited(circuit, {k: _full(v, n) for k, v in derived.items()}, limiter, solution)
    symbols = {k: v[rows] for k, v in symbols.items()}
    scale = _scale(loop, symbols, solution.frequency_hz[rows])
    network = response(loop, symbols, scale, len(rows))
    first = first_harmonic(network, solution.frequency_hz[rows] * (2 * np.pi / scale.omega))
    found = first.excess > (1 if growing_only else 0)  # nan where there is no zero-phase frequency
    at, omega, gain = rows[found], first.omega[found], _input_gain(loop, circuit, symbols)[found]
    skew, volts, even = _levels(circuit, loop, model, values, temperature_c, n)
    return Prepared(
        limiter=model,
        even=even or not model.odd,
        voltage=loop.voltage,
        rows=at,
        network=network.take(np.flatnonzero(found)).normalised(omega),
        first_hz=omega * scale.omega / (2 * np.pi),
        excess=first.excess[found],
        skew=skew[at],
        in_v=volts[at] / (gain if loop.voltage else 1.0),
        out_v=volts[at] * (1.0 if loop.voltage else gain * scale.ohm),
        lost=rows[~found],
    )


def _scale(loop: LimitedLoop, symbols: Mapping[str, Array], crossing_hz: Array) -> Scale:
    if not crossing_hz.size:
        return Scale(1.0, 1.0)
    return Scale.of(float(np.median(crossing_hz)), symbols, loop.loop.dimensions)


def _live(solution: Solution, limiter: str, *, growing_only: bool) -> Mask:
    live = np.isfinite(solution.frequency_hz) & (solution.status != Status.NO_BIAS)
    if limiter == "agc":
        live &= _at_stop(solution)
    with np.errstate(invalid="ignore"):
        return np.asarray(live & ((solution.startup_margin > 1) | (not growing_only)))


def level_is_held(limiter: str, solution: Solution) -> bool:
    """A level control that is at its stop in no unit: nothing limits, nothing shifts."""
    return limiter == "agc" and not _at_stop(solution).any()


def _at_stop(solution: Solution) -> Mask:
    if solution.control_reach is None:
        return np.zeros(len(solution.frequency_hz), dtype=bool)
    with np.errstate(invalid="ignore"):
        return np.asarray(solution.control_reach < 1)


def _as_limited(
    circuit: Circuit, symbols: dict[str, Array], limiter: str, solution: Solution
) -> dict[str, Array]:
    """Under `agc` the gain element at which the stage has the gain of full control, K_c/reach; K is linear in it."""
    reach, critical = solution.control_reach, solution.critical_gain
    if limiter != "agc" or reach is None or critical is None or circuit.gain_of is None:
        return symbols
    none, one = (circuit.gain_of(symbols, np.full(len(reach), g)) for g in (0.0, 1.0))
    with np.errstate(invalid="ignore", divide="ignore"):
        gain = circuit.gain_of(symbols, critical) / reach
        element = (gain - none) / (one - none)
    return {**symbols, circuit.gain_symbol: np.where(reach < 1, element, symbols[circuit.gain_symbol])}


def _input_gain(loop: LimitedLoop, circuit: Circuit, symbols: dict[str, Array]) -> Array:
    """K of a voltage limiter, gm of a current limiter, positive."""
    extended = loop.extended(symbols)
    return np.abs(extended[GAIN if GAIN in extended else circuit.gain_symbol])


def _levels(
    circuit: Circuit, loop: LimitedLoop, model: Limiter, values: Values, temperature_c: float, n: int
) -> tuple[Array, Array, bool]:
    """Skew of the rails, volts for which x is 1 (times K of a voltage limiter), and whether the rails may differ.

    A clipping output: the mean rail. A bipolar junction: kT/q, a pair of them: 2 kT/q (i = I tanh(v / 2 V_T)).
    """
    zero, unknown = np.zeros(n), np.full(n, np.nan)
    if model.name == "clip":
        if not loop.voltage:
            return zero, unknown, False
        if "VSAT" in values:
            return zero, _full(values["VSAT"], n), False
        if "VSAT_high" in values and "VSAT_low" in values:
            high, low = _full(values["VSAT_high"], n), _full(values["VSAT_low"], n)
            return (high - low) / (high + low), (high + low) / 2, True
        return zero, unknown, False
    if circuit.options.get("stage", "bjt") != "bjt" or "hFE" not in values:
        return zero, unknown, False
    volts = np.full(n, thermal_voltage_v(temperature_c) * (2.0 if model.name == "tanh" else 1.0))
    return zero, volts, False


def _full(value: Array | float, n: int) -> Array:
    return np.broadcast_to(np.asarray(value, dtype=np.float64), (n,)).copy()
