"""A Wien bridge with an ideal op-amp as a study, and an evaluator for it that knows nothing of networks."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np
import pytest

from yieldosc.circuits.registry import build
from yieldosc.parts.parameter import Parameter
from yieldosc.parts.shapes import Fixed, Uniform
from yieldosc.solver.solution import Solution, Status
from yieldosc.study import Design, Requirement, Study

R, C = 10e3, 10e-9
TARGET_HZ = 1 / (2 * np.pi * R * C)


@dataclass(frozen=True)
class IdealWien:
    """f = 1/(2π√(R1 C1 R2 C2)); margin = (1 + RF/RG)/(1 + R1/R2 + C2/C1)."""

    never_biased_above_rf: float = np.inf

    def solve(self, values, temperature_c, *, own_law=frozenset(), growth=False, audit=None):
        arrays = dict(zip(values, np.broadcast_arrays(*values.values()), strict=True))
        r1, r2, c1, c2 = (np.array(arrays[name]) for name in ("R1", "R2", "C1", "C2"))
        frequency = 1 / (2 * np.pi * np.sqrt(r1 * c1 * r2 * c2))
        margin = (1 + arrays["RF"] / arrays["RG"]) / (1 + r1 / r2 + c2 / c1)
        status = np.where(margin >= 1, Status.STARTS, Status.NO_START).astype(np.int8)
        status[arrays["RF"] > self.never_biased_above_rf] = Status.NO_BIAS
        rate = np.log(margin) * frequency
        return Solution(
            frequency_hz=frequency, startup_margin=margin, status=status, growth_per_s=rate if growth else None
        )


def toleranced(role, value, fraction, **changes):
    """A resistor, a capacitor or a gain-bandwidth product, ± fraction, uniform."""
    kinds = {"C": ("capacitor", "C", "F"), "R": ("resistor", "R", "Ω"), "G": ("ic", "GBW", "Hz")}
    kind, trait, unit = kinds[role[0]]
    made = Parameter(
        role=role, part=role, trait=trait, kind=kind, unit=unit, nominal=value, typical=value,
        low=value * (1 - fraction), high=value * (1 + fraction),
        shape=Uniform() if fraction else Fixed(), pedigree="guaranteed",
    )  # fmt: skip
    return replace(made, **changes)


def wien_study(*, gain=3.2, window=0.03, r=0.01, c=0.05, rf=0.0, share=0.0, change=None, extra=(), **design):
    """R1 = R2 of one reel, C1 = C2 of another; change(parameter) → parameter; extra: more parameters."""
    parameters = (
        toleranced("R1", R, r, reel="10 kΩ", reel_share=share),
        toleranced("R2", R, r, reel="10 kΩ", reel_share=share),
        toleranced("C1", C, c, reel="10 nF", reel_share=share),
        toleranced("C2", C, c, reel="10 nF", reel_share=share),
        toleranced("RF", (gain - 1) * 10e3, rf),
        toleranced("RG", 10e3, rf),
    )
    parameters += tuple(extra)
    if change is not None:
        parameters = tuple(change(p) for p in parameters)
    settings = {"temperature_low_c": 25.0, "temperature_high_c": 25.0, "yield_target": 0.8} | design
    low, high = TARGET_HZ * (1 - window), TARGET_HZ * (1 + window)
    made = Design(target_frequency_hz=TARGET_HZ, frequency_low_hz=low, frequency_high_hz=high, **settings)
    requirements = [Requirement("startup_margin", made.least_margin, None, "low_margin", "1")]
    if made.longest_startup_s is not None:
        requirements.append(Requirement("startup_s", None, made.longest_startup_s, "slow_start", "s"))
    requirements.append(Requirement("frequency_hz", low, high, "out_of_limits", "Hz"))
    circuit = build("wien_bridge", {}, [p.role for p in parameters])
    return Study(
        name="tone", circuit=circuit, parameters=parameters, conditions={}, design=made,
        requirements=tuple(requirements), digest="0" * 64,
    )  # fmt: skip


@pytest.fixture
def ideal_wien():
    return IdealWien


@pytest.fixture
def make_study():
    return wien_study


@pytest.fixture
def make_part():
    return toleranced
