"""Scrutiny → keys of the `assess` object that stand beside its stable core."""

from __future__ import annotations

from dataclasses import asdict

from yieldosc.studies.results import Estimate, RivalResult
from yieldosc.studies.scrutiny import Capability, Knowledge, Scrutiny, TemperatureCheck


def scrutiny_dict(scrutiny: Scrutiny | None) -> dict[str, object]:
    """One key per question; empty lists and nulls where it does not arise."""
    s = scrutiny or Scrutiny()
    return {
        "spread_by_assumption": [_knowledge(k) for k in s.knowledge],
        "bench_list": [asdict(item) for item in s.bench_list],
        "capability": [_capability(c) for c in s.capability],
        "pilots": [asdict(pilot) for pilot in s.pilots],
        "demonstrations": [asdict(demonstration) for demonstration in s.demonstrations],
        "measured_lots": [asdict(lot) | {"narrow": lot.narrow, "off_centre": lot.off_centre} for lot in s.measured],
        "measured_uncertainty": None if s.measured_uncertainty is None else asdict(s.measured_uncertainty),
        "temperature_check": None if s.temperatures is None else _temperatures(s.temperatures),
    }


def _capability(c: Capability) -> dict[str, object]:
    return asdict(c) | {
        "quantiles": [q.to_dict() for q in c.quantiles],
        "ppk": c.ppk.to_dict(),
        "normal": c.normal,
    }


def _temperatures(t: TemperatureCheck) -> dict[str, object]:
    return asdict(t) | {
        "flip_rate": t.flip_rate.to_dict(),
        "missed_rate": t.missed_rate.to_dict(),
        "grid_enough": t.grid_enough,
        "enough": t.enough,
    }


def _knowledge(k: Knowledge) -> dict[str, object]:
    return {
        "knowledge": k.name,
        "roles": list(k.roles),
        "sets": k.sets,
        "fall": k.fall,
        "rise": k.rise,
        "lowest": _end(k.lowest),
        "highest": _end(k.highest),
        "measurable": k.measurable,
    }


def _end(rival: RivalResult | None) -> dict[str, object] | None:
    if rival is None:
        return None
    return {"name": rival.name, "yield": _estimate(rival.yield_), "difference": _estimate(rival.difference)}


def _estimate(estimate: Estimate | None) -> dict[str, object] | None:
    return None if estimate is None else estimate.to_dict()
