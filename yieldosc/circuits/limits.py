"""What bounds the level of an oscillator, as a declared option, and the rails of an op-amp that clips."""

from __future__ import annotations

from collections.abc import Mapping

from yieldosc.circuits.circuit import Option, Role
from yieldosc.circuits.roles import device

_MEANING = {
    "none": "none: not declared, so no settled frequency",
    "agc": "agc: a level control holds the level without distortion",
    "clip": "clip: the output stops at its rails",
    "tanh": "tanh: a differential pair limits its current",
    "exp": "exp: a single bipolar stage with its mean current fixed",
}


def limiter_option(*choices: str) -> Option:
    """The option `limiter` with the choices that make sense for a stage; undeclared is the default."""
    every = ("none", *choices)
    return Option("limiter", every, "what bounds the level. " + "; ".join(_MEANING[choice] for choice in every))


RAIL_ROLES = (
    device("VSAT", "V", "largest output voltage, both ways from the mid-supply", optional=True, kind="ic"),
    device("VSAT_high", "V", "largest output voltage upwards, where the two differ", optional=True, kind="ic"),
    device("VSAT_low", "V", "largest output voltage downwards, as a positive number", optional=True, kind="ic"),
)


def rail_roles(options: Mapping[str, str]) -> tuple[Role, ...]:
    """The rails, where the declared limiter may reach them."""
    return RAIL_ROLES if options.get("limiter", "none") in ("clip", "agc") else ()


def limiter_problems(options: Mapping[str, str], present: frozenset[str], *, stabilised: bool = False) -> list[str]:
    """What is wrong with the limiter and its rails; stabilised: the circuit has a level control among its roles."""
    problems = []
    if stabilised and options.get("limiter") == "clip":
        problems.append("a stabiliser holds the level here, so the output does not clip: choose limiter = agc")
    uneven = {"VSAT_high", "VSAT_low"} & present
    if len(uneven) == 1:
        problems.append("unequal rails need both VSAT_high and VSAT_low; give the missing one")
    if uneven and "VSAT" in present:
        problems.append("VSAT stands for equal rails, VSAT_high and VSAT_low for unequal ones: keep one or the other")
    return problems


def limiter_assumption(options: Mapping[str, str], *, undeclared: str) -> str:
    """The sentence on what bounds the level."""
    return {
        "none": undeclared,
        "agc": "a level control holds the level without distortion as long as it is not at its stop",
        "clip": "the level is limited by the output clipping at its rails (no slewing, no recovery time)",
        "tanh": "the level is limited as by a differential pair, i = I·tanh(gm·v/I)",
        "exp": "the level is limited by a bipolar junction whose mean current the bias holds",
    }[options.get("limiter", "none")]
