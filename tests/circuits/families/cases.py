"""Options and plausible values of every family, each option at least once: what the agreement tests run on."""

from __future__ import annotations

from tests.samples import BJT, COIL, FEED, JFET, QUARTZ, SAMPLES, SECTIONS, TANK

Case = tuple[str, dict[str, str], dict[str, float]]

MOSFET = {"gfs": 5e-3, "Ciss": 5e-12, "Crss": 1e-12, "RS": 330.0}
BACK = {"VCC": 5.0, "RB1": 180e3, "hFE": 150.0}
FOUR = {**SECTIONS, "R4": 10e3, "C4": 10e-9}
AMPLIFIER = {"RIN": 100e3, "RF": 4.7e6, "GBW": 10e6, "RO": 75.0}
COILS = {"R1": 1e3, "R2": 1e3, "R3": 1e3, "L1": 0.1, "L2": 0.1, "L3": 0.1, "L2_dcr": 5.0}
AUDIO = {"VCC": 9.0, "RB1": 100e3, "RB2": 22e3, "RE": 1e3, "hFE": 200.0, "CE": 100e-6}
OVERTONE = {"Cm3": 2e-15, "ESR3": 90.0}

PHASE_SHIFT: list[Case] = [
    ("phase_shift", {}, {**SECTIONS, **AMPLIFIER}),
    ("phase_shift", {"sections": "4"}, {**FOUR, **AMPLIFIER, "RF": 3e6}),
    ("phase_shift", {"ladder": "lead"}, {**SECTIONS, "RF": 330e3, "GBW": 10e6, "RO": 75.0}),
    ("phase_shift", {"ladder": "lead", "sections": "4"}, {**FOUR, "RF": 200e3, "GBW": 10e6}),
    ("phase_shift", {"ladder": "rl"}, {**COILS, **AMPLIFIER}),
    ("phase_shift", {"ladder": "rl", "sections": "4"}, {**COILS, "R4": 1e3, "L4": 0.1, **AMPLIFIER}),
    ("phase_shift", {"buffered": "yes"}, {**SECTIONS, **AMPLIFIER, "RF": 900e3}),
    ("phase_shift", {"ladder": "lead", "buffered": "yes"}, {**SECTIONS, "RF": 90e3, "GBW": 10e6}),
    ("phase_shift", {"ladder": "lead", "buffered": "yes"}, {**SECTIONS, **AMPLIFIER, "RF": 900e3}),
    ("phase_shift", {"ladder": "rl", "buffered": "yes"}, {**COILS, **AMPLIFIER, "RF": 900e3}),
    ("phase_shift", {"ladder": "lead", "stage": "bjt"}, {**SECTIONS, **AUDIO, "RC": 4.7e3}),
    ("phase_shift", {"ladder": "lead", "stage": "bjt", "sections": "4"}, {**FOUR, **AUDIO, "RC": 4.7e3, "RL": 50e3}),
    (
        "phase_shift",
        {"stage": "bjt", "bias": "collector"},
        {"R1": 1e3, "R2": 1e3, "R3": 1e3, "C1": 1e-8, "C2": 1e-8, "C3": 1e-8, "CC": 1e-6, "RC": 1e3, **BACK},
    ),
    (
        "phase_shift",
        {"ladder": "lead", "stage": "jfet"},
        {"R1": 1e6, "R2": 1e6, "C1": 1e-10, "C2": 1e-10, "C3": 1e-10, "RC": 8.2e3, "CE": 1e-5}
        | {"VDD": 24.0, "IDSS": 10e-3, "VGSoff": 3.0, "RS": 1e3},
    ),
    (
        "phase_shift",
        {"stage": "mosfet", "sections": "4"},
        {**FOUR, "CC": 1e-6, "RC": 10e3, **MOSFET, "RS2": 1e3, "CE": 1e-5},
    ),
]
OTHERS: list[Case] = [
    ("twin_t", {}, {**SECTIONS, "R3": 5.1e3, "C3": 20e-9, "RF": 10e3, "RG": 1e3, "GBW": 1e6, "CIN": 5e-12}),
    ("twin_t", {}, {**SECTIONS, "R3": 5.0e3, "C3": 20e-9, "RF": 10e3, "RG": 1e3}),
    ("quadrature", {}, {**SECTIONS, "R2": 11e3, "GBW": 1e6}),
    ("quadrature", {}, {**SECTIONS, "R2": 11e3}),
]
LC: list[Case] = [
    ("colpitts", {"stage": "jfet"}, {**JFET, **TANK, "CC": 10e-9, "LCH": 1e-3, "CE": 1e-7}),
    ("colpitts", {"stage": "jfet", "ground": "base"}, {**JFET, **TANK, "CB": 10e-9, "CP": 22e-12, "RL": 10e3}),
    ("colpitts", {"stage": "jfet", "ground": "collector"}, {**JFET, **TANK, "CP": 22e-12}),
    ("colpitts", {"stage": "mosfet", "ground": "collector"}, {**MOSFET, **TANK, "C3": 330e-12, "CP": 22e-12}),
    ("colpitts", {"stage": "mosfet"}, {**MOSFET, **TANK, "C3": 330e-12, "RC": 2e3, "CP": 22e-12}),
    ("colpitts", {"stage": "opamp"}, {**TANK, "RO": 50.0, "RIN": 1e4, "RF": 100e3, "GBW": 1e9, "CP": 22e-12}),
    ("colpitts", {"stage": "opamp"}, {**TANK, "RO": 50.0, "RIN": 1e4, "RF": 100e3, "C3": 470e-12}),
    ("hartley", {}, {**BJT, **COIL, "CC": 1e-9, "CE": 1e-7, "L1_dcr": 0.5, "CST": 3e-12}),
    ("hartley", {"bias": "collector"}, {**BACK, **COIL, "k": 0.0, "CC": 1e-9}),
    ("hartley", {"feed": "shunt"}, {**BJT, **COIL, "CC": 1e-9, "CS": 1e-9, **FEED, "RL": 10e3, "L2_dcr": 0.5}),
    ("hartley", {"ground": "base"}, {**BJT, **COIL, "CT": 1e-9, "CB": 1e-8, "RL": 10e3}),
    ("hartley", {"ground": "collector"}, {**BJT, **COIL, "CC": 1e-9, "CE": 1e-7, "RL": 10e3}),
    ("hartley", {"ground": "collector", "stage": "mosfet"}, {**COIL, "CC": 1e-9, "gfs": 5e-3}
     | {"Ciss": 5e-12, "Crss": 1e-12}),
    ("hartley", {"stage": "jfet"}, {**JFET, **COIL, "CC": 1e-9, "CE": 1e-7, "RL": 10e3}),
]  # fmt: skip
CRYSTAL: list[Case] = [
    ("pierce", {}, {**QUARTZ, **OVERTONE, "C1": 27e-12, "C2": 22e-12, "RF": 1e6, "gm": 5e-3}),
    (
        "pierce",
        {},
        {**QUARTZ, **OVERTONE, "C1": 27e-12, "C2": 22e-12, "RF": 1e6, "gm": 5e-3, "LTRAP": 1e-6, "CTRAP": 44e-12}
        | {"LTRAP_dcr": 1.0},
    ),
    ("pierce", {"stage": "bjt"}, {**QUARTZ, **BJT, "C1": 100e-12, "C2": 100e-12, "RC": 1e3, "CE": 1e-8}),
    (
        "pierce",
        {"stage": "bjt", "bias": "collector"},
        {**QUARTZ, **BACK, "C1": 100e-12, "C2": 100e-12, "RC": 1e3, "RS_series": 220.0},
    ),
    ("pierce", {"stage": "jfet"}, {**QUARTZ, **JFET, "C1": 33e-12, "C2": 33e-12, "RC": 1e3, "CE": 1e-8, "CX": 1e-12}),
    ("pierce", {"stage": "mosfet"}, {**QUARTZ, **MOSFET, "C1": 33e-12, "C2": 33e-12, "LCH": 1e-3, "RL": 20e3}),
    ("crystal_colpitts", {}, {**QUARTZ, **BJT, **OVERTONE, "C1": 100e-12, "C2": 100e-12, "CT": 100e-12, "RL": 10e3}),
    ("crystal_colpitts", {"stage": "jfet"}, {**QUARTZ, **JFET, "C1": 47e-12, "C2": 47e-12}),
    ("crystal_colpitts", {"stage": "mosfet"}, {**QUARTZ, **MOSFET, "C1": 47e-12, "C2": 47e-12}),
    (
        "crystal_common_base",
        {},
        {**QUARTZ, **BJT, "L": 2.7e-6, "L_dcr": 1.0, "C1": 100e-12, "C2": 470e-12, "RL": 5e3, "CST": 3e-12},
    ),
    (
        "crystal_common_base",
        {"crystal": "feedback"},
        {**QUARTZ, **BJT, **OVERTONE, "L": 4.7e-6, "C1": 100e-12, "C2": 470e-12, "CB": 10e-9, "RL": 5e3},
    ),
]
_LISTED = PHASE_SHIFT + OTHERS + LC + CRYSTAL
_NAMED = {name for name, _, _ in _LISTED}
_MORE: list[Case] = [  # a circuit with no cases of its own here: its sample row
    (name, sample.options, sample.values)
    for name, sample in SAMPLES.items()
    if name not in _NAMED and name not in ("wien_bridge", "timer_astable", "schmitt_rc", "square_to_sine")
]
ALL = _LISTED + _MORE
