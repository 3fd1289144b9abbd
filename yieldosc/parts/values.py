"""Value of one parameter in n units at one corner, from the quantiles of its causes.

The part that does not change between corners is computed once per unit: `initial_values`, then `at_corner` per corner.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from yieldosc.parts.parameter import Parameter

Array = NDArray[np.float64]
HOURS_PER_YEAR = 8766.0  # Julian year
LAW = "law "


def variables(parameter: Parameter) -> tuple[str, ...]:
    """Names of the causes that differ between units: "initial", "law slope", "solder", "drift"."""
    causes = []
    if parameter.high > parameter.low and parameter.shape.text != "fixed":
        causes.append("initial")
    if parameter.law is not None:
        causes += [LAW + name for name in parameter.law.coefficients]
    if parameter.solder[1] > parameter.solder[0]:
        causes.append("solder")
    if parameter.drift[1] > parameter.drift[0]:
        causes.append("drift")
    return tuple(causes)


def initial_values(parameter: Parameter, u: Mapping[str, Array]) -> Array:
    """Values (n,) at 25 °C before soldering, or a 0-d typical value where units do not differ."""
    if "initial" not in u:
        return np.asarray(parameter.typical)
    return parameter.shape.initial(parameter.low, parameter.typical, parameter.high, u["initial"])


def at_corner(
    parameter: Parameter, initial: Array, u: Mapping[str, Array], temperature_c: float, age_years: float
) -> Array:
    """Values (n,) at a temperature [°C] and an age [years, 0 or the stated life]."""
    value = initial
    change = _law_change(parameter, u, temperature_c)
    absolute = parameter.law is not None and parameter.law.absolute
    if change is not None and not absolute:
        value = value * (1 + change)
    if parameter.solder != (0.0, 0.0):
        value = value * (1 + _between(parameter.solder, u.get("solder")))
    if age_years:
        if parameter.drift != (0.0, 0.0):
            value = value * (1 + _between(parameter.drift, u.get("drift")))
        value = value * _aged(parameter, age_years)
    return value + change if change is not None and absolute else value


def _law_change(parameter: Parameter, u: Mapping[str, Array], temperature_c: float) -> Array | float | None:
    if parameter.law is None or temperature_c == 25.0:
        return None  # every law is zero at 25 °C
    drawn = {name: u.get(LAW + name, np.asarray(0.5)) for name in parameter.law.coefficients}
    return parameter.law.change(temperature_c, drawn)


def _between(bounds: tuple[float, float], u: Array | None) -> Array | float:
    low, high = bounds
    return (low + high) / 2 if u is None else low + (high - low) * u


def _aged(parameter: Parameter, age_years: float) -> float:
    if parameter.ageing is None:
        return 1.0
    decades = math.log10(max(age_years * HOURS_PER_YEAR / parameter.ageing.reference_h, 1.0))
    return 1.0 - parameter.ageing.per_decade * decades


def nominal_value(parameter: Parameter, temperature_c: float = 25.0, age_years: float = 0.0) -> float:
    """The value of the nominal unit: typical initial value, middle of every other cause."""
    return float(at_corner(parameter, np.asarray(parameter.typical), {}, temperature_c, age_years))
