"""`upgrade`, `limits` and `compare` → the JSON contract; keys beyond its stable core have names of their own."""

from __future__ import annotations

import math
from dataclasses import asdict
from typing import Any

from yieldosc.errors import Finding
from yieldosc.studies.compare.results import CompareResult
from yieldosc.studies.extra_results import LimiterEffect, PilotResult
from yieldosc.studies.limits.acceptance import LimitRates
from yieldosc.studies.limits.results import LimitsResult, ResistanceTest, TrimResult
from yieldosc.studies.results import Estimate, Provenance
from yieldosc.studies.upgrade.results import UpgradeOption, UpgradeResult


def upgrade_dict(r: UpgradeResult) -> dict[str, object]:
    """The `upgrade` object. chosen: index into options, null where no set reaches the target."""
    return _plain(
        {
            "current": {"yield": _estimate(r.current), "cost_per_good_unit": r.current_cost_per_good_unit},
            "options": [_option(o) for o in r.options],
            "chosen": None if r.chosen is None else _index(r),
            "target": r.target,
            "prices": "money" if r.money else "placeholder",
            "recentre": [
                {
                    "part": n.part, "from": n.from_value, "to": n.to_value, "si_unit": n.unit, "series": n.series,
                    "yield": _estimate(n.yield_), "difference": _estimate(n.difference),
                }
                for n in r.recentre
            ],
            "search": None if r.search is None else asdict(r.search) | {"best": _estimate(r.search.best)},
            "units": r.units,
            "confirm_units": r.confirm_units,
            "findings": _findings(r.findings),
            "provenance": _provenance(r.provenance),
        }
    )  # fmt: skip


def _index(r: UpgradeResult) -> int:
    """Of the choice; a set of one change may also stand among the single grades, so it is looked for from the end."""
    options = r.options
    return max(i for i, option in enumerate(options) if option is r.chosen)


def _option(o: UpgradeOption) -> dict[str, object]:
    return {
        "changes": [
            {"part": c.part, "tolerance": c.tolerance, "temperature_law": c.temperature_law} for c in o.changes
        ],
        "yield": _estimate(o.yield_),
        "difference": _estimate(o.difference),
        "price_change": o.price_change,
        "relative_price": o.relative_price,
        "cost_per_good_unit": o.cost_per_good_unit,
        "confirmed": _estimate(o.confirmed),
    }


def limits_dict(r: LimitsResult) -> dict[str, object]:
    """The `limits` object. escapes: per shipped unit, with the other rates beside it."""
    rates = _rates(r.chosen)
    return _plain(
        {
            "test_temperature_c": r.test_corner.temperature_c,
            "test_limit_hz": rates["test_limit_hz"],
            "escapes": rates["escapes"],
            "false_rejects": rates["false_rejects"],
            "measurement_sd_hz": r.sd_hz,
            "measurement_bias_hz": r.bias_hz,
            "trim": None if r.trim is None else _trim(r.trim),
            "escapes_per_built_unit": rates["escapes_per_built_unit"],
            "missed_share": rates["missed_share"],
            "rejected": rates["rejected"],
            "bad": _estimate(r.bad),
            "bad_by": dict(r.bad_by),
            "escape_limit": r.escape_limit,
            "chosen_by_escape_limit": r.chosen_by_level,
            "confirmed": r.confirmed,
            "trade": [
                {"level": line.level} | ({} if line.rates is None else _rates(line.rates)) for line in r.trade
            ],
            "floor": _rates(r.floor.rates) | {"closing": r.floor.closing, "closing_hz": r.floor.closing_hz},
            "resistance_test": None if r.resistance_test is None else _resistance(r.resistance_test),
            "units": r.units,
            "findings": _findings(r.findings),
            "provenance": _provenance(r.provenance),
        }
    )


def _rates(rates: LimitRates) -> dict[str, Any]:
    return {
        "test_limit_hz": {"low": rates.low_hz, "high": rates.high_hz},
        "escapes": _estimate(rates.escapes_shipped),
        "escapes_per_built_unit": _estimate(rates.escapes_built),
        "missed_share": _estimate(rates.missed),
        "false_rejects": _estimate(rates.false_rejects),
        "rejected": _estimate(rates.rejected),
    }


def _resistance(test: ResistanceTest) -> dict[str, object]:
    return {
        "lines": [
            {
                "added_ohm": line.added_ohm, "start_escapes": _estimate(line.start_escapes),
                "false_rejects": _estimate(line.false_rejects),
            }
            for line in test.lines
        ],
        "chosen": test.chosen,
        "start_failures": _estimate(test.start_failures),
        "units": test.units,
    }  # fmt: skip


def _trim(t: TrimResult) -> dict[str, object]:
    shares = ("reached", "at_low", "at_high", "ceased", "unreadable", "suggested_reached", "unmet")
    return {
        "role": t.role, "part": t.part, "kind": t.kind, "low": t.low, "high": t.high, "si_unit": t.unit,
        **{name: _estimate(getattr(t, name)) for name in shares},
        "yield_before": _estimate(t.yield_before), "yield_after": _estimate(t.yield_after),
        "difference": _estimate(t.difference), "needed": dict(t.needed),
        "suggested": {"low": t.suggested_low, "high": t.suggested_high, "middle": t.needed["q50"]},
        "corners": [asdict(c) for c in t.corners], "units": t.units,
    }  # fmt: skip


def compare_dict(r: CompareResult) -> dict[str, object]:
    """The `compare` object."""
    return _plain(
        {
            "first": {"name": r.before.name, "input_sha256": r.before.digest},
            "second": {"name": r.after.name, "input_sha256": r.after.digest},
            "differences": [
                {"kind": d.group, "name": d.name, "first": d.before, "second": d.after} for d in r.differences
            ],
            "rates": [
                {
                    "name": c.name, "first": _estimate(c.before), "second": _estimate(c.after),
                    "difference": _estimate(c.difference),
                }
                for c in r.rates
            ],
            "steps": [
                {"name": s.name, "yield": _estimate(s.yield_), "difference": _estimate(s.difference)} for s in r.steps
            ],
            "together": _estimate(r.together),
            "units": r.units,
            "step_units": r.step_units,
            "findings": _findings(r.findings),
            "provenance": _provenance(r.provenance),
        }
    )  # fmt: skip


def limiter_dict(effect: LimiterEffect) -> dict[str, object]:
    """What the declared limiter did to the yield, and the account of the settling."""
    return {
        "limiter": effect.limiter,
        "yield_with": _estimate(effect.yield_with),
        "yield_without": _estimate(effect.yield_without),
        "difference": _estimate(effect.difference),
        "account": asdict(effect.account),
    }


def pilot_dict(p: PilotResult) -> dict[str, object]:
    """Measured boards against the prediction, as `assess` carries it."""
    return asdict(p) | {
        "predicted_no_start": _estimate(p.predicted_no_start),
        "bench_frequency_hz": _estimate(p.bench_frequency_hz),
    }


def _estimate(estimate: Estimate | None) -> dict[str, object] | None:
    return None if estimate is None else estimate.to_dict()


def _findings(findings: tuple[Finding, ...]) -> list[dict[str, object]]:
    return [f.to_dict() for f in findings]


def _provenance(p: Provenance) -> dict[str, object]:
    return asdict(p)


def _plain(content: dict[str, Any]) -> dict[str, object]:
    """JSON knows no infinity and no nan: absent is null."""
    return {key: _value(value) for key, value in content.items()}


def _value(value: Any) -> Any:
    if isinstance(value, dict):
        return _plain(value)
    if isinstance(value, list | tuple):
        return [_value(v) for v in value]
    if isinstance(value, float) and not math.isfinite(value):
        return None
    return value
