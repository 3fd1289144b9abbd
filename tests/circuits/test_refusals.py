"""What circuits refuse, each text whole: every one says what to do."""

from __future__ import annotations

import pytest

from tests.samples import BJT, QUARTZ, TANK, WIEN
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError

INVERTER = {"C1": 27e-12, "C2": 27e-12, "RF": 1e6, "gm": 5e-3}


def problems(name, options, *present):
    with pytest.raises(CircuitError) as caught:
        registry.build(name, options, present)
    assert str(caught.value) == "; ".join(caught.value.problems)
    return list(caught.value.problems)


def test_unknown_circuit():
    with pytest.raises(CircuitError) as caught:
        registry.family("wien bridge rectifier")
    listed = ", ".join(registry.names())
    assert str(caught.value) == f"there is no circuit named 'wien bridge rectifier'; the circuits are {listed}"


def test_names_are_found_however_they_are_written():
    assert registry.family(" Wien-Bridge ") is registry.family("wien_bridge")


def test_unknown_options_and_choices_are_named_together():
    with pytest.raises(CircuitError) as caught:
        registry.complete_options("colpitts", {"ground": "gate", "colour": "red", "bias": "none"})
    listed = ", ".join(o.name for o in registry.family("colpitts").options)
    assert list(caught.value.problems) == [
        "option ground of colpitts is 'gate'; choose one of emitter, base, collector",
        f"colpitts has no option 'colour'; its options are: {listed}",
        "option bias of colpitts is 'none'; choose one of divider, collector",
    ]


def test_missing_and_unknown_roles_are_all_named():
    assert problems("wien_bridge", {}, "R1", "C1", "R2", "RF", "R9", "A1") == [
        "wien_bridge has no role 'A1' with these options",
        "wien_bridge has no role 'R9' with these options",
        "role C2 is missing: shunt arm",
        "role RG is missing: inverting input to ground",
    ]


def test_wien_stabilisers():
    assert problems("wien_bridge", {}, *WIEN, "RS_start") == [
        "a stabiliser in series with RG needs both RS_start and RS_full; give the missing one"
    ]
    assert problems("wien_bridge", {}, *WIEN, "RS_start", "RS_full", "RF_full") == [
        "RS_start/RS_full and RF_full are two stabilisers; keep the one that the board has"
    ]


CE = {"ground": "emitter"}


@pytest.mark.parametrize(
    ("options", "roles", "text"),
    [
        (CE, (*BJT, *TANK, "CC"), "the collector has no DC path: give RC, LCH or both"),
        (CE, (*BJT, *TANK, "RC"), "without C3 the coil would short the base bias: give CC"),
        (CE, (*BJT, *TANK, "RC", "C3", "CC"), "with C3 the tank needs no coupling capacitor: remove CC"),
        (CE, (*BJT, *TANK, "RC", "CC", "LCH_dcr"), "LCH_dcr without LCH: give the choke, or remove its resistance"),
        (
            {"ground": "base"},
            (*BJT, *TANK, "CB", "C3"),
            "with C3 the coil carries no DC: give RC, LCH or both as the feed of c",
        ),
        (
            {"ground": "base"},
            (*(r for r in BJT if r != "RE"), *TANK, "CB"),
            "ground = base needs RE: it carries the emitter's DC current",
        ),
        (
            {"ground": "collector"},
            (*(r for r in BJT if r != "RE"), *TANK, "CC"),
            "ground = collector needs RE: it carries the emitter's DC current",
        ),
        (
            {"ground": "base"},
            (*BJT, *TANK, "CB", "CE"),
            "CE would short the signal at the emitter; remove the CE role",
        ),
        (
            CE,
            (*(r for r in BJT if r != "RE"), *TANK, "CC", "RC", "CE"),
            "RE2 and CE stand behind RE: give RE, or remove RE2 and CE",
        ),
    ],
)
def test_colpitts_nonsense(options, roles, text):
    assert problems("colpitts", options, *roles) == [text]


def test_collector_bias_with_the_collector_at_the_supply():
    roles = [r for r in BJT if r != "RB2"]
    assert problems("colpitts", {"ground": "collector", "bias": "collector"}, *roles, *TANK, "CC") == [
        "bias = collector with the collector at the supply is the same as RB1 from VCC: use bias = divider"
    ]


def test_crystal_frequency_roles():
    rest = [r for r in QUARTZ if r not in ("FL", "CL")]
    assert problems("pierce", {}, *rest, *INVERTER) == [
        "the crystal has no frequency: give FL with its load CL, or FS",
        "FL needs the load capacitance CL that the data sheet states",
    ]
    assert problems("pierce", {}, *rest, "FL", *INVERTER) == [
        "FL needs the load capacitance CL that the data sheet states"
    ]
    assert problems("pierce", {}, *rest, "FL", "CL", "FS", *INVERTER) == ["FS and FL both given: keep one"]
