"""A square wave made into a sine by a low-pass ladder: fundamental, distortion, phase.

The square comes from a given source (F, D, V) or from one of the circuits that make one.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits import schmitt_rc, timer_astable
from yieldosc.circuits.circuit import Array, Circuit, Direct, Family, Option, Role, Values
from yieldosc.circuits.filtering import HIGHEST_HARMONIC, Section, filtered
from yieldosc.circuits.relaxation import NO_START_QUESTION
from yieldosc.circuits.roles import capacitor, coil_resistance, inductor, resistor
from yieldosc.circuits.timer_astable import no_network

OPTIONS = (
    Option("source", ("given", "timer_astable", "schmitt_rc"), "where the square wave comes from"),
    Option("filter", ("rc", "lc"), "each section: series R, shunt C; or series L, shunt C"),
    Option("sections", ("1", "2", "3", "4"), "number of sections"),
    *schmitt_rc.OPTIONS,
)
FREQUENCY = Role("F", "F", "Hz", "any", "frequency of the square wave")
DUTY = Role("D", "D", "1", "any", "share of a period at the high level", 0.5)
HEIGHT = Role("V", "V", "V", "any", "height of the square wave, low to high level")
ENDS = (
    resistor("ROUT", "output resistance of the square wave's source", optional=True),
    resistor("RLOAD", "load at the filter's output", optional=True),
)
SCHEMATIC = """
      square ──[ROUT]──R1──┬──R2──┬──[…]──┬── sine      lc: L1, L2, … in place of R1, R2, …
                           C1     C2      [RLOAD]
                          gnd    gnd      gnd
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    rows = list(_source_roles(options))
    for i in range(1, int(options["sections"]) + 1):
        if options["filter"] == "rc":
            rows.append(resistor(f"R{i}", f"series resistor of section {i}"))
        else:
            rows += [inductor(f"L{i}", f"series coil of section {i}"), coil_resistance(f"L{i}_dcr", f"L{i}")]
        rows.append(capacitor(f"C{i}", f"shunt capacitor of section {i}"))
    return (*rows, *ENDS)


def _source_roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    if options["source"] == "timer_astable":
        return (*timer_astable.roles({}), HEIGHT)
    if options["source"] == "schmitt_rc":
        return schmitt_rc.roles(options)
    return (FREQUENCY, DUTY, HEIGHT)


def _square(options: Mapping[str, str], values: Values, temperature_c: float) -> tuple[Direct, Array]:
    """The square wave's frequency and duty, and its height [V]."""
    if options["source"] == "timer_astable":
        return timer_astable.solve(values, temperature_c), values["V"]
    if options["source"] == "schmitt_rc":
        return schmitt_rc.solve(values, options["thresholds"] == "fractions"), values["VCC"]
    given = Direct(
        frequency_hz=values["F"], latches=np.zeros(np.shape(values["F"]), dtype=bool), duty=values["D"]
    )
    return given, values["V"]


def _sections(options: Mapping[str, str], values: Values) -> list[Section]:
    zero = np.float64(0.0)
    rows = []
    for i in range(1, int(options["sections"]) + 1):
        if options["filter"] == "rc":
            rows.append(Section(values[f"R{i}"], zero, values[f"C{i}"]))
        else:
            rows.append(Section(values.get(f"L{i}_dcr", zero), values[f"L{i}"], values[f"C{i}"]))
    return rows


def _solve(options: Mapping[str, str], values: Values, temperature_c: float) -> Direct:
    square, height = _square(options, values, temperature_c)
    duty = values["D"] if square.duty is None else square.duty
    sine = filtered(
        _sections(options, values),
        values.get("ROUT", np.float64(0.0)),
        values.get("RLOAD"),
        frequency_hz=square.frequency_hz,
        duty=duty,
        height_v=height,
    )
    return Direct(
        frequency_hz=square.frequency_hz,
        latches=square.latches,
        duty=duty,
        amplitude_v=sine.amplitude_v,
        distortion=sine.distortion,
        phase_deg=sine.phase_deg,
    )


def _design_frequency(options: Mapping[str, str], values: Values) -> Array:
    if options["source"] == "timer_astable":
        return timer_astable.design_frequency(values)
    if options["source"] == "schmitt_rc":
        return schmitt_rc.design_frequency(values, options["thresholds"] == "fractions")
    return np.asarray(values["F"])


def option_problems(options: Mapping[str, str]) -> list[str]:
    """Thresholds belong to one source only."""
    if options["source"] != "schmitt_rc" and options["thresholds"] != "volts":
        return [f"thresholds belong to source = schmitt_rc; with source = {options['source']} leave the option out"]
    return []


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The circuit for the roles that are present."""
    count = int(options["sections"])
    source = {"given": "a square wave", "timer_astable": "a timer", "schmitt_rc": "a Schmitt trigger"}
    return Circuit(
        name="square_to_sine",
        title=f"Sine from {source[options['source']]} by {count} {options['filter'].upper()} "
        f"section{'s' if count > 1 else ''}",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=(),
        gain_symbol="",
        derive=no_network,
        design_frequency=lambda values: _design_frequency(options, values),
        direct=lambda values, temperature_c: _solve(options, values, temperature_c),
        closed_form="harmonic n of a square wave: (2V/nπ)·|sin(nπD)|, then the ladder's transfer at n·f",
        range_text=f"levels that settle in each half period; distortion counts harmonics 2 to {HIGHEST_HARMONIC}",
        schematic=SCHEMATIC,
        assumptions=(
            NO_START_QUESTION,
            "the source's output resistance is the same at both levels; its edges are steep",
        ),
        supply_role="VCC" if options["source"] == "schmitt_rc" else None,
        recipe=("square_to_sine", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = Family(
    name="square_to_sine",
    title="Square wave to sine",
    options=OPTIONS,
    roles=roles,
    build=build,
    option_problems=option_problems,
)
