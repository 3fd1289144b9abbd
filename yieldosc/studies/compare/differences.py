"""Two studies → what they say differently, in the order circuit, parts, assumptions, limits, conditions."""

from __future__ import annotations

from collections.abc import Iterator, Mapping

from yieldosc.circuits.own_circuit import NAME as OWN
from yieldosc.parts.grades import tolerance_text
from yieldosc.parts.parameter import Parameter
from yieldosc.quantities import format_quantity
from yieldosc.studies.compare.results import Difference, Group
from yieldosc.study import Design, Study

ABSENT = "—"
LIMITS = {
    "target_frequency_hz": ("target frequency", "Hz"),
    "frequency_low_hz": ("frequency limit low", "Hz"),
    "frequency_high_hz": ("frequency limit high", "Hz"),
    "least_margin": ("least margin", "1"),
    "longest_startup_s": ("longest start-up time", "s"),
    "most_distortion": ("most distortion", "1"),
    "most_drive_w": ("most drive", "W"),
    "yield_target": ("yield target", "1"),
    "escape_limit": ("escape limit", "1"),
}
CONDITIONS = {
    "temperature_low_c": ("temperature low", "°C"),
    "temperature_high_c": ("temperature high", "°C"),
    "temperature_points": ("temperature points", "1"),
    "supply_v": ("supply", "V"),
    "supply_tolerance": ("supply tolerance", "1"),
    "life_years": ("life", "years"),
    "confidence": ("confidence", "1"),
    "default_shape": ("default shape", ""),
    "reel_share": ("reel share", "1"),
    "bench_frequency_hz": ("bench frequency", "Hz"),
    "startup_ratio": ("start-up ratio", "1"),
    "trim_role": ("trim role", ""),
    "trim_low": ("trim low", ""),
    "trim_high": ("trim high", ""),
    "trim_step": ("trim step", ""),
    "trim_step_tolerance": ("trim step tolerance", "1"),
    "trim_series": ("trim series", ""),
    "test_temperature_c": ("test temperature", "°C"),
    "measurement_sd_hz": ("measurement sd", "Hz"),
    "measurement_bias_hz": ("measurement bias", "Hz"),
    "build_quantity": ("build quantity", "1"),
    "failed_unit_cost": ("cost of a failed unit", "1"),
}
PART_FIELDS = ("part", "value", "tolerance", "temperature law", "solder", "drift", "ageing")
ASSUMPTION_FIELDS = ("shape", "reel share", "source")
OTHER_VALUES = "{}, other values"  # of a table or of measured parts that has the same name in both


def differences(before: Study, after: Study) -> tuple[Difference, ...]:
    """Every difference."""
    return (
        *_circuit(before, after),
        *_parts(before, after, PART_FIELDS, "part"),
        *_parts(before, after, ASSUMPTION_FIELDS, "assumption"),
        *_design(before.design, after.design, LIMITS, "limit"),
        *_design(before.design, after.design, CONDITIONS, "condition"),
        *_conditions(before, after),
    )


def _circuit(before: Study, after: Study) -> Iterator[Difference]:
    if before.circuit.name != after.circuit.name:
        yield Difference(group="circuit", name="circuit", before=before.circuit.name, after=after.circuit.name)
    elif _rows(before) != _rows(after):
        yield Difference(
            group="circuit", name="branch table", before=f"{len(_rows(before))} branches",
            after=OTHER_VALUES.format(f"{len(_rows(after))} branches"),
        )  # fmt: skip
    a, b = before.circuit.options, after.circuit.options
    for name in dict.fromkeys((*a, *b)):
        if a.get(name) != b.get(name):
            yield Difference(
                group="circuit", name=f"option {name}", before=a.get(name, ABSENT), after=b.get(name, ABSENT)
            )


def _rows(study: Study) -> list[tuple[object, ...]]:
    """The branches that options do not decide: those of the user's own table."""
    return [(b.kind, b.nodes, b.symbols, b.gain_element) for b in study.circuit.branches if study.circuit.name == OWN]


def _parts(before: Study, after: Study, fields: tuple[str, ...], group: Group) -> Iterator[Difference]:
    a, b = ({p.role: _texts(p) for p in study.parameters} for study in (before, after))
    b = {role: _told_apart(texts, before, after, role) if role in a else texts for role, texts in b.items()}
    for role in dict.fromkeys((*a, *b)):
        if role not in a or role not in b:
            if group == "part":
                there = "in the first study only" if role in a else "in the second study only"
                yield Difference(
                    group=group, name=role, before=_whole(a.get(role)), after=_whole(b.get(role)) or there, role=role
                )
            continue
        for field in fields:
            if a[role][field] != b[role][field]:
                yield Difference(
                    group=group, name=f"{role} {field}", before=a[role][field], after=b[role][field], role=role
                )


def _texts(p: Parameter) -> Mapping[str, str]:
    return {
        "part": p.part,
        "value": format_quantity(p.typical, p.unit, 9),
        "tolerance": tolerance_text(p),
        "temperature law": ABSENT if p.law is None else p.law.text,
        "solder": _sides(p.solder),
        "drift": _sides(p.drift),
        "ageing": ABSENT if p.ageing is None else f"{p.ageing.per_decade * 100:g} % per decade",
        "shape": p.shape.text,
        "reel share": f"{p.reel_share:g}" if p.reel is not None else ABSENT,
        "source": p.pedigree,
    }


def _told_apart(texts: Mapping[str, str], before: Study, after: Study, role: str) -> Mapping[str, str]:
    """The second study's texts, where a law or a shape of the same name is another one."""
    p, q = before.parameter(role), after.parameter(role)
    made = dict(texts)
    if p.law is not None and q.law is not None and p.law.text == q.law.text and p.law != q.law:
        made["temperature law"] = OTHER_VALUES.format(q.law.text)
    if p.shape.text == q.shape.text and p.shape != q.shape:
        made["shape"] = OTHER_VALUES.format(q.shape.text)
    return made


def _whole(texts: Mapping[str, str] | None) -> str:
    if texts is None:
        return ABSENT
    return ", ".join(texts[name] for name in ("value", "tolerance", "temperature law") if texts[name] != ABSENT)


def _sides(bounds: tuple[float, float]) -> str:
    low, high = bounds
    if low == high == 0:
        return ABSENT
    if low == -high:
        return f"±{high * 100:g} %"
    return f"{high * 100:+g}/{low * 100:+g} %"


def _design(
    a: Design, b: Design, names: Mapping[str, tuple[str, str]], group: Group
) -> Iterator[Difference]:
    for field, (name, unit) in names.items():
        first, second = getattr(a, field), getattr(b, field)
        if first != second:
            yield Difference(group=group, name=name, before=_shown(first, unit), after=_shown(second, unit))


def _shown(value: object, unit: str) -> str:
    if value is None:
        return ABSENT
    if isinstance(value, tuple):
        return _sides(value)
    if isinstance(value, float) and unit in ("Hz", "V", "s", "W"):
        return format_quantity(value, unit, 9)
    text = f"{value:.12g}" if isinstance(value, float) else str(value)
    return text if unit in ("", "1") else f"{text} {unit}"


def _conditions(before: Study, after: Study) -> Iterator[Difference]:
    for name in dict.fromkeys((*before.conditions, *after.conditions)):
        first, second = (s.conditions.get(name) for s in (before, after))
        if first != second:
            unit = next((r.unit for s in (before, after) for r in s.circuit.roles if r.name == name), "")
            texts = [ABSENT if v is None else format_quantity(v, unit, 6) for v in (first, second)]
            yield Difference(group="condition", name=name, before=texts[0], after=texts[1])
