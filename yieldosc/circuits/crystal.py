"""The quartz unit: from data-sheet figures to its motional arms.

fs = FL/√(1 + Cm/(C0 + CL)), Lm = 1/((2πfs)² Cm), series resistance ESR; a sheet that gives the resistance at load
means R_L = ESR (1 + C0/CL)² (Petermann pull page; AN2867 rev 18 p. 15 as quoted; terms of IEC 60122-1, not read).
A second arm (Cm3, ESR3 at F3, by default three times fs) is the third overtone.
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
OVERTONE_ROLES = (
    Role("Cm3", "Cm3", "F", "crystal", "motional capacitance of the third overtone", None, True, main=False),
    Role("ESR3", "ESR3", "Ω", "crystal", "series resistance of the third overtone", None, True, main=False),
    Role("F3", "F3", "Hz", "crystal", "series frequency of the third overtone; absent: 3·fs", None, True, main=False),
)
ARM = ("Lm", "Cm", "ESR")  # the symbols of the motional arm that the circuit is meant to run on
ESR_ASSUMPTION = "ESR is the series resistance; a data sheet's resistance at load is ESR·(1 + C0/CL)²"
OVERTONE_ASSUMPTION = "the third overtone is a second motional arm; other overtones and spurious modes are left out"
RANGE_TEXT = "small-signal start-up; crystal modes other than the motional arms given are not in the model"


def crystal_problems(present: frozenset[str]) -> list[str]:
    """What is wrong with the frequency roles and the overtone arm."""
    problems = []
    if "FS" in present:
        if "FL" in present:
            problems.append("FS and FL both given: keep one")
    else:
        if "FL" not in present:
            problems.append("the crystal has no frequency: give FL with its load CL, or FS")
        if "CL" not in present:
            problems.append("FL needs the load capacitance CL that the data sheet states")
    overtone = {"Cm3", "ESR3", "F3"} & present
    if overtone and not {"Cm3", "ESR3"} <= present:
        missing = " and ".join(name for name in ("Cm3", "ESR3") if name not in present)
        extra = ", ".join(sorted(overtone))
        problems.append(f"the overtone's arm needs Cm3 and ESR3: give {missing}, or remove {extra}")
    return problems


def series_frequency_hz(values: Values) -> Array:
    """fs of the motional arm [Hz]."""
    if "FS" in values:
        return np.asarray(values["FS"])
    return np.asarray(values["FL"] / np.sqrt(1 + values["Cm"] / (values["C0"] + values["CL"])))


def motional_inductance_h(frequency_hz: Array, capacitance_f: Array) -> Array:
    """Lm = 1/((2πfs)² Cm)."""
    return np.asarray(1 / ((2 * np.pi * frequency_hz) ** 2 * capacitance_f))


def crystal_symbols(values: Values) -> dict[str, Array]:
    """Symbols of the motional arms and of C0."""
    fs = series_frequency_hz(values)
    symbols = {
        "Lm": motional_inductance_h(fs, values["Cm"]),
        "Cm": values["Cm"],
        "ESR": values["ESR"],
        "C0": values["C0"],
    }
    if "Cm3" in values:
        overtone = values["F3"] if "F3" in values else 3 * fs
        symbols |= {
            "Lm3": motional_inductance_h(overtone, values["Cm3"]),
            "Cm3": values["Cm3"],
            "ESR3": values["ESR3"],
        }
    return symbols


def crystal_branches(plus: str, minus: str, present: frozenset[str] = frozenset()) -> tuple[Branch, ...]:
    """Motional arms and shunt capacitance between two nodes."""
    rows = [Branch("crystal", "crystal", (plus, minus), ARM), Branch("C0", "C", (plus, minus), ("C0",))]
    if "Cm3" in present:
        rows.append(Branch("overtone", "crystal", (plus, minus), ("Lm3", "Cm3", "ESR3")))
    return tuple(rows)


def crystal_assumptions(present: frozenset[str]) -> tuple[str, ...]:
    """What the crystal's model takes for granted."""
    return (ESR_ASSUMPTION, OVERTONE_ASSUMPTION) if "Cm3" in present else (ESR_ASSUMPTION,)


def crystal_band(values: Values) -> tuple[Array, Array]:
    """The intended mode lies within ± Cm/C0 of the series frequency, in |ln f|."""
    return series_frequency_hz(values), np.asarray(values["Cm"] / values["C0"])


def loaded_frequency_hz(values: Values, load_f: Array) -> Array:
    """fs √(1 + Cm/(C0 + C)) with the load capacitance that the board presents."""
    return np.asarray(series_frequency_hz(values) * np.sqrt(1 + values["Cm"] / (values["C0"] + load_f)))
