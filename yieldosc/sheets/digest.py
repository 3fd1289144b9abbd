"""SHA-256 of the inputs as understood: the same study gives the same digest in every file format."""

from __future__ import annotations

import hashlib
import json

import numpy as np

from yieldosc.circuits import own_circuit
from yieldosc.parts.parameter import Parameter
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
    if study.circuit.name == own_circuit.NAME:
        content["branches"] = [(b.kind, b.nodes, b.symbols, b.gain_element) for b in study.circuit.branches]
    text = json.dumps(content, sort_keys=True, ensure_ascii=False, separators=(",", ":"), default=list)
    return hashlib.sha256(text.encode()).hexdigest()


def _parameter(p: Parameter) -> dict[str, object]:
    law = None
    if p.law is not None:
        quarter = dict.fromkeys(p.law.coefficients, np.array([0.25]))
        law = [p.law.text, [float(np.ravel(p.law.change(t, quarter))[0]) for t in (-20.0, 60.0)]]
    return {
        "role": p.role, "part": p.part, "trait": p.trait, "unit": p.unit,
        "low": p.low, "typical": p.typical, "high": p.high, "shape": p.shape.text,
        "measured": p.shape.values if isinstance(p.shape, Measured) else None,
        "law": law, "solder": p.solder, "drift": p.drift,
        "ageing": None if p.ageing is None else [p.ageing.per_decade, p.ageing.reference_h],
        "reel": p.reel, "reel_share": p.reel_share, "pedigree": p.pedigree,
    }  # fmt: skip
