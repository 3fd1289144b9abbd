"""One unit, or arrays of units, of a named circuit: what `unit` and the Python interface evaluate."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum

import numpy as np
from numpy.typing import ArrayLike, NDArray

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import Circuit, CircuitError, Family, Option, Role
from yieldosc.errors import Finding, InputError
from yieldosc.evaluators import UNDECLARED, make_evaluator
from yieldosc.parts.values import nominal_value
from yieldosc.settle import settled
from yieldosc.solver import make_evaluator as make_crossing_evaluator
from yieldosc.solver.solution import Solution, Status
from yieldosc.study import Study

FloatOrArray = float | NDArray[np.float64] | None


class Outcome(StrEnum):
    """What becomes of a unit; compares equal to its text."""

    STARTS = "starts"
    NO_BIAS = "no_bias"
    UNDEFINED = "undefined"
    NOT_ASSESSABLE = "not_assessable"
    NO_START = "no_start"
    WRONG_MODE = "wrong_mode"


OUTCOME_OF = {Status(i): outcome for i, outcome in enumerate(Outcome)}


@dataclass(frozen=True, slots=True, kw_only=True)
class Unit:
    """Result of `evaluate`: floats where every input was a float, arrays (n,) otherwise; None where it does not apply.

    frequency_hz: crossing [Hz]; settled_hz: None without a declared limiter; growth_per_s: None (nan in arrays) where
    the intended mode does not grow; other_modes_hz: per unit, the other growing modes [Hz], 0 for a latching pole.
    """

    circuit: str
    temperature_c: float
    frequency_hz: FloatOrArray
    settled_hz: FloatOrArray
    startup_margin: FloatOrArray
    growth_per_s: FloatOrArray
    outcome: Outcome | NDArray[np.object_]
    other_modes_hz: tuple[float, ...] | tuple[tuple[float, ...], ...]
    resistance_ratio: FloatOrArray = None
    distortion: FloatOrArray = None  # at the output
    distortion_in: FloatOrArray = None  # at the limiter's input
    amplitude_v: FloatOrArray = None  # peak fundamental at the output
    amplitude_in_v: FloatOrArray = None
    drive_w: FloatOrArray = None  # of the crystal
    overdriven: bool | NDArray[np.bool_] = False

    def to_dict(self) -> dict[str, object]:
        """The `unit` JSON contract; for a single unit."""

        def number(value: FloatOrArray) -> object:
            return value.tolist() if isinstance(value, np.ndarray) else value

        outcome = self.outcome
        return {
            "circuit": self.circuit,
            "temperature_c": self.temperature_c,
            "frequency_hz": number(self.frequency_hz),
            "settled_hz": number(self.settled_hz),
            "startup_margin": number(self.startup_margin),
            "growth_per_s": number(self.growth_per_s),
            "outcome": [str(o) for o in outcome] if isinstance(outcome, np.ndarray) else str(outcome),
            "other_modes_hz": list(self.other_modes_hz),
            "resistance_ratio": number(self.resistance_ratio),
            "distortion": number(self.distortion),
            "distortion_in": number(self.distortion_in),
            "amplitude_v": number(self.amplitude_v),
            "amplitude_in_v": number(self.amplitude_in_v),
            "drive_w": number(self.drive_w),
            "overdriven": self.overdriven.tolist() if isinstance(self.overdriven, np.ndarray) else self.overdriven,
        }


@dataclass(frozen=True, slots=True)
class Harmonics:
    """settled_hz (n,); harmonics (n, 52): the mean first, then the fundamental (1), then the others over it."""

    settled_hz: NDArray[np.float64]
    at_limiter: NDArray[np.complex128]
    at_output: NDArray[np.complex128]


@dataclass(frozen=True, slots=True)
class NamedCircuit:
    """A circuit by name: its roles, options and closed form, and `evaluate`."""

    family: Family

    @property
    def name(self) -> str:
        return self.family.name

    @property
    def options(self) -> tuple[Option, ...]:
        return self.family.options

    def roles(self, options: Mapping[str, str] | None = None) -> tuple[Role, ...]:
        """Every role that these options allow."""
        return self.family.roles(registry.complete_options(self.name, options or {}))

    def build(self, options: Mapping[str, str] | None, present: frozenset[str]) -> Circuit:
        """The circuit for these options and roles; InputError with every reason where there is none."""
        try:
            return registry.build(self.name, options, present)
        except CircuitError as error:
            raise InputError(Finding("error", "circuit-refused", text) for text in error.problems) from None

    def evaluate(
        self,
        values: Mapping[str, ArrayLike],
        options: Mapping[str, str] | None = None,
        temperature_c: float = 25.0,
    ) -> Unit:
        """Evaluate one unit (floats) or n units (arrays (n,), floats are shared). Values at 25 °C, SI; the stage's
        temperature laws are applied. InputError names every missing, unknown or impossible value."""
        circuit = self.build(options, frozenset(values))
        arrays, scalar = _arrays(circuit, values)
        nominal = {name: float(np.median(array)) for name, array in arrays.items()}
        evaluator = make_evaluator(circuit, nominal)
        solution = evaluator.solve(arrays, temperature_c, growth=True)
        others = evaluator.other_modes(arrays, temperature_c)
        return _unit(circuit.name, temperature_c, solution, others, scalar)

    def harmonics(
        self,
        values: Mapping[str, ArrayLike],
        options: Mapping[str, str],
        temperature_c: float = 25.0,
    ) -> Harmonics:
        """The waves of settled units: harmonics 0 … 51 at the limiter's input and at the output, complex peak values
        over their own fundamental (n, 52). options name a limiter; InputError where they do not."""
        circuit = self.build(options, frozenset(values))
        limiter = circuit.options.get("limiter", UNDECLARED)
        if limiter == UNDECLARED:
            raise InputError([Finding("error", "no-limiter", "harmonics need a limiter: give the option limiter")])
        arrays, _ = _arrays(circuit, values)
        crossing = make_crossing_evaluator(circuit, {name: float(np.median(array)) for name, array in arrays.items()})
        found = settled.solve(
            circuit, arrays, temperature_c, crossing.solve(arrays, temperature_c), limiter=limiter, harmonics=True
        )
        assert found.harmonics_in is not None and found.harmonics_out is not None
        return Harmonics(found.settled_hz, found.harmonics_in, found.harmonics_out)


def _arrays(circuit: Circuit, values: Mapping[str, ArrayLike]) -> tuple[dict[str, NDArray[np.float64]], bool]:
    given = {name: np.asarray(value, dtype=np.float64) for name, value in values.items()}
    problems = [
        Finding("error", "value-not-positive", f"{name} must be a finite number above zero; found {values[name]!r}")
        for name, array in given.items()
        if not np.all(np.isfinite(array)) or (np.any(array <= 0) and not circuit.role(name).may_be_zero)
    ]
    sizes = {array.size for array in given.values() if array.ndim}
    if len(sizes) > 1 or any(array.ndim > 1 for array in given.values()):
        problems.append(
            Finding(
                "error", "shapes-differ", f"arrays must be one-dimensional and of equal length; found {sorted(sizes)}"
            )
        )
    if problems:
        raise InputError(problems)
    n = sizes.pop() if sizes else 1
    for role in circuit.roles:
        if role.name not in given and role.default is not None:
            given[role.name] = np.asarray(role.default)
    return {name: np.broadcast_to(array, (n,)).copy() for name, array in given.items()}, not any(
        np.ndim(value) for value in values.values()
    )


def _unit(
    name: str, temperature_c: float, solution: Solution, others: list[tuple[float, ...]], scalar: bool
) -> Unit:
    def pick(array: NDArray[np.float64] | None) -> FloatOrArray:
        if array is None:
            return None
        if not scalar:
            return array
        return float(array[0]) if np.isfinite(array[0]) else None

    outcomes = np.array([OUTCOME_OF[Status(code)] for code in solution.status], dtype=object)
    overdriven = solution.overdriven if solution.overdriven is not None else np.zeros(len(outcomes), dtype=bool)
    return Unit(
        circuit=name,
        temperature_c=temperature_c,
        frequency_hz=pick(solution.frequency_hz),
        settled_hz=pick(solution.settled_hz),
        startup_margin=pick(solution.startup_margin),
        growth_per_s=pick(solution.growth_per_s),
        outcome=outcomes[0] if scalar else outcomes,
        other_modes_hz=others[0] if scalar else tuple(others),
        resistance_ratio=pick(solution.resistance_ratio),
        distortion=pick(solution.distortion),
        distortion_in=pick(solution.distortion_in),
        amplitude_v=pick(solution.amplitude_v),
        amplitude_in_v=pick(solution.amplitude_in_v),
        drive_w=pick(solution.drive_w),
        overdriven=bool(overdriven[0]) if scalar else overdriven,
    )


def evaluate_nominal(study: Study, temperature_c: float = 25.0) -> Unit:
    """The study's nominal unit, new, at a temperature: typical values, the middle of every other cause."""
    circuit = study.circuit
    values = {p.role: np.array([nominal_value(p, temperature_c)]) for p in study.parameters}
    values |= {name: np.array([value]) for name, value in study.conditions.items()}
    if circuit.supply_role is not None and study.design.supply_v is not None:
        values[circuit.supply_role] = np.array([study.design.supply_v])
    own = frozenset(p.role for p in study.parameters if p.law is not None and circuit.role(p.role).builtin_law)
    evaluator = make_evaluator(circuit, {name: float(value[0]) for name, value in values.items()})
    solution = evaluator.solve(values, temperature_c, own_law=own, growth=True)
    return _unit(circuit.name, temperature_c, solution, evaluator.other_modes(values, temperature_c, own_law=own), True)
