"""The quartz unit: from data-sheet figures to its motional arm.

fs = FL/√(1 + Cm/(C0 + CL)), Lm = 1/((2πfs)² Cm), series resistance ESR; a sheet that gives the resistance at load
means R_L = ESR (1 + C0/CL)² (Petermann pull page; AN2867 rev 18 p. 15 as quoted; terms of IEC 60122-1, not read).
"""

from __future__ import annotations

import numpy as np

from yieldosc.circuits.circuit import Array, Branch, Role, Values

CRYSTAL_ROLES = (
    Role("FL", "FL", "Hz", "crystal", "frequency at the load CL", None, True),
    Role("CL", "CL", "F", "any", "load capacitance that FL is specified at", None, True, condition=True, main=False),
    Role("FS", "FS", "Hz", "crystal", "series frequency, instead of FL and CL", None, True),
    Role("Cm", "Cm", "F", "crystal", "motional capacitance", main=False),
    Role("C0", "C0", "F", "crystal", "shunt capacitance", main=False),
    Role("ESR", "ESR", "Ω", "crystal", "series resistance (not the resistance at load)", main=False),
)


def crystal_problems(present: frozenset[str]) -> list[str]:
    """What is wrong with the frequency roles."""
    if "FS" in present:
        return ["FS and FL both given: keep one"] if "FL" in present else []
    problems = []
    if "FL" not in present:
        problems.append("the crystal has no frequency: give FL with its load CL, or FS")
    if "CL" not in present:
        problems.append("FL needs the load capacitance CL that the data sheet states")
    return problems


def series_frequency_hz(values: Values) -> Array:
    """fs of the motional arm [Hz]."""
    if "FS" in values:
        return np.asarray(values["FS"])
    return np.asarray(values["FL"] / np.sqrt(1 + values["Cm"] / (values["C0"] + values["CL"])))


def crystal_symbols(values: Values) -> dict[str, Array]:
    """Symbols of the motional arm and of C0."""
    fs = series_frequency_hz(values)
    motional_l = 1 / ((2 * np.pi * fs) ** 2 * values["Cm"])
    return {"Lm": motional_l, "Cm": values["Cm"], "ESR": values["ESR"], "C0": values["C0"]}


def crystal_branches(plus: str, minus: str) -> tuple[Branch, ...]:
    """Motional arm and shunt capacitance between two nodes."""
    return (
        Branch("crystal", "crystal", (plus, minus), ("Lm", "Cm", "ESR")),
        Branch("C0", "C", (plus, minus), ("C0",)),
    )


def crystal_band(values: Values) -> tuple[Array, Array]:
    """The intended mode lies within ± Cm/C0 of the series frequency, in |ln f|."""
    return series_frequency_hz(values), np.asarray(values["Cm"] / values["C0"])


def loaded_frequency_hz(values: Values, load_f: Array) -> Array:
    """fs √(1 + Cm/(C0 + C)) with the load capacitance that the board presents."""
    return np.asarray(series_frequency_hz(values) * np.sqrt(1 + values["Cm"] / (values["C0"] + load_f)))

