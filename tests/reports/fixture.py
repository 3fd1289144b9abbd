"""An invented assessment: the 1 kHz Wien tone source of a tide-gauge buoy at ten temperatures. Nothing was computed."""

from __future__ import annotations

import math
from dataclasses import replace
from itertools import pairwise

from yieldosc.circuits.registry import build
from yieldosc.errors import Finding, Place
from yieldosc.parts.parameter import Given, Parameter
from yieldosc.parts.shapes import Fixed, Uniform
from yieldosc.sheets.bomline import BomLine
from yieldosc.studies.estimates import clopper_pearson, tango, yield_estimate
from yieldosc.studies.results import (
    OUTCOMES,
    Assessment,
    Band,
    CornerResult,
    Distribution,
    Estimate,
    FailureShare,
    Look,
    NominalPoint,
    Provenance,
    Ranking,
    RankLine,
    RivalResult,
    Tighter,
    WorstUnit,
)
from yieldosc.study import Design, Requirement, Study

UNITS, FAILING = 50_000, 1_010
PARTS = (
    ("R1", "R1", "R", "resistor", "Ω", 15.8e3, 0.01, "guaranteed"),
    ("C1", "C1", "C", "capacitor", "F", 10e-9, 0.02, "guaranteed"),
    ("R2", "R2", "R", "resistor", "Ω", 15.8e3, 0.01, "guaranteed"),
    ("C2", "C2", "C", "capacitor", "F", 10e-9, 0.02, "guaranteed"),
    ("RF", "R3", "R", "resistor", "Ω", 22e3, 0.01, "guaranteed"),
    ("RG", "R4", "R", "resistor", "Ω", 10e3, 0.01, "guaranteed"),
    ("GBW", "U1", "GBW", "ic", "Hz", 1e6, 0.4, "typical"),
    ("CIN", "CIN", "CIN", "capacitor", "F", 5e-12, 0.0, "assumed"),
)


def parameter(role, part, trait, kind, unit, value, fraction, pedigree):
    row = 2 + [p[0] for p in PARTS].index(role)
    return Parameter(
        role=role, part=part, trait=trait, kind=kind, unit=unit, nominal=value, typical=value,
        low=value * (1 - fraction), high=value * (1 + fraction), shape=Uniform() if fraction else Fixed(),
        pedigree=pedigree, reel=f"{trait} {value:g}" if role in ("R1", "R2", "C1", "C2") else None,
        given={"value": Given(f"{value:g}", f"BOM!C{row}"), "tolerance": Given(f"±{fraction:.0%}", f"Roles!F{row}")},
    )  # fmt: skip


def tone_study(**design):
    settings = {
        "target_frequency_hz": 1000.0, "frequency_low_hz": 970.0, "frequency_high_hz": 1030.0, "least_margin": 1.02,
        "temperature_low_c": -20.0, "temperature_high_c": 60.0, "yield_target": 0.99,
    } | design  # fmt: skip
    made = Design(**settings)
    requirements = (
        Requirement("startup_margin", made.least_margin, None, "low_margin", "1"),
        Requirement("frequency_hz", made.frequency_low_hz, made.frequency_high_hz, "out_of_limits", "Hz"),
    )
    bom = tuple(
        BomLine(
            designator=p[1], kind=p[3], value=p[5], si_unit=p[4], tolerance=(-p[6], p[6]), temperature_law=None,
            place=Place("BOM", i), source_text=f"{p[1]} {p[5]:g} {p[6]:.0%}",
        )
        for i, p in enumerate(PARTS[:6], start=2)
    )  # fmt: skip
    return Study(
        name="tide_tone_1khz", circuit=build("wien_bridge", {}, [p[0] for p in PARTS]),
        parameters=tuple(parameter(*p) for p in PARTS), conditions={}, design=made, requirements=requirements,
        bom=bom, bom_rows=(("Designator", "Value", "Tolerance"), ("R1, R2", "15k8", "1%"), ("C1, C2", "10n", "2%")),
        design_given={"target_frequency_hz": Given("1 kHz", "Design!B3")},
        findings=(Finding("note", "decoded", "the tolerance is read from the part number.", Place("BOM", 3, "D")),),
        digest="3fa9c1d2" * 8,
    )  # fmt: skip


def bell(centre, sd, units, bars=40):
    """A distribution with the counts of a normal one, cut at four standard deviations."""
    edges = tuple(centre + sd * (-4 + 8 * i / bars) for i in range(bars + 1))
    share = [math.erf((b - centre) / sd / 2**0.5) - math.erf((a - centre) / sd / 2**0.5)
             for a, b in pairwise(edges)]  # fmt: skip
    return Distribution(
        mean=centre, sd=sd, min=edges[0], max=edges[-1], q001=centre - 3.09 * sd, q50=centre, q999=centre + 3.09 * sd,
        edges=edges, counts=tuple(round(units * s / 2) for s in share),
    )  # fmt: skip


def corner_result(corner, number):
    away = abs(corner.temperature_c - 25) / 45 + 0.1 * corner.age_years
    out, dead, low = round(600 * away), round(12 * away), round(20 * away)
    failing = {name: n for name, n in (("no_start", dead), ("low_margin", low), ("out_of_limits", out)) if n}
    return CornerResult(
        corner=corner,
        frequency_hz=bell(1002.0 - 4 * (corner.temperature_c - 25) / 45, 9.0 + 3 * away, UNITS),
        settled_hz=None,
        startup_failures=dead,
        startup_rate=clopper_pearson(dead, UNITS),
        margin=bell(1.062, 0.011 + 0.004 * away, UNITS),
        yield_=yield_estimate(out + dead + low, UNITS),
        failing=failing,
        first_failures=sum(failing.values()) if number == 0 else 0,
    )


def index(value, half):
    return Estimate(estimate=value, low=value - half, high=value + half)


def rank_line(part, total, half=0.012, per_percent=None):
    first = index(total * 0.97, half)
    return RankLine(
        part=part, first_order=first, total=index(total, half), mean_first_order=first, mean_total=index(total, half),
        per_percent=per_percent,
    )  # fmt: skip


def tone_rankings(corner):
    frequency = (rank_line("C1", 0.401, per_percent=-0.5), rank_line("C2", 0.389, per_percent=-0.5),
                 rank_line("R1", 0.101, per_percent=-0.5), rank_line("R2", 0.1, per_percent=-0.49),
                 rank_line("U1", 0.009, 0.001))  # fmt: skip
    margin = (rank_line("C1", 0.33, per_percent=0.33), rank_line("C2", 0.28, per_percent=-0.33),
              rank_line("R3", 0.15, per_percent=0.69), rank_line("R4", 0.14, per_percent=-0.69))  # fmt: skip
    causes = (rank_line("C1: initial", 0.33), rank_line("C1: temperature", 0.07))
    return {
        "frequency": Ranking(output="frequency", corner=corner, parts=frequency, causes=causes, units=73_728,
                             leaders=("C1", "C2"), looks=2, looks_planned=2),
        "margin": Ranking(output="margin", corner=corner, parts=margin, causes=(), units=73_728,
                          leaders=("C1",), looks=2, looks_planned=2),
    }  # fmt: skip


def tone_rivals():
    def rival(name, meaning, failing):
        difference = None if name == "declared" else tango(max(0, 414 - failing), max(0, failing - 414), 20_480)
        return RivalResult(name=name, meaning=meaning, yield_=yield_estimate(failing, 20_480), difference=difference)

    return (
        rival("declared", "the study as given", 414),
        rival("all normal", "every tolerance normal, three standard deviations, cut", 9),
        rival("same reel", "parts of one reel identical (reel share 1)", 1_420),
        rival("hollow, same reel", "better grades sorted out, and parts of one reel identical", 2_205),
    )


def tone_bands(corners):
    made = []
    for c in corners:
        f, m = c.frequency_hz, c.margin
        made.append(Band(output="frequency_hz", temperature_c=c.corner.temperature_c, rss=(f.q001, f.q999),
                         extreme=(f.min - 4, f.max + 4), monte_carlo=(f.min, f.max),
                         method="all 64 corners of the box"))  # fmt: skip
        made.append(Band(output="startup_margin", temperature_c=c.corner.temperature_c,
                         extreme=(m.min - 0.01, m.max + 0.01), rss=(m.q001, m.q999), monte_carlo=(m.min, m.max),
                         method="all 64 corners of the box"))  # fmt: skip
    return tuple(made)


def tone_assessment(study=None, **changes):
    """Fails its target of 99 %: 97.98 % of the units are good."""
    study = study or tone_study()
    corners = tuple(corner_result(c, i) for i, c in enumerate(study.design.corners()))
    values = {p[0]: p[5] * (1 + p[6] / 2) for p in PARTS}
    joint = yield_estimate(FAILING, UNITS, 0.9875)
    made = Assessment(
        study=study,
        verdict="does not meet",
        conditions=("if the assumed values hold: CIN", "if the typical values hold: GBW"),
        yield_=joint,
        looks=(Look(number=1, units=UNITS, failures=FAILING, low=joint.low, high=joint.high),),
        looks_planned=4,
        outcomes=dict.fromkeys(OUTCOMES, 0)
        | {"good": UNITS - FAILING, "no_start": 10, "low_margin": 25, "out_of_limits": 975},
        corners=corners,
        nominal=tuple(
            NominalPoint(
                corner=c.corner,
                frequency_hz=1002.0,
                settled_hz=None,
                startup_margin=1.062,
                growth_per_s=120.0,
                outcome="starts",
            )
            for c in corners
        ),
        rankings=tone_rankings(corners[-1].corner),
        rivals=tone_rivals(),
        rival_units=20_480,
        bands=tone_bands(corners),
        lots=None,
        tighter=(
            Tighter(
                part="C1",
                from_tolerance="±2 %",
                to_tolerance="±1 %",
                yield_=yield_estimate(150, 20_480),
                difference=tango(270, 6, 20_480),
            ),
            Tighter(
                part="R1",
                from_tolerance="±1 %",
                to_tolerance="±0.5 %",
                yield_=yield_estimate(400, 20_480),
                difference=tango(30, 16, 20_480),
            ),
        ),
        failure_share=(FailureShare(part="C1", cause="initial", ks_distance=0.31, p_value=1e-9, mean_shift_sd=-0.84),),
        worst_units=tuple(
            WorstUnit(number=n, outcome=o, corner=corners[0].corner, frequency_hz=f, startup_margin=m, values=values)
            for n, o, f, m in (
                (17, "no_start", 1004.0, 0.991),
                (402, "out_of_limits", 1041.2, 1.05),
                (9, "good", 1029.9, 1.03),
            )
        ),
        wrong_modes_hz=(),
        bench_ratio=None,
        findings=study.findings,
        cautions=(
            "A prediction from stated tolerances, not a measurement of boards.",
            "Every rate supposes that no wrong or defective part is on the board.",
        ),
        provenance=Provenance(
            seed=1,
            input_sha256=study.digest,
            versions={"python": "3.12.1", "yieldosc": "0.1.0", "numpy": "2.1.0"},
            started="2031-05-04T08:15:00+00:00",
            seconds=4.25,
            workers=2,
            audited=500,
            disagreeing=0,
            exact=3,
        ),
    )
    return replace(made, **changes)


def flawless_assessment():
    """Nothing failed: meets 99 % under conditions; its rates are bounds, never zero."""
    joint = yield_estimate(0, UNITS, 0.9875)
    return tone_assessment(
        verdict="meets", yield_=joint, looks=(Look(number=1, units=UNITS, failures=0, low=joint.low, high=joint.high),),
        outcomes=dict.fromkeys(OUTCOMES, 0) | {"good": UNITS},
        corners=tuple(
            replace(corner_result(c, i), failing={}, startup_failures=0, startup_rate=clopper_pearson(0, UNITS),
                    yield_=yield_estimate(0, UNITS), first_failures=0)
            for i, c in enumerate(tone_study().design.corners())
        ),
        failure_share=(),
    )  # fmt: skip


def bare_assessment():
    """One temperature, no start-up question, a corner without any frequency, nothing ranked, no rival, no failure."""
    a = flawless_assessment()
    first = a.corners[0]
    nan = float("nan")
    nothing = Distribution(mean=nan, sd=nan, min=nan, max=nan, q001=nan, q50=nan, q999=nan)
    unasked = replace(first, margin=None, startup_failures=None, startup_rate=None)
    dead = replace(unasked, frequency_hz=nothing, corner=replace(first.corner, age_years=10.0))
    return replace(
        a, corners=(unasked, dead), rankings={}, rivals=a.rivals[:1], bands=(), tighter=(), worst_units=(),
        verdict="not proven", conditions=(), findings=(), cautions=(),
    )  # fmt: skip
