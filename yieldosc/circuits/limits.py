"""What bounds the level of an oscillator: an option that a family declares, and the rails of an op-amp that clips."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from yieldosc.circuits.circuit import Circuit, CircuitError, Family, Option, Role
from yieldosc.circuits.roles import device

UNDECLARED = "none"
_MEANING = {
    UNDECLARED: "none: not declared, so no settled frequency",
    "agc": "agc: a level control holds the level without distortion",
    "clip": "clip: the output stops at its rails",
    "tanh": "tanh: a differential pair limits its current",
    "exp": "exp: a single bipolar stage with its mean current fixed",
}
_ASSUMED = {
    "agc": "a level control holds the level without distortion as long as it is not at its stop",
    "clip": "the level is limited by the output clipping at its rails (no slewing, no recovery time)",
    "tanh": "the level is limited as by a differential pair, i = I·tanh(gm·v/I); output clipping left out",
    "exp": "the level is limited by a bipolar junction whose mean current the bias holds; saturation left out",
}
_SWING = (
    "amplitude and drive level are bounds: an output that swings rail to rail as a square wave, fundamental 4·VSAT/π"
)
RAIL_ROLES = (
    device("VSAT", "V", "largest output voltage, both ways from the mid-supply", optional=True, kind="ic"),
    device("VSAT_high", "V", "largest output voltage upwards, where the two differ", optional=True, kind="ic"),
    device("VSAT_low", "V", "largest output voltage downwards, as a positive number", optional=True, kind="ic"),
)
SWING_ROLES = (
    device("VSAT", "V", "largest output voltage, both ways from the mid-supply: bounds the drive level", optional=True,
           kind="ic"),
)  # fmt: skip
VOLTAGE, BIPOLAR, CURRENT = ("agc", "clip"), ("agc", "tanh", "exp"), ("agc", "tanh")


def with_limiter(family: Family, *choices: str) -> Family:
    """The family with the option `limiter` (undeclared is the default) and, where it may clip, the rails as roles."""
    every = (UNDECLARED, *choices)
    option = Option("limiter", every, "what bounds the level. " + "; ".join(_MEANING[choice] for choice in every))

    def roles(options: Mapping[str, str]) -> tuple[Role, ...]:
        may_clip = options.get("limiter") in ("agc", "clip") and options.get("stage", "opamp") == "opamp"
        rails = RAIL_ROLES if "clip" in choices and may_clip else ()
        return (*family.roles(options), *rails, *(SWING_ROLES if swings(options) else ()))

    def build(options: Mapping[str, str], present: frozenset[str]) -> Circuit:
        circuit = family.build(options, present)
        limiter = options.get("limiter", UNDECLARED)
        problems = _problems(circuit, limiter, present)
        if problems:
            raise CircuitError(problems)
        given = tuple(role for role in roles(options) if role.name in present)
        name, chosen, _ = circuit.recipe
        recipe = (name, chosen, tuple(sorted(present)))
        return replace(circuit, roles=given, recipe=recipe, assumptions=_assumptions(circuit, limiter, present))

    def option_problems(options: Mapping[str, str]) -> list[str]:
        return family.option_problems(options) + _unsuited(options, choices)

    return replace(
        family,
        options=(*family.options, option),
        roles=roles,
        build=build,
        option_problems=option_problems,
    )


def swings(options: Mapping[str, str]) -> bool:
    """An inverter whose limiter is declared: how far its output can swing bounds what it does to a crystal."""
    return options.get("stage") == "inverter" and options.get("limiter") == "tanh"


def _problems(circuit: Circuit, limiter: str, present: frozenset[str]) -> list[str]:
    problems = []
    if circuit.control_reach is not None and limiter == "clip":
        problems.append("a stabiliser holds the level here, so the output does not clip: choose limiter = agc")
    uneven = {"VSAT_high", "VSAT_low"} & present
    if len(uneven) == 1:
        problems.append("unequal rails need both VSAT_high and VSAT_low; give the missing one")
    if uneven and "VSAT" in present:
        problems.append("VSAT stands for equal rails, VSAT_high and VSAT_low for unequal ones: keep one or the other")
    return problems


def _unsuited(options: Mapping[str, str], choices: tuple[str, ...]) -> list[str]:
    """An output voltage clips, a junction is exponential, any controlled current may be a differential pair's."""
    stage, limiter = options.get("stage"), options.get("limiter", UNDECLARED)
    suited = choices if stage is None else {"opamp": VOLTAGE, "bjt": BIPOLAR}.get(stage, CURRENT)
    if limiter in (UNDECLARED, *suited):
        return []
    listed = ", ".join((UNDECLARED, *suited))
    return [f"limiter = {limiter} does not suit this stage; choose one of {listed}"]


def _assumptions(circuit: Circuit, limiter: str, present: frozenset[str]) -> tuple[str, ...]:
    if limiter == UNDECLARED:
        return circuit.assumptions
    kept = tuple(text for text in circuit.assumptions if not text.startswith("no stabiliser"))
    bound = "VSAT" in present and swings({**circuit.options, "limiter": limiter})
    return (*kept, _ASSUMED[limiter], *((_SWING,) if bound else ()))
