"""Which part decides: Sobol' indices of log frequency and log margin, per part, then per cause inside leading parts."""

from __future__ import annotations

from collections.abc import Callable, Mapping, Sequence
from dataclasses import dataclass
from functools import partial
from typing import Literal

import numpy as np
from numpy.typing import NDArray

from yieldosc.population import Block, Variable, combine
from yieldosc.solver.solution import Solution, Status
from yieldosc.studies.parallel import Workers
from yieldosc.studies.progress import Meter
from yieldosc.studies.results import Estimate, Ranking, RankLine
from yieldosc.studies.run import INNER, Setup
from yieldosc.studies.sensitivity import REPLICATES, Replicate, replicate
from yieldosc.studies.share_interval import share_interval
from yieldosc.study import Corner

Array = NDArray[np.float64]
Output = Literal["frequency", "margin"]
OUTPUTS: tuple[Output, ...] = ("frequency", "margin")
BASE = 512  # Sobol' points per scrambling; a power of two
LEAST_MARGIN = 1e-3  # log max(margin, this): one dead unit must not own the variance
NO_BIAS_MARGIN = 1e-6
MOST_SUBSTITUTED = 0.01
LEADING = 3
FACTOR = 4  # from one look at the order of the parts to the next, as with the yield
LOOKS = 2


@dataclass(frozen=True, slots=True)
class Inputs:
    """The independent uniforms of a population in a fixed order, and the group of each: a part, or a reel."""

    streams: tuple[str, ...]
    groups: Mapping[str, tuple[int, ...]]

    @classmethod
    def of(cls, variables: Sequence[Variable], group_of: Callable[[Variable, str], str]) -> Inputs:
        """group_of(variable, line): the group of an input; line is the part's name, or "reel …" for a reel's own."""
        streams: list[str] = []
        groups: dict[str, list[int]] = {}
        for variable in variables:
            pairs = []
            if variable.own_counts:
                pairs.append((variable.stream, group_of(variable, variable.part)))
            if variable.reel_counts:
                pairs.append((str(variable.reel_stream), group_of(variable, f"reel {variable.reel}")))
            for stream, group in pairs:
                if stream not in streams:
                    groups.setdefault(group, []).append(len(streams))
                    streams.append(stream)
        return cls(tuple(streams), {name: tuple(at) for name, at in groups.items()})


@dataclass(frozen=True)
class _Job:
    """One scrambling of a design, as a piece of work."""

    setup: Setup
    inputs: Inputs
    nominal_hz: tuple[float, ...]  # per corner
    base: int

    def __call__(self, number: int) -> tuple[Replicate, int, int]:
        counts = np.zeros(2, dtype=np.int64)
        result = replicate(
            partial(self._outputs, counts),
            dimensions=len(self.inputs.streams),
            groups=tuple(self.inputs.groups.values()),
            base=self.base,
            seed=self.setup.streams.seed,
            number=number,
        )
        return result, int(counts[0]), int(counts[1])

    def _outputs(self, counts: NDArray[np.int64], uniforms: Array) -> Array:
        """uniforms (d, n) → (2 · corners, n): log frequency at each corner, then log margin."""
        corners = len(self.setup.corners)
        found = np.empty((2 * corners, uniforms.shape[1]))
        for first in range(0, uniforms.shape[1], INNER):
            part = uniforms[:, first : first + INNER]
            rows = dict(zip(self.inputs.streams, part, strict=True))
            population = self.setup.population
            block = Block(population, combine(population.variables, rows.__getitem__), part.shape[1])
            for c, corner in enumerate(self.setup.corners):
                solution = self.setup.bench.solve(block, corner, growth=False)
                columns = slice(first, first + part.shape[1])
                found[c, columns], found[corners + c, columns] = _logs(solution, self.nominal_hz[c])
                counts[0] += np.count_nonzero(solution.status == Status.NO_BIAS)
                counts[1] += part.shape[1]
        return found


def _logs(solution: Solution, nominal_hz: float) -> tuple[Array, Array]:
    """ln(f/f_nominal) and ln max(margin, 1e-3); units without bias at the nominal frequency and margin 1e-6."""
    dead = solution.status == Status.NO_BIAS
    frequency = np.where(dead, nominal_hz, solution.limit_frequency_hz)
    margin = np.where(dead, NO_BIAS_MARGIN, solution.startup_margin)
    margin = np.zeros_like(margin) if np.isnan(margin).all() else margin  # no start-up question: a constant
    with np.errstate(invalid="ignore", divide="ignore"):
        return np.log(frequency / nominal_hz), np.log(np.maximum(margin, LEAST_MARGIN))


def rankings(
    setup: Setup,
    nominal_hz: Sequence[float],
    per_percent: Mapping[Output, Mapping[str, float]],
    *,
    workers: Workers | None = None,
    base: int = BASE,
    confidence: float = 0.95,
    meter: Meter | None = None,
) -> dict[str, Ranking]:
    """Rankings of the outputs that vary. nominal_hz: the nominal unit's frequency per corner.

    Two looks fixed beforehand, at base/4 and base points, each with intervals at 1 − α/2; the second only where the
    first leaves some output without a single leader. Cost: at most 16 · base · (parts + reels + 2) · 5/4 units at every
    corner, then 16 · base/2 · (causes + 3). Raises NotANumberError where a unit has no frequency or no margin.
    """
    if not setup.population.variables:
        return {}
    whole = Inputs.of(setup.population.variables, lambda _, line: line)
    at_each = 1 - (1 - confidence) / LOOKS
    for look in range(1, LOOKS + 1):
        points = max(base // FACTOR ** (LOOKS - look), 2)
        parts = _run(_Job(setup, whole, tuple(nominal_hz), points), workers, meter)
        tables = {
            output: table
            for k, output in enumerate(OUTPUTS)
            if (table := _table(parts.results, whole, setup.corners, k, at_each)) is not None
        }
        if all(len(table.leaders) == 1 for table in tables.values()):
            break
    leading = {output: table.names[:LEADING] for output, table in tables.items()}
    chosen = {name for names in leading.values() for name in names}

    def by_cause(variable: Variable, line: str) -> str:
        return f"{line}: {cause_of(variable)}" if line in chosen else "the rest"

    causes = Inputs.of(setup.population.variables, by_cause)
    detail = _run(_Job(setup, causes, tuple(nominal_hz), max(base // 2, 2)), workers, meter)
    made: dict[str, Ranking] = {}
    for output, table in tables.items():
        k = OUTPUTS.index(output)
        inside = _table(detail.results, causes, setup.corners, k, confidence, worst=table.worst)
        lines = () if inside is None else inside.lines({})
        starts = tuple(f"{name}: " for name in leading[output])
        wanted = tuple(line for line in lines if line.part.startswith(starts))
        made[output] = _ranking(output, table, wanted, parts, setup.corners, per_percent.get(output, {}), look)
    return made


def cause_of(variable: Variable) -> str:
    """The cause that a reader knows: initial, temperature, or drift and solder."""
    if variable.cause == "initial":
        return "initial"
    return "temperature" if variable.cause.startswith("law") else "drift and solder"


@dataclass(frozen=True, slots=True)
class _Run:
    results: tuple[Replicate, ...]
    substituted: int
    evaluations: int
    units: int


def _run(job: _Job, workers: Workers | None, meter: Meter | None) -> _Run:
    answers = []
    with (workers or Workers()).in_order(job, REPLICATES) as replicates:
        for answer in replicates:
            answers.append(answer)
            if meter is not None:
                meter.done(answer[2] // len(job.setup.corners))
    evaluations = sum(a[2] for a in answers)
    return _Run(
        tuple(a[0] for a in answers), sum(a[1] for a in answers), evaluations, evaluations // len(job.setup.corners)
    )


@dataclass(frozen=True)
class _Table:
    """Indices of one output: replicates × groups at the worst corner, and their mean over corners."""

    names: tuple[str, ...]  # largest total first
    worst: int
    first: Mapping[str, Estimate]
    total: Mapping[str, Estimate]
    mean_first: Mapping[str, Estimate]
    mean_total: Mapping[str, Estimate]
    leaders: tuple[str, ...]  # parts whose interval of the total reaches the first one's

    def lines(self, per_percent: Mapping[str, float]) -> tuple[RankLine, ...]:
        return tuple(
            RankLine(
                part=name,
                first_order=self.first[name],
                total=self.total[name],
                mean_first_order=self.mean_first[name],
                mean_total=self.mean_total[name],
                per_percent=per_percent.get(name),
            )
            for name in self.names
        )


def _table(
    results: Sequence[Replicate],
    inputs: Inputs,
    corners: Sequence[Corner],
    k: int,
    confidence: float,
    *,
    worst: int | None = None,
) -> _Table | None:
    """None where the output does not vary at any corner. k: 0 frequency, 1 margin."""
    rows = slice(k * len(corners), (k + 1) * len(corners))
    variance = np.array([r.variance[rows] for r in results])  # (replicates, corners)
    if not (variance > 0).any():
        return None
    at = int(np.argmax(variance.mean(axis=0))) if worst is None else worst
    weights = variance / variance.sum(axis=1, keepdims=True)
    first = np.array([r.first[rows] for r in results])  # (replicates, corners, groups)
    total = np.array([r.total[rows] for r in results])
    columns = {name: i for i, name in enumerate(inputs.groups)}

    def estimates(values: Array) -> dict[str, Estimate]:
        return {name: share_interval(values[:, i], confidence) for name, i in columns.items()}

    def mean(values: Array) -> Array:
        return np.asarray(np.sum(np.where(weights[:, :, None] > 0, values, 0.0) * weights[:, :, None], axis=1))

    totals = estimates(total[:, at])
    names = tuple(sorted(columns, key=lambda name: (-totals[name].estimate, name)))
    leaders = tuple(name for name in names if totals[name].high >= totals[names[0]].low)
    return _Table(names, at, estimates(first[:, at]), totals, estimates(mean(first)), estimates(mean(total)), leaders)


def _ranking(
    output: Output,
    table: _Table,
    causes: tuple[RankLine, ...],
    run: _Run,
    corners: Sequence[Corner],
    per_percent: Mapping[str, float],
    look: int,
) -> Ranking:
    share = run.substituted / run.evaluations
    withheld = ""
    if share > MOST_SUBSTITUTED:
        withheld = (
            f"{share:.1%} of the evaluations have no bias, more than 1 %: "
            "indices over substituted values would rank the substitute, not the parts"
        )
    return Ranking(
        output=output,
        corner=corners[table.worst],
        parts=() if withheld else table.lines(per_percent),
        causes=() if withheld else causes,
        units=run.units,
        substituted=run.substituted,
        withheld=withheld,
        leaders=() if withheld else table.leaders,
        looks=look,
        looks_planned=LOOKS,
    )
