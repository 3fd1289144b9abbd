"""An evaluator that adds where each unit settles to what another evaluator says of it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Circuit
from yieldosc.settle.drive import drive_w, swing_amplitudes
from yieldosc.settle.fast import Checked, fast, in_full, unshifted
from yieldosc.settle.prepared import Prepared, level_is_held, prepare
from yieldosc.settle.settled import undisturbed, write_in_full
from yieldosc.settle.shift import SPREADS, FittedShift, training_values
from yieldosc.settle.transfer import limited_loop
from yieldosc.solver.evaluator import Evaluator
from yieldosc.solver.solution import Settling, Solution, Status

Array = NDArray[np.float64]
ROOM_C = 25.0
NEGLIGIBLE = 1e-6  # of the limits' width
SHOWN = 32  # units of the sample that decides whether shifts are negligible
SAMPLE_SEED = 4


class SettlingEvaluator:
    """Fills settled_hz and distortion by the circuit's option `limiter`. Keeps fits that depend only on the circuit and
    its nominal values, so that no answer depends on what was asked before."""

    def __init__(
        self,
        circuit: Circuit,
        nominal: Mapping[str, float],
        crossing: Evaluator,
        *,
        limits_width_hz: float | None = None,
        fitted: bool = True,
    ) -> None:
        """crossing: the evaluator of frequency and margin; limits_width_hz: between the frequency limits: shifts below
        1 ppm of it are not computed unit by unit; fitted = False: every unit by harmonic balance in full.
        NoLimiterError where the declared limiter cannot be found in the circuit."""
        self.circuit = circuit
        self.nominal = {name: float(value) for name, value in nominal.items()}
        self.crossing = crossing
        self.limiter = circuit.options["limiter"]
        if self.limiter != "agc":
            limited_loop(circuit)  # a circuit without a model of its limiter is refused before any unit is solved
        self.limits_width_hz = limits_width_hz
        self.fitted = fitted
        self._fit = FittedShift(self._training)
        self._negligible: bool | None = None

    def __getstate__(self) -> dict[str, object]:
        names = ("circuit", "nominal", "crossing", "limits_width_hz", "fitted")
        return {name: getattr(self, name) for name in names} | {"fits": self._fit.made}

    def __setstate__(self, state: dict[str, object]) -> None:
        made = dict(state)
        fits = made.pop("fits")
        self.__init__(  # type: ignore[misc]
            made.pop("circuit"), made.pop("nominal"), made.pop("crossing"), **made
        )
        self._fit.made = fits  # type: ignore[assignment]

    def solve(
        self,
        values: Mapping[str, Array],
        temperature_c: float,
        *,
        own_law: frozenset[str] = frozenset(),
        growth: bool = False,
        audit: NDArray[np.bool_] | None = None,
    ) -> Solution:
        """See `Evaluator.solve`; a starting unit whose balance does not converge is `undefined`."""
        solution = self.crossing.solve(values, temperature_c, own_law=own_law, growth=growth, audit=audit)
        if level_is_held(self.limiter, solution):
            found = Checked(undisturbed(solution), Settling(limiter=self.limiter, method="held", tolerance=0.0))
        else:
            live = prepare(self.circuit, values, temperature_c, solution, limiter=self.limiter, own_law=own_law)
            found = self._settled(live, solution)
        settled = found.settled
        amplitudes = swing_amplitudes(
            self.circuit, values, temperature_c, settled.settled_hz, own_law=own_law
        ) or (settled.amplitude_in_v, settled.amplitude_out_v)
        drive = drive_w(self.circuit, values, temperature_c, settled.settled_hz, amplitudes[0], own_law=own_law)
        lost = settled.not_converged & (solution.status == Status.STARTS)
        return replace(
            solution,
            status=np.where(lost, np.int8(Status.UNDEFINED), solution.status),
            settled_hz=settled.settled_hz,
            distortion=settled.distortion_out,
            distortion_in=settled.distortion_in,
            amplitude_v=amplitudes[1],
            amplitude_in_v=amplitudes[0],
            drive_w=drive,
            settling=found.account,
        )

    def other_modes(
        self, values: Mapping[str, Array], temperature_c: float, *, own_law: frozenset[str] = frozenset()
    ) -> list[tuple[float, ...]]:
        """See `Evaluator.other_modes`."""
        return self.crossing.other_modes(values, temperature_c, own_law=own_law)

    def _settled(self, live: Prepared, solution: Solution) -> Checked:
        if not self.fitted:
            return in_full(live, solution, limiter=self.limiter)
        if self.limits_width_hz is not None and len(live.rows):
            negligible = NEGLIGIBLE * self.limits_width_hz / float(np.median(live.first_hz))
            if self._is_negligible(negligible):
                return unshifted(live, solution, limiter=self.limiter, negligible=negligible)
        return fast(live, solution, self._fit, limiter=self.limiter)

    def _is_negligible(self, negligible: float) -> bool:
        """Whether a third of `negligible` covers every shift of a sample around the nominal unit; solved once."""
        if self._negligible is None:
            solution, live = self._made(SPREADS[-1], SHOWN, np.random.default_rng(SAMPLE_SEED), growing_only=True)
            out = undisturbed(solution)
            write_in_full(out, live)
            rows = live.rows
            shift = np.abs(out.settled_hz[rows] / out.first_hz[rows] - 1)
            self._negligible = bool(
                rows.size >= SHOWN // 2 and not out.not_converged.any() and np.max(shift) <= negligible / 3
            )
        return self._negligible

    def _training(self, spread: float, count: int, rng: np.random.Generator) -> Prepared:
        return self._made(spread, count, rng, growing_only=False)[1]

    def _made(
        self, spread: float, count: int, rng: np.random.Generator, *, growing_only: bool
    ) -> tuple[Solution, Prepared]:
        """Units around the nominal one at room temperature; under `agc` as if their level control were at its stop."""
        values = training_values(self.circuit, self.nominal, spread, count, rng)
        solution = self.crossing.solve(values, ROOM_C)
        limiter = "clip" if self.limiter == "agc" else self.limiter
        live = prepare(self.circuit, values, ROOM_C, solution, limiter=limiter, growing_only=growing_only)
        return solution, live
