"""Units of one network circuit at one corner: the fast path for most, the exact path for doubts and the audit.

Fast path: the reference unit's crossings are followed by Newton from their first-order prediction, and the number of
growing poles that they imply is compared with a Routh array at the actual gain. A unit that differs anywhere goes to
the exact path.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from itertools import pairwise
from typing import Any

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit, Derived
from yieldosc.circuits.network import Network, network
from yieldosc.solver.competition import first_known, loses, sum_at_gain
from yieldosc.solver.crossings import TO_ROUNDING, Split, newton, real_crossings
from yieldosc.solver.exact import Modes, modes
from yieldosc.solver.growth import growth_rate, only_pair_growth
from yieldosc.solver.polynomials import roots
from yieldosc.solver.reference import Reference, make_reference
from yieldosc.solver.resistance import resistance_ratio
from yieldosc.solver.routh import growing_poles
from yieldosc.solver.scaled import Scale, Scaled, bias_substitute, scaled
from yieldosc.solver.solution import Solution, Status
from yieldosc.solver.sturm import positive_roots

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]
ROUGHLY = 1e-5  # relative step at which a root is known well enough that limits nothing
APART = 1 + 1e-4  # roots nearer than this may be one root that two of them were led to
NEAR = 1.02  # a rough crossing within this ratio of the actual gain is a question for the exact path
AUDIT_TOLERANCE = 1e-6  # relative difference in margin between the two paths


@dataclass(slots=True)
class _Block:
    """What is known of n units while they are being solved (scaled variables)."""

    omega: Array
    lower: Array
    upper: Array
    grows: Mask
    status: NDArray[np.int8]
    other_omega: Array
    no_crossing: Mask
    nearest_x: NDArray[np.complex128]
    nearest_gain: NDArray[np.complex128]
    growth: Array
    overdriven: Mask


class NetworkEvaluator:
    """Evaluator of a circuit with a branch table. Keeps no state that changes an answer, only cached references."""

    def __init__(self, circuit: Circuit, nominal: Mapping[str, float]) -> None:
        self.circuit = circuit
        self.nominal = {name: float(value) for name, value in nominal.items()}
        self.network: Network = network(circuit.branches, circuit.gain_symbol)
        self._references: dict[tuple[object, ...], Reference] = {}

    def __getstate__(self) -> dict[str, object]:
        return {"circuit": self.circuit, "nominal": self.nominal}

    def __setstate__(self, state: dict[str, object]) -> None:
        self.__init__(state["circuit"], state["nominal"])  # type: ignore[misc]

    # -- the public call -----------------------------------------------------------------------------------------

    def solve(
        self,
        values: Mapping[str, Array],
        temperature_c: float,
        *,
        own_law: frozenset[str] = frozenset(),
        growth: bool = False,
        audit: Mask | None = None,
    ) -> Solution:
        """See `Evaluator.solve`. Cost: about 100 array operations per unit on the fast path."""
        n = max((np.size(v) for v in values.values()), default=1)
        reference = self._reference(values, temperature_c, own_law)
        derived = bias_substitute(
            self.circuit, self.circuit.derive(values, temperature_c, own_law), reference.symbols, n
        )
        part = scaled(self.network, reference.scale, derived, n)
        design = _full(self.circuit.design_frequency(values), n) * (2 * np.pi / reference.scale.omega)
        block, doubt = self._fast(part, design, values, reference, n)
        chosen = doubt if audit is None else doubt | audit
        disagreeing = self._exact(block, part, design, values, reference, np.flatnonzero(chosen), doubt)
        if growth:
            self._growth(block, part, doubt)
        audited = 0 if audit is None else int(np.count_nonzero(audit & ~doubt))
        solution = self._solution(block, part, derived, values, reference, n)
        if growth:  # the other start-up figures are asked for together
            ratio = self._resistance_ratio(part, reference, solution.frequency_hz)
            solution = replace(solution, resistance_ratio=ratio)
        return replace(solution, audited=audited, disagreeing=disagreeing, exact=int(np.count_nonzero(doubt)))

    def other_modes(
        self, values: Mapping[str, Array], temperature_c: float, *, own_law: frozenset[str] = frozenset()
    ) -> list[tuple[float, ...]]:
        """Frequencies [Hz] of every other growing mode of each unit, 0 for a latching real pole."""
        found, hz = self._all_modes(values, temperature_c, own_law)
        rows = []
        for unit in range(len(found.found)):
            omegas = found.other_omega[unit]
            kept = omegas[~np.isnan(omegas)]
            rows.append(tuple(sorted(float(w) * hz if np.isfinite(w) else 0.0 for w in kept)))
        return rows

    def crosses(
        self, values: Mapping[str, Array], temperature_c: float, *, own_law: frozenset[str] = frozenset()
    ) -> Mask:
        """Units (n,) of which some gain brings a pole pair to the axis inside the band of the intended mode."""
        return self._all_modes(values, temperature_c, own_law)[0].found

    # -- pieces --------------------------------------------------------------------------------------------------

    def _all_modes(
        self, values: Mapping[str, Array], temperature_c: float, own_law: frozenset[str]
    ) -> tuple[Modes, float]:
        """Modes of every unit by the exact path, and the Hz of one scaled rad/s."""
        n = max((np.size(v) for v in values.values()), default=1)
        reference = self._reference(values, temperature_c, own_law)
        derived = self.circuit.derive(values, temperature_c, own_law)
        part = scaled(self.network, reference.scale, bias_substitute(self.circuit, derived, reference.symbols, n), n)
        return self._modes(part, values, reference, np.arange(n), n), reference.scale.omega / (2 * np.pi)

    def _reference(
        self, values: Mapping[str, Array], temperature_c: float, own_law: frozenset[str]
    ) -> Reference:
        """The nominal unit at this temperature and at the block's constant values (the supply is one)."""
        constant = {k: float(np.asarray(v)) for k, v in values.items() if np.ndim(v) == 0}
        key = (temperature_c, own_law, tuple(sorted(constant.items())))
        if key not in self._references:
            unit = {k: np.array([constant.get(k, self.nominal[k])]) for k in values}
            self._references[key] = make_reference(self.circuit, self.network, unit, temperature_c, own_law)
        return self._references[key]

    def _band(self, values: Mapping[str, Array], design: Array, scale: Scale, n: int) -> tuple[Array, Array]:
        if self.circuit.band is None:
            return design, np.full(n, np.log(2.0))
        centre, half = self.circuit.band(values)
        return _full(centre, n) * (2 * np.pi / scale.omega), _full(half, n)

    def _fast(
        self, part: Scaled, design: Array, values: Mapping[str, Array], ref: Reference, n: int
    ) -> tuple[_Block, Mask]:
        block = _empty(n)
        if not ref.simple:
            return block, np.ones(n, dtype=bool)
        split = Split.of(part.a, part.b)
        sign = np.sign(part.g)
        gains: list[Array] = []
        doubt = np.zeros(n, dtype=bool)
        followed: list[Array] = []
        centre, half = self._band(values, design, ref.scale, n)
        for k, tracked in enumerate(ref.tracked + ref.idle):
            ratio = (design / ref.design) ** 2 if k == ref.intended else ref.prediction(tracked, part.symbols)
            limiting = k in (ref.intended, ref.leaves) and k != ref.far
            settle = TO_ROUNDING if limiting else ROUGHLY
            x, good, slope = newton(split, tracked.x * ratio, settle=settle, known=followed)
            followed.append(x)
            gain = split.gain(x)
            with np.errstate(invalid="ignore"):
                if not tracked.direction:
                    doubt |= ~good | (gain * sign >= 0)
                    continue
                doubt |= ~good | (gain * sign <= 0) | ((sign * slope < 0) != (tracked.direction > 0))
            gains.append(np.abs(gain))
            if k == ref.intended or ref.in_band is not None:
                with np.errstate(invalid="ignore", divide="ignore"):
                    inside = np.abs(np.log(x / (centre * centre))) <= 2 * half
                doubt |= ~inside if k == ref.intended or ref.in_band is None else inside != ref.in_band[k]
            if k == ref.intended:
                with np.errstate(invalid="ignore"):
                    block.omega = np.sqrt(x)
        # a root of F that the reference does not have may limit the gain from above without a pole more or less at g
        doubt |= positive_roots(split.polynomial()) != len(followed)
        with np.errstate(invalid="ignore"):
            for lower, higher in pairwise(ref.order):
                doubt |= ~(followed[lower] * APART < followed[higher])
            for earlier, later in pairwise(gains):
                doubt |= ~(earlier < later)
            expected, real_poles = self._expected(part, ref, gains)
            doubt |= ~(expected == growing_poles(_at_gain(part))) | real_poles
            block.lower = gains[ref.intended] * sign
            if ref.leaves is not None:
                block.upper = gains[ref.leaves] * sign
            size = np.abs(part.g)
            block.grows = (size > gains[ref.intended]) & (size < np.abs(block.upper))
            doubt |= self._other_growing(size, ref, gains)
            if ref.far is not None:
                # whose crossing this is was not settled by counting; it must not come near enough to limit the margin
                doubt |= gains[ref.far] * gains[ref.intended] <= NEAR * size * size
        block.status = np.where(block.grows, Status.STARTS, Status.NO_START).astype(np.int8)
        return block, doubt

    @staticmethod
    def _expected(part: Scaled, ref: Reference, gains: list[Array]) -> tuple[NDArray[np.int64], Mask]:
        """Growing poles implied by the crossings below the actual gain, and units in which real poles matter: one has
        crossed, or one will leave that was half of a pair."""
        size = np.abs(part.g)
        count = np.zeros(len(size), dtype=np.int64)
        for tracked, gain in zip(ref.tracked, gains, strict=True):
            count += np.where(gain < size, 2 * tracked.direction, 0)
        _, real_gain, direction = real_crossings(part.a, part.b, np.sign(part.g))
        below = np.where(np.abs(real_gain) < size[:, None], direction, 0)
        return count + np.sum(below, axis=1), np.any((below != 0) | (direction < 0), axis=1)

    @staticmethod
    def _other_growing(size: Array, ref: Reference, gains: list[Array]) -> Mask:
        """Units in which a mode other than the intended may grow: theirs is a question for the exact path."""
        risky = np.zeros(len(size), dtype=bool)
        for k, (tracked, gain) in enumerate(zip(ref.tracked, gains, strict=True)):
            if k != ref.intended and tracked.direction > 0:
                risky |= gain < NEAR * size
        return risky

    def _modes(
        self, part: Scaled, values: Mapping[str, Array], ref: Reference, rows: NDArray[np.intp], n: int
    ) -> Modes:
        a, b, g = part.take(rows)
        design = _full(self.circuit.design_frequency(values), n) * (2 * np.pi / ref.scale.omega)
        centre, half = self._band(values, design, ref.scale, n)
        return modes(a, b, g, design[rows], centre[rows], half[rows], fixed_gain=self.circuit.fixed_gain)

    def _exact(
        self,
        block: _Block,
        part: Scaled,
        design: Array,
        values: Mapping[str, Array],
        ref: Reference,
        rows: NDArray[np.intp],
        doubt: Mask,
    ) -> int:
        """Solve some units by all roots and write them into the block; returns audited units that differ."""
        if rows.size == 0:
            return 0
        found = self._modes(part, values, ref, rows, len(design))
        ratio = np.full(rows.size, np.nan)
        certain = ~doubt[rows]
        with np.errstate(invalid="ignore", divide="ignore"):
            ratio[certain] = np.abs(found.lower[certain] / block.lower[rows[certain]] - 1)
            differs = certain & ~(ratio <= AUDIT_TOLERANCE)
            # an upper limit matters where it, and not the lower one, sets the margin
            upper = block.upper[rows]
            limits = np.minimum(np.abs(found.upper), np.abs(upper)) <= NEAR * part.g[rows] ** 2 / np.abs(found.lower)
            differs |= certain & limits & ~(np.abs(found.upper / upper - 1) <= AUDIT_TOLERANCE)
        write = rows[doubt[rows] | differs]
        keep = doubt[rows] | differs
        status = self._exact_status(part, found, rows)
        for name in ("omega", "lower", "upper", "grows", "nearest_x", "nearest_gain"):
            getattr(block, name)[write] = getattr(found, name)[keep]
        block.no_crossing[write] = ~found.found[keep]
        block.status[write] = status[keep]
        with np.errstate(invalid="ignore"):
            other = np.where(np.isinf(found.other_omega), 0.0, found.other_omega)
        block.other_omega[write] = first_known(other, found.other_gain)[keep]
        return int(np.count_nonzero(differs))

    def _exact_status(self, part: Scaled, found: Modes, rows: NDArray[np.intp]) -> NDArray[np.int8]:
        a, b, g = part.take(rows)
        other = ~np.isnan(found.other_omega).all(axis=1)
        status = np.where(found.grows, Status.STARTS, np.where(other, Status.WRONG_MODE, Status.NO_START))
        rivals = np.flatnonzero(found.grows & other)
        if rivals.size:
            status[rivals] = np.where(loses(a, b, g, found, rivals), Status.WRONG_MODE, Status.STARTS)
        poles = roots(sum_at_gain(a, b, g))
        with np.errstate(invalid="ignore"):
            right = np.count_nonzero(poles.real > 0, axis=1)
            delicate = (np.abs(poles.real) <= 1e-9 * np.abs(poles)).any(axis=1)
        status = np.where((right != found.growing_poles) & ~delicate, Status.UNDEFINED, status)
        return status.astype(np.int8)

    @staticmethod
    def _growth(block: _Block, part: Scaled, doubt: Mask) -> None:
        """A unit without doubt has one growing pair only: its Routh count said so."""
        for rows, rate in ((block.grows & ~doubt, only_pair_growth), (block.grows & doubt, growth_rate)):
            at = np.flatnonzero(rows)
            if at.size:
                a, b, g = part.take(at)
                block.growth[at], block.overdriven[at] = rate(a, b, block.omega[at], block.lower[at], g)

    def _solution(
        self, block: _Block, part: Scaled, derived: Derived, values: Mapping[str, Array], ref: Reference, n: int
    ) -> Solution:
        hz = ref.scale.omega / (2 * np.pi)
        frequency = block.omega * hz
        margin, upper = self._margin(block, part, ref)
        rows = np.flatnonzero(block.no_crossing)
        if rows.size:
            x = block.nearest_x[rows]
            frequency[rows] = np.sqrt(np.where(x.real > 0, x.real, np.abs(x))) * hz
        status = block.status
        if self.circuit.not_assessable is not None:
            outside = np.broadcast_to(self.circuit.not_assessable(values, frequency), (n,))
            status = np.where(outside & (status != Status.UNDEFINED), Status.NOT_ASSESSABLE, status)
        if derived.no_bias is not None:
            no_bias = np.broadcast_to(derived.no_bias, (n,))
            status = np.where(no_bias, Status.NO_BIAS, status)
            frequency = np.where(no_bias, np.nan, frequency)
            margin = np.where(no_bias, 0.0, margin)
        gain_factor = ref.scale.factor(self.network.dimensions[self.network.gain_symbol])
        critical = block.lower / gain_factor
        reach = self.circuit.control_reach
        return Solution(
            frequency_hz=frequency,
            startup_margin=margin,
            status=status.astype(np.int8),
            growth_per_s=block.growth * ref.scale.omega,
            critical_gain=critical,
            control_reach=None if reach is None else reach(part.symbols, values, critical),
            upper_ratio=upper,
            other_mode_hz=block.other_omega * hz,
            overdriven=block.overdriven,
        )

    def _resistance_ratio(self, part: Scaled, ref: Reference, frequency_hz: Array) -> Array | None:
        if self.circuit.crystal_arm is None:
            return None
        omega = frequency_hz * (2 * np.pi / ref.scale.omega)
        return resistance_ratio(self.network, ref.scale, part.symbols, self.circuit.crystal_arm, omega, part.g)

    def _margin(self, block: _Block, part: Scaled, ref: Reference) -> tuple[Array, Array]:
        """g/g_c and g_h/g in the circuit's own gain (K of an op-amp stage), the smaller is the margin."""
        factor = ref.scale.factor(self.network.dimensions[self.network.gain_symbol])

        def gain(g: Any) -> Any:  # real or complex arrays alike
            return g if self.circuit.gain_of is None else self.circuit.gain_of(part.symbols, g / factor)

        with np.errstate(divide="ignore", invalid="ignore", over="ignore"):
            actual = gain(part.g)
            margin = actual / gain(block.lower)
            limited = np.isfinite(block.upper)
            upper = np.where(limited, gain(np.where(limited, block.upper, 1.0)) / actual, np.inf)
            margin = np.minimum(margin, upper)
            rows = np.flatnonzero(block.no_crossing)
            if rows.size:
                ratio = np.broadcast_to(actual, part.g.shape)[rows] / gain(block.nearest_gain)[rows]
                size = np.abs(ratio)
                continued = np.minimum(size, 1 / size) * np.exp(-np.abs(np.angle(ratio)))
                margin[rows] = np.where(np.isfinite(continued), continued, 0.0)  # nan: F has no root, so no gain exists
                upper[rows] = np.inf
        return margin, upper


def _at_gain(part: Scaled) -> list[Array]:
    return sum_at_gain(part.a, part.b, part.g)


def _empty(n: int) -> _Block:
    return _Block(
        omega=np.full(n, np.nan),
        lower=np.full(n, np.nan),
        upper=np.full(n, np.inf),
        grows=np.zeros(n, dtype=bool),
        status=np.full(n, Status.NO_START, dtype=np.int8),
        other_omega=np.full(n, np.nan),
        no_crossing=np.zeros(n, dtype=bool),
        nearest_x=np.ones(n, dtype=np.complex128),
        nearest_gain=np.ones(n, dtype=np.complex128),
        growth=np.full(n, np.nan),
        overdriven=np.zeros(n, dtype=bool),
    )


def _full(value: Array | float, n: int) -> Array:
    array = np.asarray(value, dtype=np.float64)
    return array if array.shape == (n,) else np.broadcast_to(array, (n,)).copy()
