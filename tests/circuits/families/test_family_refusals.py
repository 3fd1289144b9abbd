"""What the families refuse, each text whole: every one says what to do."""

from __future__ import annotations

import pytest

from tests.samples import BJT, COIL, JFET, QUARTZ, SECTIONS, TANK
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError


def problems(name, options, *present):
    with pytest.raises(CircuitError) as caught:
        registry.build(name, options, present)
    return list(caught.value.problems)


MOSFET = ("gfs", "Ciss", "Crss")
AMPLIFIER = ("RO", "RIN", "RF")
OSCILLATING = ("C1", "C2", "RF", "gm")
AUDIO = (*(r for r in BJT if r != "RE"), "RC")


@pytest.mark.parametrize(
    ("name", "options", "text"),
    [
        (
            "colpitts",
            {"stage": "jfet", "bias": "collector"},
            "bias = collector is a bjt's; stage = jfet has its own bias: leave the option out",
        ),
        (
            "colpitts",
            {"stage": "opamp", "ground": "base"},
            "ground = base is a transistor's; stage = opamp inverts: leave the option out",
        ),
        (
            "colpitts",
            {"ground": "collector", "bias": "collector"},
            "bias = collector with the collector at the supply is the same as RB1 from VCC: use bias = divider",
        ),
        (
            "hartley",
            {"ground": "collector", "bias": "collector"},
            "bias = collector with the collector at the supply is the same as RB1 from VCC: use bias = divider",
        ),
        (
            "hartley",
            {"ground": "base", "feed": "shunt"},
            "feed = shunt is for ground = emitter; with ground = base leave the option out",
        ),
        (
            "pierce",
            {"bias": "collector"},
            "bias = collector is a bjt's; stage = inverter has its own bias: leave the option out",
        ),
        (
            "phase_shift",
            {"stage": "bjt", "buffered": "yes"},
            "buffered = yes needs stage = opamp: the model has no buffers around a transistor",
        ),
        (
            "phase_shift",
            {"stage": "mosfet", "ladder": "rl"},
            "ladder = rl is for stage = opamp: with a transistor R1 and L1 would draw the drain's DC current to ground",
        ),
        (
            "phase_shift",
            {"bias": "collector"},
            "bias = collector is a bjt's; stage = opamp has its own bias: leave the option out",
        ),
        (
            "square_to_sine",
            {"thresholds": "fractions"},
            "thresholds belong to source = schmitt_rc; with source = given leave the option out",
        ),
    ],
)
def test_choices_that_exclude_each_other(name, options, text):
    """Refused before any role is looked at, also where only the list of roles is asked for."""
    assert problems(name, options) == [text]
    with pytest.raises(CircuitError) as caught:
        registry.complete_options(name, options)
    assert str(caught.value) == text


@pytest.mark.parametrize(
    ("name", "options", "roles", "text"),
    [
        (
            "colpitts",
            {"stage": "jfet"},
            (*JFET, *TANK, "CC"),
            "the drain has no DC path: give RC, LCH or both",
        ),
        (
            "colpitts",
            {"stage": "jfet"},
            (*JFET, *TANK, "RC"),
            "without C3 the coil would short the gate bias: give CC",
        ),
        (
            "colpitts",
            {"stage": "mosfet", "ground": "base"},
            (*MOSFET, *TANK, "CB"),
            "ground = base needs RS: it carries the source's DC current",
        ),
        (
            "colpitts",
            {"stage": "jfet", "ground": "base"},
            (*JFET, *TANK, "CB", "CE"),
            "CE would short the signal at the source; remove the CE role",
        ),
        (
            "colpitts",
            {"stage": "mosfet"},
            (*MOSFET, *TANK, "CC", "RC", "RS2"),
            "RS2 and CE stand behind RS: give RS, or remove RS2 and CE",
        ),
        (
            "colpitts",
            {"stage": "jfet", "ground": "base"},
            (*JFET, *TANK, "CB", "C3"),
            "with C3 the coil carries no DC: give RC, LCH or both as the feed of c",
        ),
        ("colpitts", {"stage": "opamp"}, (*TANK, "RIN", "RF"), "role RO is missing: output resistance of the op-amp, "
         "with any resistor outside its feedback loop"),
        (
            "hartley",
            {"feed": "shunt"},
            (*BJT, *COIL, "CC", "CS"),
            "the collector has no DC path: give RC, LCH or both",
        ),
        (
            "hartley",
            {"ground": "base"},
            (*(r for r in BJT if r != "RE"), *COIL, "CT", "CB"),
            "ground = base needs RE: it carries the emitter's DC current",
        ),
        (
            "hartley",
            {"ground": "base"},
            (*BJT, *COIL, "CT", "CB", "CE"),
            "CE would short the signal at the emitter; remove the CE role",
        ),
        ("hartley", {}, (*BJT, *COIL, "CC", "RC"), "hartley has no role 'RC' with these options"),
        (
            "pierce",
            {},
            (*QUARTZ, *OSCILLATING, "LTRAP"),
            "the overtone trap is LTRAP in series with CTRAP: give both, or neither",
        ),
        (
            "pierce",
            {},
            (*QUARTZ, *OSCILLATING, "Cm3"),
            "the overtone's arm needs Cm3 and ESR3: give ESR3, or remove Cm3",
        ),
        (
            "pierce",
            {},
            (*QUARTZ, *OSCILLATING, "F3"),
            "the overtone's arm needs Cm3 and ESR3: give Cm3 and ESR3, or remove F3",
        ),
        (
            "pierce",
            {"stage": "bjt"},
            (*QUARTZ, *BJT, "C1", "C2"),
            "the collector has no DC path: give RC, LCH or both",
        ),
        (
            "crystal_common_base",
            {},
            (*QUARTZ, *(r for r in BJT if r != "RE"), *TANK),
            "the common-base stage needs RE: it carries the emitter's DC current",
        ),
        (
            "crystal_common_base",
            {},
            (*QUARTZ, *BJT, *TANK, "CE"),
            "CE would short the signal at the emitter; remove the CE role",
        ),
        (
            "crystal_colpitts",
            {"stage": "jfet"},
            (*QUARTZ, *(r for r in JFET if r != "RS"), "C1", "C2"),
            "the source follower needs RS: it carries the source's DC current",
        ),
        (
            "phase_shift",
            {"stage": "bjt", "ladder": "lead"},
            (*SECTIONS, *AUDIO, "CE"),
            "RE2 and CE stand behind RE: give RE, or remove RE2 and CE",
        ),
        (
            "phase_shift",
            {"stage": "bjt"},
            (*SECTIONS, *AUDIO),
            "role CC is missing: coupling from the last section to b",
        ),
    ],
)  # fmt: skip
def test_roles_that_make_no_circuit(name, options, roles, text):
    assert problems(name, options, *roles) == [text]


def test_every_reason_at_once():
    assert problems("colpitts", {"stage": "jfet"}, *JFET, *TANK, "LCH_dcr") == [
        "the drain has no DC path: give RC, LCH or both",
        "without C3 the coil would short the gate bias: give CC",
        "LCH_dcr without LCH: give the choke, or remove its resistance",
    ]
