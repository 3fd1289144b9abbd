"""A BOM or a study echoed as understood: alike parts share a line, so that a person verifies 300 in a minute."""

from __future__ import annotations

from collections.abc import Sequence

from rich.console import Console
from rich.table import Table

from yieldosc.errors import Finding
from yieldosc.parts.grades import tolerance_text
from yieldosc.parts.parameter import Kind, Parameter
from yieldosc.parts.shapes import is_min_typ_max
from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import Deviation
from yieldosc.reports.console_findings import print_findings
from yieldosc.reports.requirements import percent
from yieldosc.reports.terminal import heading, line, one_line, plain_table
from yieldosc.sheets.bomline import BomLine
from yieldosc.study import Study

KINDS: tuple[Kind, ...] = ("crystal", "resistor", "capacitor", "inductor", "transistor", "ic", "diode", "other")
Facts = tuple[str, str, str, str]
NOT_READ = "not read"


def print_check(lines: Sequence[BomLine], findings: Sequence[Finding], console: Console) -> None:
    """Parts grouped by kind, alike ones on one line, smallest value first; then all findings."""
    fitted = [part for part in lines if part.fitted]
    console.print(line(f"{len(lines)} parts read, {len(fitted)} fitted", "bold"))
    console.print()
    table = plain_table(
        ("", ""), ("value", "right"), ("tolerance", ""), ("law", ""), ("more", ""), ("parts", ""), ("rows", "")
    )
    for kind in KINDS:
        _group(kind, [part for part in fitted if part.kind == kind], table)
    _group("not fitted", [part for part in lines if not part.fitted], table)
    console.print(table)
    _all_findings(findings, console)


def _group(title: str, parts: Sequence[BomLine], table: Table) -> None:
    alike: dict[Facts, list[BomLine]] = {}
    for part in sorted(parts, key=lambda p: (p.value is None, p.value or 0.0)):
        alike.setdefault(_facts(part), []).append(part)
    for i, (facts, same) in enumerate(alike.items()):
        rows = compact([str(p.place.row) for p in sorted(same, key=_row) if p.place.row is not None])
        names = compact(sorted((one_line(p.designator) for p in same), key=_natural))
        style = "yellow" if facts[0] == NOT_READ else ""
        first = title if i == 0 else ""
        table.add_row(first, *(line(fact) for fact in facts), names, rows, style=style, end_section=i == len(alike) - 1)


def _row(part: BomLine) -> int:
    return part.place.row or 0


def _natural(name: str) -> tuple[str, int]:
    """R2 before R10."""
    letters = name.rstrip("0123456789")
    return letters, int(name[len(letters) :] or 0)


def _facts(part: BomLine) -> Facts:
    value = NOT_READ if part.value is None else format_quantity(part.value, part.si_unit, 6)
    if part.value is None and part.kind not in ("resistor", "capacitor", "inductor", "crystal"):
        value = "—"
    more = [f"load {format_quantity(part.load_f, 'F')}"] if part.load_f is not None else []
    if part.esr_ohm is not None:
        more.append(f"ESR {format_quantity(part.esr_ohm, 'Ω')}")
    if part.decoded:
        more.append(f"from part number: {', '.join(part.decoded)}")
    return value, bounds_text(part.tolerance), part.temperature_law or "—", "; ".join(more)


def bounds_text(tolerance: tuple[float, float] | None) -> str:
    """ "±5 %", "+80/−20 %", "±30 ppm", a dash."""
    if tolerance is None:
        return "—"
    low, high = tolerance
    scale, unit = (1e6, "ppm") if max(-low, high) < 0.5e-3 else (100.0, "%")
    low, high = round(low * scale, 6), round(high * scale, 6)
    return f"±{high:g} {unit}" if low == -high else f"+{high:g}/−{-low:g} {unit}"


def compact(names: Sequence[str]) -> str:
    """ "R1–R4, R7": runs of consecutive numbers behind equal letters are joined."""
    made: list[str] = []
    run: list[tuple[str, int]] = []
    for name in [*dict.fromkeys(names), ""]:
        letters = name.rstrip("0123456789")
        digits = name[len(letters) :]
        number = int(digits) if digits and not (digits.startswith("0") and len(digits) > 1) else None
        if run and number is not None and letters == run[-1][0] and number == run[-1][1] + 1:
            run.append((letters, number))
            continue
        made += _closed(run)
        run = [(letters, number)] if number is not None else []
        made += [name] if name and number is None else []
    return ", ".join(made)


def _closed(run: Sequence[tuple[str, int]]) -> list[str]:
    words = [f"{letters}{number}" for letters, number in run]
    return words if len(words) < 3 else [f"{words[0]}–{words[-1]}"]


def _all_findings(findings: Sequence[Finding], console: Console) -> None:
    counts = [
        f"{n} {level}{'' if n == 1 else 's'}"
        for level in ("error", "warning", "note")
        if (n := sum(f.level == level for f in findings))
    ]
    console.print()
    console.print(line("Findings: " + (", ".join(counts) if counts else "none"), "bold"))
    print_findings(findings, console)


def print_study(study: Study, console: Console) -> None:
    """What is to be analysed, then every role as understood, then the BOM."""
    design = study.design
    scale = Deviation.of(design)
    console.print(line(f"{study.name} · {study.circuit.title} · digest {study.digest[:8]}", "bold"))
    low, high = scale.limit_text(design.frequency_low_hz), scale.limit_text(design.frequency_high_hz)
    temperatures = ", ".join(f"{t:g}" for t in design.temperatures_c)
    target = "no yield target" if design.yield_target is None else f"yield target {percent(design.yield_target)}"
    console.print(line(f"{format_quantity(scale.target_hz, 'Hz', 9)}, {low} to {high}; margin at least "
                       f"{design.least_margin:g}; {target}"))  # fmt: skip
    console.print(line(f"{len(design.corners())} corners; temperatures {temperatures} °C"))
    heading(console, "Roles", "as they will be drawn")
    table = plain_table(
        ("role", ""), ("part", ""), ("value", "right"), ("tolerance", ""), ("shape", ""), ("law", ""), ("source", ""),
        ("cell", ""),
    )  # fmt: skip
    for p in study.parameters:
        table.add_row(*(line(text) for text in _role(p)))
    for role, value in study.conditions.items():
        text = format_quantity(value, study.circuit.role(role).unit, 6)
        table.add_row(line(role), "", text, "condition", "", "", "", "")
    console.print(table)
    lines = [part for part in study.bom if isinstance(part, BomLine)]
    if lines:
        console.print()
        print_check(lines, study.findings, console)


def spread_text(p: Parameter) -> str:
    """ "±5 %"; "4 fF to 7 fF" where bounds were given as values."""
    if is_min_typ_max(p.shape) and p.high > p.low:
        return f"{format_quantity(p.low, p.unit)} to {format_quantity(p.high, p.unit)}"
    return tolerance_text(p)


def _role(p: Parameter) -> tuple[str, ...]:
    where = next((g.place for name in ("typ", "value", "min") if (g := p.given.get(name)) is not None), "")
    return (
        p.role, "" if p.part == p.role else p.part, format_quantity(p.typical, p.unit, 6), spread_text(p),
        p.shape.text, p.law.text if p.law is not None else "—", p.pedigree, where,
    )  # fmt: skip
