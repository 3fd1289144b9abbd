"""The options `stage` and `bias` of the transistor circuits."""

from __future__ import annotations

from collections.abc import Mapping

from yieldosc.circuits.circuit import Option
from yieldosc.circuits.stages.bjt import bjt
from yieldosc.circuits.stages.inverter import INVERTER
from yieldosc.circuits.stages.jfet import JFET
from yieldosc.circuits.stages.mosfet import MOSFET
from yieldosc.circuits.stages.stage import Stage

BIAS_OPTION = Option("bias", ("divider", "collector"), "of a bjt: RB1 and RB2 from VCC, or RB1 from the collector")


def stage_option(*choices: str) -> Option:
    return Option("stage", choices, "the active part")


def chosen_stage(options: Mapping[str, str]) -> Stage:
    """The three-terminal stage of these options; a circuit without a bias option has the divider."""
    fixed = {"jfet": JFET, "mosfet": MOSFET, "inverter": INVERTER}
    name = options.get("stage", "bjt")
    return fixed[name] if name in fixed else bjt(options.get("bias", "divider"))


def bias_problems(options: Mapping[str, str]) -> list[str]:
    """A bias option that the stage cannot follow."""
    if options.get("bias") == "collector" and options.get("stage", "bjt") != "bjt":
        return [f"bias = collector is a bjt's; stage = {options['stage']} has its own bias: leave the option out"]
    return []


def collector_bias_problems(options: Mapping[str, str]) -> list[str]:
    """bias = collector where the collector is at signal ground."""
    if options["ground"] == "collector" and options["bias"] == "collector" and options["stage"] == "bjt":
        return ["bias = collector with the collector at the supply is the same as RB1 from VCC: use bias = divider"]
    return []
