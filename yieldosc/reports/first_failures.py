"""Sentences on the ends of the temperature range: how units start there, and where failing units fail first."""

from __future__ import annotations

from yieldosc.reports.amounts import listed, margin_text
from yieldosc.studies.digits import rate_text
from yieldosc.studies.results import Assessment, CornerResult

MOST_CORNERS = 4


def start_at_the_ends(a: Assessment) -> str:
    """Start-up at the coldest and at the hottest temperature; empty without a start-up question or a range."""
    asked = [c for c in a.corners if c.startup_rate is not None]
    coldest, hottest = (f((c.corner.temperature_c for c in asked), default=0.0) for f in (min, max))
    if not asked or coldest == hottest:
        return ""
    return f"Start-up at the coldest, {_end(asked, coldest)}; at the hottest, {_end(asked, hottest)}."


def _end(asked: list[CornerResult], temperature_c: float) -> str:
    """The worst over supply and age at one temperature."""
    here = [c for c in asked if c.corner.temperature_c == temperature_c]
    worst = max(here, key=lambda c: c.startup_failures or 0)
    margins = [c.margin.min for c in here if c.margin is not None]
    rate = "" if worst.startup_rate is None else rate_text(worst.startup_rate)
    least = f", smallest margin {margin_text(min(margins))}" if margins else ""
    return f"{temperature_c:g} °C: {rate} do not start{least}"


def where_units_fail_first(a: Assessment) -> str:
    """Failing units by the first corner that fails them, in the order of the corners; those between apart."""
    counted = sorted(((c.first_failures, c.corner.text) for c in a.corners if c.first_failures), reverse=True)
    check = None if a.scrutiny is None else a.scrutiny.temperatures
    between = 0 if check is None else check.flips
    if not counted or len(a.corners) < 2:
        return ""
    named = [f"{n:,} at {text}" for n, text in counted[:MOST_CORNERS]]
    rest = sum(n for n, _ in counted[MOST_CORNERS:])
    if rest:
        named.append(f"{rest:,} elsewhere")
    if between:
        named.append(f"{between:,} only between two temperatures")
    return f"Going through the corners from cold to hot, failing units fail first: {listed(named)}."
