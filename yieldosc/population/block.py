"""A block of units: drawn once, carried through every corner, with a place to adjust units before they are judged."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass, field, replace
from typing import Protocol

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.parameter import Parameter
from yieldosc.parts.values import at_corner, initial_values
from yieldosc.population.draws import Draws, Streams, Variable, study_variables
from yieldosc.solver.evaluator import Evaluator
from yieldosc.solver.solution import Solution
from yieldosc.study import Corner, Study

Array = NDArray[np.float64]
Mask = NDArray[np.bool_]


@dataclass(frozen=True)
class Population:
    """All units that a study's parts can make, before any is drawn."""

    parameters: tuple[Parameter, ...]
    conditions: Mapping[str, float]
    supply_role: str | None
    stage_roles: frozenset[str]  # roles with a built-in temperature law
    variables: tuple[Variable, ...] = field(init=False)

    def __post_init__(self) -> None:
        object.__setattr__(self, "variables", study_variables(self.parameters))

    @classmethod
    def of(cls, study: Study) -> Population:
        """The declared population of a study."""
        circuit = study.circuit
        stage_roles = frozenset(role.name for role in circuit.roles if role.builtin_law is not None)
        return cls(study.parameters, study.conditions, circuit.supply_role, stage_roles)

    def with_parameters(self, parameters: tuple[Parameter, ...]) -> Population:
        """The same conditions with other parts."""
        return Population(parameters, self.conditions, self.supply_role, self.stage_roles)

    def only(self, role: str) -> Population:
        """The population of one role alone."""
        kept = tuple(p for p in self.parameters if p.role == role)
        return Population(kept, {}, None, self.stage_roles)

    @property
    def own_law(self) -> frozenset[str]:
        """Stage roles whose built-in temperature law the user's own replaces."""
        return frozenset(p.role for p in self.parameters if p.law is not None and p.role in self.stage_roles)

    @property
    def bounded(self) -> bool:
        return all(p.shape.bounded for p in self.parameters)

    def block(self, streams: Streams, start: int, count: int) -> Block:
        """Units start … start + count − 1."""
        return Block(self, streams.block(self.variables, start, count), count)

    def block_at(self, streams: Streams, numbers: NDArray[np.int64]) -> Block:
        """The units of these numbers (m,)."""
        return Block(self, streams.at(self.variables, numbers), len(numbers))


class Block:
    """n units. Values of roles that do not differ between units are 0-d, so that solvers can treat them once."""

    def __init__(self, population: Population, draws: Draws, count: int, *, typical: bool = False) -> None:
        """typical: initial values at their typical, whatever was drawn (the nominal unit)."""
        self.population = population
        self.draws = draws
        self.count = count
        self._initial = {
            p.role: np.asarray(p.typical) if typical else initial_values(p, draws.get(p.role, {}))
            for p in population.parameters
        }
        self._factors: dict[str, Array] = {}

    def initial(self, role: str) -> Array:
        """Values (n,) or 0-d of one role at 25 °C, new, before soldering and adjustment."""
        return self._initial[role]

    def adjust(self, role: str, factors: Array) -> None:
        """Multiply one role of every unit by factors (n,) at every corner: a trim."""
        self._factors[role] = self._factors.get(role, np.ones(self.count)) * factors

    def rows(self, rows: NDArray[np.int64]) -> Block:
        """The units at these positions (m,) of the block, adjustments included."""
        part = Block.__new__(Block)
        part.population, part.count = self.population, len(rows)
        part.draws = {role: {cause: u[rows] for cause, u in causes.items()} for role, causes in self.draws.items()}
        part._initial = {role: value if value.ndim == 0 else value[rows] for role, value in self._initial.items()}
        part._factors = {role: factors[rows] for role, factors in self._factors.items()}
        return part

    def values(self, corner: Corner) -> dict[str, Array]:
        """Role → values (n,) or 0-d at a corner; conditions and the corner's supply included."""
        made: dict[str, Array] = {k: np.asarray(v, dtype=float) for k, v in self.population.conditions.items()}
        for parameter in self.population.parameters:
            role = parameter.role
            u = self.draws.get(role, {})
            value = np.asarray(at_corner(parameter, self._initial[role], u, corner.temperature_c, corner.age_years))
            made[role] = value * self._factors[role] if role in self._factors else value
        if self.population.supply_role is not None and corner.supply_v is not None:
            made[self.population.supply_role] = np.asarray(corner.supply_v)
        if made and all(np.ndim(v) == 0 for v in made.values()):
            first = next(iter(made))
            made[first] = np.full(self.count, made[first])  # the solver reads n from the arrays
        return made


@dataclass(frozen=True)
class Bench:
    """Solves blocks at corners: the evaluator, with the ratio of a measured reference board to its prediction."""

    evaluator: Evaluator
    ratio: float = 1.0
    growth: bool = False

    def solve(self, block: Block, corner: Corner, *, audit: Mask | None = None, growth: bool | None = None) -> Solution:
        """Every unit of the block at a corner, its frequencies scaled by the bench ratio."""
        wanted = self.growth if growth is None else growth
        return self.solve_values(block.values(corner), corner, block.population.own_law, audit=audit, growth=wanted)

    def solve_values(
        self,
        values: Mapping[str, Array],
        corner: Corner,
        own_law: frozenset[str],
        *,
        audit: Mask | None = None,
        growth: bool = False,
    ) -> Solution:
        """The same for values that came from elsewhere than a block."""
        solution = self.evaluator.solve(values, corner.temperature_c, own_law=own_law, growth=growth, audit=audit)
        return solution if self.ratio == 1.0 else _scaled(solution, self.ratio)


def _scaled(solution: Solution, ratio: float) -> Solution:
    def times(values: Array | None) -> Array | None:
        return None if values is None else values * ratio

    return replace(
        solution,
        frequency_hz=solution.frequency_hz * ratio,
        settled_hz=times(solution.settled_hz),
        other_mode_hz=times(solution.other_mode_hz),
    )


def middle_draws(every: Iterable[Variable], count: int) -> Draws:
    """Every variable at u = 1/2 (count,)."""
    draws: Draws = {}
    for variable in every:
        draws.setdefault(variable.role, {})[variable.cause] = np.full(count, 0.5)
    return draws


class Adjustment(Protocol):
    """Something done to each unit between drawing and judging: a trim. Must be picklable."""

    def factors(self, block: Block, bench: Bench, draw: Callable[[str], Array]) -> tuple[str, Array]:
        """The role that is adjusted, and each unit's factor (n,) on it; the block may be solved on the way.

        draw(name): u (n,) of these units from a stream of the adjustment's own (a reading's noise, a part fitted).
        """
        ...
