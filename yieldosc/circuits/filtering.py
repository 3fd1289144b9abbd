"""A rectangular wave through a ladder low-pass: amplitude and phase of the fundamental, distortion.

Harmonic n of a unipolar square of height V and duty D has the peak (2V/nπ)|sin(nπD)| (Fourier series).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
ComplexArray = NDArray[np.complex128]
HIGHEST_HARMONIC = 51


@dataclass(frozen=True, slots=True)
class Section:
    """Series resistance [Ω] and inductance [H], then a shunt capacitance [F]."""

    ohm: Array | float
    henry: Array | float
    farad: Array


def transfer(
    sections: Sequence[Section], source_ohm: Array | float, load_ohm: Array | None, omega: Array
) -> ComplexArray:
    """Output over open-circuit source voltage (n,), from the load back: V = 1, I = V/RLOAD, then section by section."""
    voltage = np.ones_like(omega, dtype=np.complex128)
    current = np.zeros_like(voltage) if load_ohm is None else voltage / load_ohm
    for section in reversed(sections):
        current = current + 1j * omega * section.farad * voltage
        voltage = voltage + (section.ohm + 1j * omega * section.henry) * current
    return np.asarray(1 / (voltage + source_ohm * current), dtype=np.complex128)


@dataclass(frozen=True, slots=True)
class Sine:
    """Arrays (n,): peak of the fundamental [V], harmonics 2…51 over it, its phase against the square's [degrees]."""

    amplitude_v: Array
    distortion: Array
    phase_deg: Array


def filtered(
    sections: Sequence[Section],
    source_ohm: Array | float,
    load_ohm: Array | None,
    *,
    frequency_hz: Array,
    duty: Array,
    height_v: Array,
) -> Sine:
    """The fundamental behind the filter; nan where the unit does not oscillate."""
    omega = 2 * np.pi * np.where(frequency_hz > 0, frequency_hz, np.nan)
    with np.errstate(invalid="ignore", divide="ignore"):
        first = transfer(sections, source_ohm, load_ohm, omega)
        fundamental = _peak(1, height_v, duty) * np.abs(first)
        power = np.zeros_like(fundamental)
        for n in range(2, HIGHEST_HARMONIC + 1):
            gain = np.abs(transfer(sections, source_ohm, load_ohm, n * omega))
            power = power + (_peak(n, height_v, duty) * gain) ** 2
        return Sine(fundamental, np.sqrt(power) / fundamental, np.degrees(np.angle(first)))


def _peak(n: int, height_v: Array, duty: Array) -> Array:
    return 2 * height_v / (n * np.pi) * np.abs(np.sin(n * np.pi * duty))
