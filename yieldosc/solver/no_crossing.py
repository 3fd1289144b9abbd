"""Whether a circuit can oscillate at all near its design frequency: a user's own table is refused where it cannot."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits.circuit import Circuit
from yieldosc.solver.network_evaluator import NetworkEvaluator


def no_crossing_reason(circuit: Circuit, nominal: Mapping[str, float], temperature_c: float = 25.0) -> str | None:
    """Why the unit with these values has no gain at which it could oscillate; None where there is one.

    nominal: role → SI value, every present role. One evaluation of one unit.
    """
    if circuit.direct is not None:
        return None
    arrays = {name: np.array([float(value)]) for name, value in nominal.items()}
    if NetworkEvaluator(circuit, nominal).crosses(arrays, temperature_c)[0]:
        return None
    gain = next(row.name for row in circuit.branches if row.gain_element)
    design_hz = float(np.ravel(circuit.design_frequency(arrays))[0])
    return (
        f"at the nominal values no gain of {gain} brings the circuit to oscillation near the design frequency of "
        f"{design_hz:.6g} Hz; check the branch table (the sense of the gain element's nodes first) and the frequency"
    )
