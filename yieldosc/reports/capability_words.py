"""Sentences on predicted capability, on what a pilot could show of it, and on what a demonstration needs."""

from __future__ import annotations

import math

from yieldosc.reports.amounts import MINUS, listed
from yieldosc.reports.requirements import percent
from yieldosc.studies.results import Assessment
from yieldosc.studies.scrutiny import Capability, Demonstration, PilotCapability

NEVER = "A capability index is no failing share: every rate here is counted, none comes from an index."
NAMES = {"frequency": "frequency", "margin": "start-up margin"}


def capability_sentences(a: Assessment) -> tuple[str, ...]:
    """Indices, then pilots, then demonstrations; the caution first where there is an index."""
    s = a.scrutiny
    if s is None:
        return ()
    made = [capability_sentence(c) for c in s.capability]
    if s.capability:
        made.append(NEVER)
    return (*made, *pilot_sentences(s.pilots), *demonstration_sentences(s.demonstrations))


def capability_sentence(c: Capability) -> str:
    """ "Predicted Ppk of the frequency at 60 °C, where it is least: 0.62 (0.61 to 0.63), Pp 0.70; by percentiles …"."""
    pp = "" if c.pp is None else f", Pp {number(c.pp)}"
    theory = (
        "normal theory says the same"
        if c.normal
        else f"normal theory would say {number(c.normal_ppk)}, so the distribution is not normal in its tails"
    )
    return (
        f"Predicted Ppk of the {NAMES[c.output]} at {c.corner}, where it is least: {number(c.ppk.estimate)} "
        f"({number(c.ppk.low)} to {number(c.ppk.high)}){pp}; from the 0.135, 50 and 99.865 % points of {c.units:,} "
        f"units, {theory}."
    )


def pilot_sentences(pilots: tuple[PilotCapability, ...]) -> tuple[str, ...]:
    """What pilots of several sizes would show."""
    if not pilots:
        return ()
    told = [f"{p.boards} boards {number(p.low)} to {number(p.high)}" for p in pilots]
    return (
        f"If that is true of the frequency, {percent(pilots[0].probability)} of pilot runs show a Ppk within: "
        f"{listed(told)} (normal boards).",
    )


def demonstration_sentences(needed: tuple[Demonstration, ...]) -> tuple[str, ...]:
    """How many clean boards would demonstrate a rate."""
    if not needed:
        return ()
    told = [f"{d.boards:,} for {rate_words(d.rate)}" for d in needed]
    return (
        f"To demonstrate a failing share on real boards at {percent(needed[0].confidence)} confidence, so many must be "
        f"tested without one failure: {listed(told)}.",
    )


def rate_words(rate: float) -> str:
    """ "1 %", "100 ppm"."""
    return percent(round(rate, 12)) if rate >= 2e-3 else f"{rate * 1e6:.6g} ppm"


def number(value: float) -> str:
    """An index with two decimals, a true minus; "unlimited" where nothing spreads towards the limit."""
    if math.isinf(value):
        return "unlimited"
    return f"{value:.2f}".replace("-", MINUS)
