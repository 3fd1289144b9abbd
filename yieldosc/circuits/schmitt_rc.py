"""Schmitt-trigger inverter with R from output to input and C from input to ground.

f = 1/(R C ln(VTP (VCC − VTN)/(VTN (VCC − VTP)))) with an output that reaches both rails and no delay.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from yieldosc.circuits.circuit import Array, Circuit, Direct, Family, Option, Role, Values
from yieldosc.circuits.relaxation import NO_START_QUESTION, Swing, astable
from yieldosc.circuits.roles import capacitor, device, resistor, supply
from yieldosc.circuits.timer_astable import no_network

OPTIONS = (
    Option("thresholds", ("volts", "fractions"), "VTP and VTN in volts at the supply analysed, or as shares of VCC"),
)
SCHEMATIC = """
            ┌──────── R ────────┐
      ┬─────┴─┤▷○ Schmitt ├─────┴── output
      C
      │
     gnd
"""


def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    unit, word = ("V", "") if options["thresholds"] == "volts" else ("1", ", over VCC")
    return (
        resistor("R", "output to input"),
        capacitor("C", "input to ground"),
        device("VTP", unit, f"threshold of the rising input{word}", kind="ic"),
        device("VTN", unit, f"threshold of the falling input{word}", kind="ic"),
        device("td", "s", "delay at each edge", default=0.0, kind="ic"),
        supply("VCC"),
    )


def shares(values: Values, fractions: bool) -> tuple[Array, Array]:
    """VTP and VTN over VCC."""
    scale = np.float64(1.0) if fractions else values["VCC"]
    return np.asarray(values["VTP"] / scale), np.asarray(values["VTN"] / scale)


def solve(values: Values, fractions: bool) -> Direct:
    """Frequency, duty and latching."""
    high, low = shares(values, fractions)
    tau = np.asarray(values["R"] * values["C"])
    return astable(Swing(1.0, tau), Swing(0.0, tau), high, low, values["td"])


def design_frequency(values: Values, fractions: bool) -> Array:
    """The same without delay [Hz]; 0 where the thresholds leave no swing."""
    high, low = shares(values, fractions)
    with np.errstate(divide="ignore", invalid="ignore"):
        period = values["R"] * values["C"] * np.log(high * (1 - low) / (low * (1 - high)))
        return np.asarray(np.where(period > 0, 1 / period, 0.0))


def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
    """The circuit for the roles that are present."""
    fractions = options["thresholds"] == "fractions"
    return Circuit(
        name="schmitt_rc",
        title="Schmitt-trigger RC",
        options=dict(options),
        roles=tuple(r for r in roles(options) if r.name in present),
        branches=(),
        gain_symbol="",
        derive=no_network,
        design_frequency=lambda values: design_frequency(values, fractions),
        direct=lambda values, temperature_c: solve(values, fractions),
        closed_form="f = 1/(R·C·ln(VTP·(VCC − VTN)/(VTN·(VCC − VTP)))) for td = 0",
        range_text="output that reaches both rails; latches with thresholds outside 0 to VCC or VTP below VTN",
        schematic=SCHEMATIC,
        assumptions=(
            NO_START_QUESTION,
            "output resistance and input current left out; thresholds in volts hold at the supply analysed",
        ),
        supply_role="VCC",
        recipe=("schmitt_rc", tuple(sorted(options.items())), tuple(sorted(present))),
    )


FAMILY = Family(name="schmitt_rc", title="Schmitt-trigger RC", options=OPTIONS, roles=roles, build=build)
