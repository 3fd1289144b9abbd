"""What every three-terminal gain stage is: b controls, current flows from c to e. gm scales with the gain, the rest
stays: rin and rout are those of the actual bias point."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from yieldosc.circuits.circuit import Branch, Role, Values

Array = NDArray[np.float64]
Resistance = Array | float  # [Ω]
Solve = Callable[[Values, float, frozenset[str], Resistance, Resistance], "Bias"]
BOLTZMANN_J_PER_K = 1.380649e-23  # SI, exact since 2019
ELEMENTARY_CHARGE_C = 1.602176634e-19  # SI, exact since 2019
ZERO_C_IN_K = 273.15
ROOM_C = 25.0
MOST_RIN = 1e12  # Ω; a field-effect gate's input
LEAST_CURRENT_A = 1e-12  # keeps the arrays of units without bias finite; they are no_bias whatever follows


def thermal_voltage_v(temperature_c: float) -> float:
    """kT/q."""
    return BOLTZMANN_J_PER_K * (temperature_c + ZERO_C_IN_K) / ELEMENTARY_CHARGE_C


def relative_temperature(temperature_c: float) -> float:
    """T/298.15 K, which mobilities follow by a power."""
    return (temperature_c + ZERO_C_IN_K) / (ROOM_C + ZERO_C_IN_K)


@dataclass(frozen=True, slots=True)
class Bias:
    """Stage symbols of n units (rb only where bias branches exist) and which units have no bias."""

    symbols: dict[str, Array]
    no_bias: NDArray[np.bool_] | None


@dataclass(frozen=True, kw_only=True)
class Stage:
    """A gain stage as the circuits use it.

    solve(values, temperature_c, own_law, rfeed, rdc) → Bias; rfeed, rdc: DC resistances [Ω] in c and in e.
    emitter: names of the two resistors that may stand in e; terminals: what the trade calls e, b and c.
    most_frequency_hz: where the stage's model stops being true; None where the model states no such limit.
    """

    name: str
    roles: tuple[Role, ...]
    symbols: tuple[str, ...]
    solve: Solve
    supply_role: str | None
    assumptions: tuple[str, ...]
    bias: str = ""
    emitter: tuple[str, str] = ("RE", "RE2")
    terminals: tuple[str, str, str] = ("emitter", "base", "collector")
    most_frequency_hz: Callable[[Values], Array] | None = None
    range_text: str = "small signal; the stage's own frequency limit is not in the model"


def stage_branches(stage: Stage, b: str, c: str, e: str) -> tuple[Branch, ...]:
    """gm, rin, rout, cin, cfb and the bias resistance between nodes b, c, e; those between equal nodes vanish."""
    rows = [Branch("gm", "transconductance", (c, e, b, e), ("gm",), True)]
    if "rin" in stage.symbols:
        rows.append(Branch("rin", "R", (b, e), ("rin",)))
    rows += [
        Branch("rout", "R", (c, e), ("rout",)),
        Branch("cin", "C", (b, e), ("cin",)),
        Branch("cfb", "C", (b, c), ("cfb",)),
    ]
    if "cout" in stage.symbols:
        rows.append(Branch("cout", "C", (c, "gnd"), ("cout",)))
    if "rb" in stage.symbols:
        rows.append(Branch("rb", "R", (b, c if stage.bias == "collector" else "gnd"), ("rb",)))
    return tuple(row for row in rows if row.nodes[0] != row.nodes[1])


def outside_range(stage: Stage, values: Values, frequency_hz: Array) -> NDArray[np.bool_]:
    """Units above the stage's frequency limit."""
    if stage.most_frequency_hz is None:
        return np.zeros(np.shape(frequency_hz), dtype=bool)
    with np.errstate(invalid="ignore"):
        return np.asarray(frequency_hz > stage.most_frequency_hz(values))
