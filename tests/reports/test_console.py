"""The console: never wider than asked, plain where nobody watches, and no control character gets through."""

from __future__ import annotations

import io
import re
from dataclasses import replace

import pytest
from rich.cells import cell_len

from tests.reports.fixture import bare_assessment, flawless_assessment, tone_assessment, tone_study
from yieldosc.circuits import registry
from yieldosc.errors import Finding, Place
from yieldosc.reports.console import (
    make_console,
    print_assessment,
    print_check,
    print_circuit,
    print_circuits,
    print_findings,
    print_study,
    print_unit,
)
from yieldosc.reports.console_check import bounds_text, compact
from yieldosc.reports.findings import summarise
from yieldosc.reports.temperatures import temperature_lines
from yieldosc.sheets.bomline import BomLine
from yieldosc.unit import NamedCircuit


class Terminal(io.StringIO):
    def isatty(self):
        return True


def shown(show, *things, stream=None):
    stream = stream or io.StringIO()
    show(*things, make_console(stream))
    return stream.getvalue()


def flat(text):
    return " ".join(text.split())


@pytest.fixture
def assessments():
    eol = tone_study(life_years=10.0, supply_v=5.0, supply_tolerance=(-0.1, 0.1))
    return [tone_assessment(), flawless_assessment(), tone_assessment(eol)]


def test_a_summary_fits_100_columns(assessments):
    for a in assessments:
        text = shown(print_assessment, a)
        assert max(cell_len(row) for row in text.splitlines()) <= 100


def test_a_summary_fits_a_terminal_of_80_columns(assessments, monkeypatch):
    monkeypatch.setenv("COLUMNS", "80")
    monkeypatch.setenv("NO_COLOR", "1")
    for a in assessments:
        text = shown(print_assessment, a, stream=Terminal())
        assert max(cell_len(row) for row in text.splitlines()) <= 80


def test_nothing_but_text_when_piped(assessments):
    assert "\x1b" not in shown(print_assessment, assessments[0])


def test_nothing_but_text_with_no_color(assessments, monkeypatch):
    monkeypatch.setenv("TERM", "xterm-256color")
    monkeypatch.delenv("NO_COLOR", raising=False)
    assert "\x1b[" in shown(print_assessment, assessments[0], stream=Terminal())  # the control: colour where it may be
    monkeypatch.setenv("NO_COLOR", "1")
    assert "\x1b" not in shown(print_assessment, assessments[0], stream=Terminal())


def test_every_sentence_stands_on_the_console(assessments):
    for a in assessments:
        text, s = flat(shown(print_assessment, a)), summarise(a)
        for sentence in (s.verdict, s.headline, *s.conditions, s.yield_value, s.yield_note, s.range_value, s.range_note,
                         *s.deciding, *s.next_steps, *s.open_points, s.pedigrees, *s.cautions):  # fmt: skip
            assert flat(sentence) in text


def test_one_line_per_temperature_is_the_worst_over_supply_and_age():
    a = tone_assessment(tone_study(life_years=10.0, supply_v=5.0, supply_tolerance=(-0.1, 0.1)))
    rows = temperature_lines(a)
    assert [row.temperature_c for row in rows] == [-20, -10, 0, 10, 20, 25, 30, 40, 50, 60]
    for row in rows:
        here = [c for c in a.corners if c.corner.temperature_c == row.temperature_c]
        assert len(here) == row.corners == 6
        assert row.margin_min == min(c.margin.min for c in here)
        assert row.startup_failures == max(c.startup_failures for c in here)
        assert row.frequency_q999_hz == max(c.frequency_hz.q999 for c in here)
        assert row.yield_.estimate == min(c.yield_.estimate for c in here)


def test_a_corner_without_any_gain_does_not_hide_the_others():
    a = tone_assessment(tone_study(life_years=10.0))
    nan = float("nan")
    dead = replace(a.corners[0].frequency_hz, q001=nan, q50=nan, q999=nan)
    row = temperature_lines(replace(a, corners=(replace(a.corners[0], frequency_hz=dead), *a.corners[1:])))[0]
    assert row.frequency_q001_hz == a.corners[1].frequency_hz.q001
    assert row.frequency_q50_hz == a.corners[1].frequency_hz.q50
    assert row.frequency_q999_hz == a.corners[1].frequency_hz.q999


def test_an_assessment_with_little_in_it_is_shown_too():
    text = shown(print_assessment, bare_assessment())
    assert "nan" not in text
    assert "no other set of assumptions differs from the declared one" in flat(text)


def test_hostile_text_reaches_no_terminal():
    evil = "C1\x1b]0;owned\x07\x1b[2J\u202e"
    a = tone_assessment()
    parts = tuple(replace(p, part=evil) for p in a.rankings["frequency"].parts)
    rankings = {"frequency": replace(a.rankings["frequency"], parts=parts)}
    finding = Finding("note", "x", evil, Place(evil, 1, "A"))
    hostile = replace(
        a, study=replace(a.study, name=evil), rankings=rankings, findings=(finding,), conditions=(evil,),
        rivals=(replace(a.rivals[0], name=evil, meaning=evil),), tighter=(replace(a.tighter[0], part=evil),),
    )  # fmt: skip
    line = BomLine(designator=evil, kind="other", value=None, si_unit=None, tolerance=None, temperature_law=evil)
    texts = [
        shown(print_assessment, hostile), shown(print_findings, [finding]), shown(print_check, [line], [finding]),
        shown(print_study, replace(a.study, name=evil, bom=(line,))),
    ]  # fmt: skip
    for text in texts:
        assert not re.search(r"[\x00-\x09\x0b-\x1f\x7f-\x9f\u202e]", text)


def test_findings_come_errors_first_with_their_place():
    text = shown(
        print_findings,
        [Finding("note", "n", "a note"), Finding("error", "e", "no value; write one.", Place("BOM", 7, "C"))],
    )
    assert text == "error:   BOM!C7: no value; write one.\nnote:    a note\n"


def test_alike_parts_share_a_line():
    def part(name, row, value=4700.0, **changes):
        return BomLine(designator=name, kind="resistor", value=value, si_unit="Ω", tolerance=(-0.01, 0.01),
                       temperature_law=None, place=Place("BOM", row), **changes)  # fmt: skip

    lines = [part("R10", 5), part("R2", 3), part("R1", 3), part("R3", 3), part("R7", 9, None)]
    lines.append(part("R8", 4, fitted=False))
    findings = [Finding("warning", "w", "x"), Finding("note", "n", "y"), Finding("note", "n", "z")]
    text = shown(print_check, lines, findings)
    rows = [flat(row) for row in text.splitlines() if row.strip()]
    assert rows[0] == "6 parts read, 5 fitted"
    assert rows[3:] == [
        "resistor 4.7 kΩ ±1 % — R1–R3, R10 3, 5",
        "not read ±1 % — R7 9",
        "not fitted 4.7 kΩ ±1 % — R8 4",
        "Findings: 1 warning, 2 notes",
        "warning: x",
        "note: y",
        "note: z",
    ]


def test_runs_of_designators():
    assert compact(["R1", "R2", "R3", "R5", "C1", "C2", "TP", "R07"]) == "R1–R3, R5, C1, C2, TP, R07"
    assert compact(["A9", "A10", "A11"]) == "A9–A11"
    assert (bounds_text((-0.2, 0.8)), bounds_text((-3e-5, 3e-5)), bounds_text(None)) == ("+80/−20 %", "±30 ppm", "—")


def test_a_study_shows_each_role_with_its_cell():
    text = flat(shown(print_study, tone_study()))
    assert "tide_tone_1khz · Wien bridge · digest 3fa9c1d2" in text
    assert "1 kHz, −3 % to +3 %; margin at least 1.02; yield target 99 %" in text
    assert "RF R3 22 kΩ ±1 % uniform — guaranteed BOM!C6" in text


def test_one_unit_with_its_units():
    values = {"R1": 15.8e3, "C1": 10e-9, "R2": 15.8e3, "C2": 10e-9, "RF": 22e3, "RG": 10e3}
    circuit = NamedCircuit(registry.family("wien_bridge"))
    text = shown(print_unit, circuit.evaluate(values))
    # f = 1/(2π·15.8 kΩ·10 nF) = 1007.309 Hz; margin (1 + 2.2)/3 = 1.06667, by hand
    assert "wien_bridge, one unit at 25 °C" in text
    assert "outcome           starts              starts on the intended mode\n" in text
    assert re.search(r"frequency         1\.00730\d* kHz", text)
    assert "start-up margin   1.0667 " in text
    dead = shown(print_unit, circuit.evaluate({**values, "RF": 19e3}))
    assert "outcome           no_start            does not start\n" in dead
    assert "growth rate       —" in dead
    assert "start-up margin   0.96667 " in dead  # (1 + 1.9)/3
    assert "other modes       none                no other mode grows\n" in dead


@pytest.mark.parametrize("name", registry.names())
def test_every_circuit_can_be_shown(name):
    family = registry.family(name)
    options = registry.complete_options(name, {})
    text = shown(print_circuit, family, options)
    assert max(cell_len(row) for row in text.splitlines()) <= 100
    for role in family.roles(options):
        assert re.search(rf"^{role.name} ", text, re.MULTILINE)
    assert "\nRoles" in text
    assert ("\nBranches" in text) == (name not in ("timer_astable", "schmitt_rc", "square_to_sine"))  # formulas


def test_the_list_names_every_circuit():
    text = shown(print_circuits, [registry.family(name) for name in registry.names()])
    for name in registry.names():
        assert re.search(rf"^{name} ", text, re.MULTILINE)
