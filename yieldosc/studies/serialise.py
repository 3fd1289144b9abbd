"""Assessment → the JSON contract: plain dictionaries, no value that JSON cannot write."""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import asdict

from yieldosc.studies.results import (
    Assessment,
    Band,
    CornerResult,
    Distribution,
    Estimate,
    Lots,
    Ranking,
    RankLine,
)
from yieldosc.studies.serialise_decisions import limiter_dict, pilot_dict
from yieldosc.studies.serialise_scrutiny import scrutiny_dict


def assessment_dict(assessment: Assessment) -> dict[str, object]:
    """The `assess` object of the interface; keys beyond its stable core are marked by their own names."""
    a = assessment
    document: dict[str, object] = {
        "verdict": a.verdict,
        "conditions": list(a.conditions),
        "yield": _yield(a.yield_),
        "yield_range": list(a.yield_range),
        "looks": [asdict(look) for look in a.looks],
        "looks_planned": a.looks_planned,
        "outcomes": dict(a.outcomes),
        "corners": [_corner(corner) for corner in a.corners],
        "nominal": [asdict(point) for point in a.nominal],
        "ranking": {output: _ranking(a.rankings.get(output)) for output in ("frequency", "margin")},
        "ranking_causes": {output: _lines(ranking.causes) for output, ranking in a.rankings.items()},
        "rivals": [
            {
                "name": r.name,
                "meaning": r.meaning,
                "yield": _estimate(r.yield_),
                "difference": _estimate(r.difference),
            }
            for r in a.rivals
        ],
        "rival_units": a.rival_units,
        "bands": [_band(band) for band in a.bands],
        "lots": None if a.lots is None else _lots(a.lots),
        "tighter": [
            {
                "part": t.part,
                "from": t.from_tolerance,
                "to": t.to_tolerance,
                "yield": _estimate(t.yield_),
                "difference": _estimate(t.difference),
            }
            for t in a.tighter
        ],
        "wrong_mode_share": [asdict(line) for line in a.wrong_mode_share],
        "failure_share": [asdict(line) for line in a.failure_share],
        "worst_units": [asdict(unit) for unit in a.worst_units],
        "wrong_modes_hz": list(a.wrong_modes_hz),
        "bench_ratio": a.bench_ratio,
        "second_sources": [
            {"fitted": dict(c.fitted), "yield": _estimate(c.yield_), "difference": _estimate(c.difference)}
            for c in a.second_sources
        ],
        "limiter": None if a.limiter is None else limiter_dict(a.limiter),
        "crystal_start": [asdict(line) for line in a.crystal_start],
        "pilot": None if a.pilot is None else pilot_dict(a.pilot),
        "findings": [finding.to_dict() for finding in a.findings],
        "cautions": list(a.cautions),
        # The number of workers is no part of the result: documents from any number of them are equal but for times.
        "provenance": {key: value for key, value in asdict(a.provenance).items() if key != "workers"},
    } | scrutiny_dict(a.scrutiny)
    return {key: finite(value) for key, value in document.items()}


def finite(value: object) -> object:
    """The same with every float that is not finite replaced by None, tuples by lists, keys by text."""
    if isinstance(value, float):
        return value if math.isfinite(value) else None
    if isinstance(value, Mapping):
        return {str(key): finite(item) for key, item in value.items()}
    if isinstance(value, list | tuple):
        return [finite(item) for item in value]
    return value


def _estimate(estimate: Estimate | None) -> dict[str, object] | None:
    return None if estimate is None else estimate.to_dict()


def _yield(estimate: Estimate) -> dict[str, object]:
    return estimate.to_dict() | {
        "confidence": estimate.confidence,
        "units": estimate.units,
        "failures": estimate.failures,
    }


def _distribution(distribution: Distribution | None) -> dict[str, object] | None:
    if distribution is None:
        return None
    names = ("mean", "sd", "min", "max", "q001", "q50", "q999")
    return {name: getattr(distribution, name) for name in names}


def _corner(result: CornerResult) -> dict[str, object]:
    startup = None
    if result.startup_failures is not None:
        startup = {
            "failures": result.startup_failures,
            "rate": _estimate(result.startup_rate),
            "tail": None,
            "margin_min": None if result.margin is None else result.margin.min,
            "margin_q001": None if result.margin is None else result.margin.q001,
        }
    return {
        "temperature_c": result.corner.temperature_c,
        "supply_v": result.corner.supply_v,
        "age_years": result.corner.age_years,
        "frequency_hz": _distribution(result.frequency_hz),
        "settled_hz": _distribution(result.settled_hz),
        "distortion": _distribution(result.distortion),
        **{name: _distribution(d) for name, d in result.others.items()},
        "startup": startup,
        "yield": _estimate(result.yield_),
        "failing": dict(result.failing),
        "first_failures": result.first_failures,
    }


def _ranking(ranking: Ranking | None) -> list[dict[str, object]]:
    return [] if ranking is None else _lines(ranking.parts)


def _lines(lines: tuple[RankLine, ...]) -> list[dict[str, object]]:
    return [
        {
            "part": line.part,
            "first_order": _estimate(line.first_order),
            "total": _estimate(line.total),
            "mean_first_order": _estimate(line.mean_first_order),
            "mean_total": _estimate(line.mean_total),
            "per_percent": line.per_percent,
        }
        for line in lines
    ]


def _band(band: Band) -> dict[str, object]:
    def pair(bounds: tuple[float, float] | None) -> dict[str, object] | None:
        return None if bounds is None else {"low": bounds[0], "high": bounds[1]}

    return {
        "output": band.output,
        "temperature_c": band.temperature_c,
        "extreme": pair(band.extreme),
        "rss": pair(band.rss),
        "monte_carlo": pair(band.monte_carlo),
        "method": band.method,
        "note": band.note,
        "gap": band.gap,
    }


def _lots(lots: Lots) -> dict[str, object]:
    return {
        "lots": lots.lots,
        "units_per_lot": lots.units_per_lot,
        "q05": lots.q05,
        "q50": lots.q50,
        "q95": lots.q95,
        "share_below_target": _estimate(lots.share_below_target),
        "by_chance": lots.by_chance,
    }
