"""Numbers for cells: a factor and a prefixed SI unit that suit a value, so that a column reads "10.02" under "nF"."""

from __future__ import annotations

import math

PREFIXES = {-15: "f", -12: "p", -9: "n", -6: "µ", -3: "m", 0: "", 3: "k", 6: "M", 9: "G"}
UNSCALED = ("1", "°C", "years", "")


def scaled_unit(typical: float, si_unit: str) -> tuple[float, str]:
    """(factor, SI unit with prefix): value × factor is in that SI unit."""
    if si_unit in UNSCALED or not typical or not math.isfinite(typical):
        return 1.0, "" if si_unit == "1" else si_unit
    power = math.floor(math.log10(abs(typical)) / 3 + 1e-12) * 3
    power = min(max(power, -15), 9)
    return 10.0**-power, f"{PREFIXES[power]}{si_unit}"


def with_unit(decimals: int, unit: str, *, signed: bool = False) -> str:
    """A number format that shows its SI unit: '#,##0.00" nF"'."""
    digits = "#,##0" + ("." + "0" * decimals if decimals else "")
    tail = f'" {unit}"' if unit else ""
    return f"+{digits}{tail};−{digits}{tail};{digits}{tail}" if signed else f"{digits}{tail}"


def decimals_of(typical_scaled: float, digits: int = 5) -> int:
    """Decimals that leave so many significant digits of a scaled value."""
    if not typical_scaled:
        return 2
    return max(0, digits - 1 - math.floor(math.log10(abs(typical_scaled))))
