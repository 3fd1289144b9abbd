"""Three-terminal gain stages, one file each, and the branches that come with them.

Temperature laws are device physics recalled from memory; a law given for a role replaces them.
"""

from yieldosc.circuits.stages.bjt import bjt
from yieldosc.circuits.stages.choice import (
    BIAS_OPTION,
    bias_problems,
    chosen_stage,
    collector_bias_problems,
    stage_option,
)
from yieldosc.circuits.stages.derived import stage_derive
from yieldosc.circuits.stages.inverter import INVERTER
from yieldosc.circuits.stages.jfet import JFET
from yieldosc.circuits.stages.mosfet import MOSFET
from yieldosc.circuits.stages.stage import (
    BOLTZMANN_J_PER_K,
    ELEMENTARY_CHARGE_C,
    Array,
    Bias,
    Resistance,
    Stage,
    outside_range,
    stage_branches,
    thermal_voltage_v,
)
from yieldosc.circuits.stages.surroundings import (
    FEED_ROLES,
    emitter_branches,
    emitter_problems,
    emitter_resistance_ohm,
    emitter_roles,
    feed_branches,
    feed_problems,
    feed_resistance_ohm,
    load_branches,
    total_ohm,
)

__all__ = [
    "BIAS_OPTION",
    "BOLTZMANN_J_PER_K",
    "ELEMENTARY_CHARGE_C",
    "FEED_ROLES",
    "INVERTER",
    "JFET",
    "MOSFET",
    "Array",
    "Bias",
    "Resistance",
    "Stage",
    "bias_problems",
    "bjt",
    "chosen_stage",
    "collector_bias_problems",
    "emitter_branches",
    "emitter_problems",
    "emitter_resistance_ohm",
    "emitter_roles",
    "feed_branches",
    "feed_problems",
    "feed_resistance_ohm",
    "load_branches",
    "outside_range",
    "stage_branches",
    "stage_derive",
    "stage_option",
    "thermal_voltage_v",
    "total_ohm",
]
