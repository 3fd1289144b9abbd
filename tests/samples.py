"""One row of plausible values per circuit and per choice of parts: what the battery and the agreement tests run on.

To add a circuit: one `Sample` in SAMPLES (every required role and a few optional ones), nothing else.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, field
from itertools import product


@dataclass(frozen=True)
class Sample:
    """Options and role values [SI units] of a unit that starts at 25 °C. level_ohm only scales the tests' arithmetic.

    ideal: changes under which the closed form becomes exact (None removes a role); tolerance: how near it then comes.
    """

    options: dict[str, str] = field(default_factory=dict)
    values: dict[str, float] = field(default_factory=dict)
    level_ohm: float = 1e3
    ideal: dict[str, float | None] = field(default_factory=dict)
    tolerance: float = 1e-6


WIEN = {"R1": 10e3, "C1": 10e-9, "R2": 10e3, "C2": 10e-9, "RF": 22e3, "RG": 10e3}
BJT = {"VCC": 5.0, "RB1": 22e3, "RB2": 10e3, "RE": 680.0, "hFE": 150.0}
TANK = {"L": 4.7e-6, "L_dcr": 0.6, "C1": 470e-12, "C2": 680e-12}
QUARTZ = {"FL": 8e6, "CL": 18e-12, "Cm": 15e-15, "C0": 4e-12, "ESR": 40.0}
WATCH = {"FL": 32768.0, "CL": 12.5e-12, "Cm": 3e-15, "C0": 1.3e-12, "ESR": 40e3}
SECTIONS = {"R1": 10e3, "R2": 10e3, "R3": 10e3, "C1": 10e-9, "C2": 10e-9, "C3": 10e-9}
JFET = {"VDD": 9.0, "IDSS": 6e-3, "VGSoff": 2.5, "RS": 470.0}
COIL = {"L1": 8e-6, "L2": 2e-6, "k": 0.3, "C": 220e-12}
FEED = {"RC": 820.0, "LCH": 1e-3, "LCH_dcr": 12.0}

SAMPLES: dict[str, Sample] = {
    "wien_bridge": Sample(
        values={**WIEN, "GBW": 1e6, "RO": 75.0, "CIN": 5e-12},
        level_ohm=1e4,
        ideal={"GBW": None, "RO": None},
        tolerance=1e-12,
    ),
    "colpitts": Sample(
        options={"ground": "base"},
        values={**BJT, **TANK, "CB": 10e-9, "RL": 10e3, "CST": 3e-12},
        level_ohm=100.0,
        ideal={
            "CB": 1.0,
            "L_dcr": 1e-12,
            "RL": 1e12,
            "CST": 1e-21,
            "RE": 1e9,
            "hFE": 1e9,
            "VA": 1e9,
            "Cob": 1e-22,
            "fT": 1e18,
            "VCC": 5e6,
            "RB1": 1e3,
            "RB2": 1e3,
        },
        tolerance=1e-6,
    ),
    "pierce": Sample(
        values={**QUARTZ, "C1": 27e-12, "C2": 27e-12, "RF": 1e6, "gm": 5e-3, "CX": 1e-12},
        ideal={"ESR": 1e-6, "RF": 1e15, "Rout": 1e15, "gm": 1e-6},
        tolerance=1e-9,
    ),
    "phase_shift": Sample(
        values={**SECTIONS, "R2": 12e3, "C3": 8.2e-9, "RIN": 100e3, "RF": 4.7e6, "GBW": 10e6, "RO": 75.0},
        level_ohm=1e4,
        ideal={"GBW": None, "RO": None},
        tolerance=1e-12,
    ),
    "twin_t": Sample(
        values={**SECTIONS, "R3": 5.1e3, "C3": 20e-9, "RF": 10e3, "RG": 1e3, "GBW": 1e6, "CIN": 5e-12},
        level_ohm=1e4,
        ideal={"R3": 5e3, "GBW": None, "CIN": None},
        tolerance=1e-12,
    ),
    "quadrature": Sample(
        values={**SECTIONS, "R2": 11e3, "GBW": 1e6},
        level_ohm=1e4,
        ideal={"GBW": None},
        tolerance=1e-12,
    ),
    "hartley": Sample(
        options={"stage": "jfet"},
        values={**JFET, **COIL, "CC": 1e-9, "CE": 100e-9, "L1_dcr": 0.5, "RL": 10e3},
        ideal={"L1_dcr": None, "RL": None, "CC": 1.0, "RG": 1e15, "gos": 1e-15, "Ciss": 2e-21, "Crss": 1e-21},
        tolerance=1e-9,
    ),
    "crystal_colpitts": Sample(
        values={**QUARTZ, **BJT, "C1": 100e-12, "C2": 100e-12, "CT": 100e-12, "RL": 10e3},
        ideal={"ESR": 1e-6, "RE": 1e7, "RL": 1e12, "RB1": 1e8, "RB2": 1e8, "hFE": 1e9, "VA": 1e9, "fT": 1e15},
        tolerance=1e-8,
    ),
    "crystal_common_base": Sample(
        options={"crystal": "feedback"},
        values={**QUARTZ, **BJT, **TANK, "C1": 100e-12, "C2": 470e-12, "CB": 10e-9, "RL": 5e3},
        ideal={"Cm": 1e-21},
        tolerance=1e-10,
    ),
    "timer_astable": Sample(
        values={"RA": 2.2e3, "RB": 4.7e3, "C": 22e-9, "Rd": 12.0, "td": 100e-9},
        ideal={"Rd": None, "td": None},
        tolerance=1e-12,
    ),
    "schmitt_rc": Sample(
        values={"R": 10e3, "C": 1e-9, "VTP": 2.9, "VTN": 1.9, "VCC": 5.0, "td": 20e-9},
        ideal={"td": None},
        tolerance=1e-12,
    ),
    "square_to_sine": Sample(
        options={"source": "timer_astable", "sections": "2"},
        values={"RA": 2.2e3, "RB": 4.7e3, "C": 22e-9, "td": 100e-9, "V": 5.0}
        | {"R1": 1e3, "C1": 47e-9, "R2": 10e3, "C2": 4.7e-9, "ROUT": 50.0, "RLOAD": 1e6},
        ideal={"td": None},
        tolerance=1e-12,
    ),
}


def wien_choices() -> Iterator[tuple[dict[str, str], dict[str, float]]]:
    """Every combination of the Wien bridge's optional roles."""
    stabilisers = ({}, {"RS_start": 120.0, "RS_full": 480.0}, {"RF_full": 19e3})
    for gbw, ro, cin, held in product((None, 1e6), (None, 75.0), (None, 12e-12), stabilisers):
        extra = {"GBW": gbw, "RO": ro, "CIN": cin, **held}
        yield {}, {**WIEN, **{k: v for k, v in extra.items() if v is not None}}


def colpitts_choices() -> Iterator[tuple[dict[str, str], dict[str, float]]]:
    """Every option of the Colpitts with every set of optional roles that it accepts."""
    lone = {"VCC": 5.0, "RB1": 470e3, "hFE": 150.0}
    back = {"VCC": 5.0, "RB1": 180e3, "hFE": 150.0}
    emitters = ({"RE": 680.0}, {"RE": 470.0, "CE": 22e-9}, {"RE": 47.0, "RE2": 560.0, "CE": 22e-9}, {})
    feeds = ({"RC": 820.0}, {"LCH": 1e-3, "LCH_dcr": 12.0}, {**FEED, "RL": 10e3, "CST": 3e-12}, {"LCH": 1e-3})
    tanks = ({"CC": 10e-9}, {"C3": 150e-12})
    for bias, tank, feed, emitter in product(("divider", "collector"), tanks, feeds, emitters):
        base = back if bias == "collector" else ({k: v for k, v in BJT.items() if k != "RE"} if emitter else lone)
        yield {"ground": "emitter", "bias": bias}, {**base, **TANK, **tank, **feed, **emitter}
    for bias, c3, feed, emitter in product(
        ("divider", "collector"), ({}, {"C3": 150e-12}), ({}, *feeds), ({"RE": 680.0}, {"RE": 330.0, "RE2": 330.0})
    ):
        if c3 and not feed:
            continue
        base = {**(back if bias == "collector" else BJT), **TANK, "CB": 10e-9}
        yield {"ground": "base", "bias": bias}, {**base, **c3, **feed, **emitter}
    for tank, load, emitter in product(tanks, ({}, {"RL": 10e3}), ({"RE": 680.0}, {"RE": 330.0, "RE2": 330.0})):
        yield {"ground": "collector"}, {**BJT, **TANK, **tank, **load, **emitter}


def pierce_choices() -> Iterator[tuple[dict[str, str], dict[str, float]]]:
    """The unbuffered inverter with every set of optional roles, and watch crystals."""
    for series, across, stray, by_series in product((None, 220.0), (None, 1e-12), (None, 3e-12), (False, True)):
        extra = {"RS_series": series, "CX": across, "CS1": stray, "CS2": stray}
        crystal = {k: v for k, v in QUARTZ.items() if not by_series or k not in ("FL", "CL")}
        if by_series:
            crystal["FS"] = 7.997e6
        values = {**crystal, "C1": 27e-12, "C2": 22e-12, "RF": 1e6, "gm": 5e-3}
        yield {}, {**values, **{k: v for k, v in extra.items() if v is not None}}
    watch = {**WATCH, "C1": 15e-12, "C2": 15e-12, "RF": 10e6, "gm": 20e-6, "Rout": 1e6}
    yield {}, watch
    yield {}, {**watch, "RS_series": 330e3, "CX": 0.5e-12}


CHOICES = {"wien_bridge": wien_choices, "colpitts": colpitts_choices, "pierce": pierce_choices}
