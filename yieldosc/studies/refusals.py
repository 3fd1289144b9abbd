"""Studies that no run could answer: refused before anything is simulated."""

from __future__ import annotations

from yieldosc.circuits.own_circuit import NAME
from yieldosc.errors import Place, refusal
from yieldosc.population import Population
from yieldosc.solver.no_crossing import no_crossing_reason
from yieldosc.studies.nominal import nominal_values, reference_corner
from yieldosc.study import Study


def refuse_without_crossing(study: Study) -> None:
    """InputError for a user's own branch table that no gain brings to oscillation at its nominal values.

    Built-in circuits pass: their tables can oscillate, and a unit that cannot is data.
    """
    if study.circuit.name != NAME:
        return
    corner = reference_corner(study)
    reason = no_crossing_reason(study.circuit, nominal_values(Population.of(study), corner), corner.temperature_c)
    if reason is not None:
        raise refusal("no-crossing", reason[0].upper() + reason[1:], Place("Circuit"))
