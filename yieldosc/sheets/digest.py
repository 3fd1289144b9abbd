"""SHA-256 of the inputs as understood: the same study gives the same digest in every file format."""

from __future__ import annotations

import hashlib
import json

import numpy as np

from yieldosc.circuits import own_circuit
from yieldosc.parts.parameter import Law, Parameter
from yieldosc.parts.shapes import Measured
from yieldosc.study import Study


def digest_of(study: Study) -> str:
    """Hexadecimal digest of circuit, options, parameters, conditions and design; names and places left out."""
    content: dict[str, object] = {
        "circuit": study.circuit.name,
        "options": dict(study.circuit.options),
        "parameters": [_parameter(p) for p in sorted(study.parameters, key=lambda p: p.role)],
        "conditions": dict(study.conditions),
        "design": study.design.items(),
    }
    if study.grades:
        content["grades"] = [
            [g.target, g.tolerance, None if g.law_text is None else [g.law_text, _law(g.law)], g.price, g.price_factor]
            for g in study.grades
        ]
    if study.alternates:
        content["alternates"] = [
            [a.part, a.name, [_parameter(p) for p in a.parameters], a.price] for a in study.alternates
        ]
    if study.pilot is not None:
        content["pilot"] = [study.pilot.frequency_hz, study.pilot.no_starts]
    if study.prices:
        content["prices"] = dict(study.prices)
    if study.circuit.name == own_circuit.NAME:
        content["branches"] = [(b.kind, b.nodes, b.symbols, b.gain_element) for b in study.circuit.branches]
    text = json.dumps(content, sort_keys=True, ensure_ascii=False, separators=(",", ":"), default=list)
    return hashlib.sha256(text.encode()).hexdigest()


def _parameter(p: Parameter) -> dict[str, object]:
    return {
        "role": p.role, "part": p.part, "trait": p.trait, "unit": p.unit,
        "low": p.low, "typical": p.typical, "high": p.high, "shape": p.shape.text,
        "measured": p.shape.values if isinstance(p.shape, Measured) else None,
        "law": _law(p.law), "solder": p.solder, "drift": p.drift,
        "ageing": None if p.ageing is None else [p.ageing.per_decade, p.ageing.reference_h],
        "reel": p.reel, "reel_share": p.reel_share, "pedigree": p.pedigree,
    }  # fmt: skip


def _law(law: Law | None) -> list[object] | None:
    """Its text, and what it does at two temperatures: a table's text is only its name."""
    if law is None:
        return None
    quarter = dict.fromkeys(law.coefficients, np.array([0.25]))
    return [law.text, [float(np.ravel(law.change(t, quarter))[0]) for t in (-20.0, 60.0)]]
