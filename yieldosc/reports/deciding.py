"""Sentences on what decides the yield: how units fail, where, and which parts move frequency and margin."""

from __future__ import annotations

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import listed, margin_text, share_text
from yieldosc.reports.failing_parts import failing_sentences
from yieldosc.reports.first_failures import start_at_the_ends, where_units_fail_first
from yieldosc.reports.lot_words import lots_sentence
from yieldosc.reports.terminal import one_line
from yieldosc.studies.digits import rate_text
from yieldosc.studies.estimates import clopper_pearson
from yieldosc.studies.results import Assessment, CornerResult, Ranking, RankLine

SHOWS = {
    "no_bias": "have no bias point",
    "undefined": "cannot be solved",
    "not_assessable": "lie outside the model's range",
    "no_start": "do not start",
    "wrong_mode": "start on another mode",
    "low_margin": "start with too little margin",
    "slow_start": "start too slowly",
    "out_of_limits": "run outside the frequency limits",
    "distorted": "distort too much",
    "over_drive": "drive the crystal too hard",
}
NAMES = {"frequency": "Frequency", "margin": "Start-up margin"}
MOST_NAMED = 4
MOST_PUSHING = 3


def how_units_fail(a: Assessment) -> str:
    """The outcomes of the declared run, in words; zero failures are a bound."""
    units = a.yield_.units or sum(a.outcomes.values())
    failing = {name: n for name, n in a.outcomes.items() if n and name != "good"}
    if not failing:
        none = clopper_pearson(0, units, a.yield_.confidence)
        return f"None of {units:,} simulated units failed: the failing share is {rate_text(none)}, not zero."
    if len(failing) == 1:
        ((name, count),) = failing.items()
        return f"Of {units:,} simulated units {count:,} fail, all in one way: they {SHOWS[name]}."
    parts = [f"{n:,} {SHOWS[name]}" for name, n in sorted(failing.items(), key=lambda item: -item[1])]
    return f"Of {units:,} simulated units {sum(failing.values()):,} fail: {listed(parts)}."


def where_units_fail(a: Assessment) -> str:
    """The corner that fails most units; empty where none fails or where there is one corner only."""
    counted = [(sum(c.failing.values()), c) for c in a.corners]
    most, corner = max(counted, key=lambda item: item[0])
    if not most or len(a.corners) < 2:
        return ""
    units = a.yield_.units or most
    rate = clopper_pearson(most, units, a.study.design.confidence)
    return f"The corner that fails most units is {corner.corner.text}: {rate_text(rate)} of them fail there."


def coldest_start(a: Assessment) -> str:
    """Where the start-up margin is smallest; empty for a circuit without a start-up question."""
    worst = worst_start(a)
    if worst is None or worst.margin is None:
        return ""
    return f"The smallest start-up margin simulated is {margin_text(worst.margin.min)}, at {worst.corner.text}."


def worst_start(a: Assessment) -> CornerResult | None:
    """The corner of the smallest margin."""
    asked = [c for c in a.corners if c.margin is not None]
    return min(asked, key=lambda c: c.margin.min if c.margin is not None else float("inf")) if asked else None


def leaders(ranking: Ranking) -> tuple[RankLine, ...]:
    """The parts that the looks do not tell apart from the first: they share the lead."""
    return tuple(line for line in ranking.parts if line.part in ranking.leaders)


def ranking_sentence(ranking: Ranking) -> str:
    """Which parts lead for one output, or that they cannot be told apart, or why there is no ranking."""
    name = NAMES[ranking.output]
    if ranking.withheld:
        return f"{name}: parts are not ranked, because {ranking.withheld}."
    if not ranking.parts:
        return f"{name}: no part moves it."
    where = f"{name}, at {ranking.corner.text} where it varies most"
    lead = leaders(ranking)
    if len(lead) == 1:
        first, rest = lead[0], ranking.parts[1:2]
        then = f", then {one_line(rest[0].part)} with {share_text(rest[0].total)}" if rest else ""
        return f"{where}: {one_line(first.part)} decides {share_text(first.total)} of the variance{then}."
    named = [f"{one_line(line.part)} {share_text(line.total)}" for line in lead[:MOST_NAMED]]
    more = len(lead) - MOST_NAMED
    tail = f", and {more} more" if more > 0 else ""
    tried = f"{ranking.looks} of {ranking.looks_planned} planned looks"
    return f"{where}: {listed(named)}{tail} of the variance; they cannot be told apart after {tried}."


def causes_sentence(ranking: Ranking) -> str:
    """What moves the leading parts themselves: initial value, temperature, drift and solder."""
    told = []
    for part in (line.part for line in leaders(ranking)[:2]):
        inside = [line for line in ranking.causes if line.part.startswith(f"{part}: ")]
        if len(inside) > 1:
            shares = [f"{line.part.removeprefix(f'{part}: ')} {share_text(line.total)}" for line in inside]
            told.append(f"{one_line(part)}: {listed(shares)}")
    return f"{NAMES[ranking.output]} by cause, of the whole variance: {'; '.join(told)}." if told else ""


def wrong_modes_sentence(a: Assessment) -> str:
    """Where units run that start on another mode."""
    if not a.wrong_modes_hz:
        return ""
    low, high = (format_quantity(f, "Hz", 4) for f in (min(a.wrong_modes_hz), max(a.wrong_modes_hz)))
    where = f"at {low}" if low == high else f"between {low} and {high}"
    return f"Units that start on another mode run {where}{_pushed_there(a)}."


def _pushed_there(a: Assessment) -> str:
    """Which draws set them apart from all units, while enough of them are known."""
    if not a.wrong_mode_share:
        return "; too few of them are known to say which parts push a unit there"
    clear = [f for f in a.wrong_mode_share if f.p_value < 0.05 / len(a.wrong_mode_share)][:MOST_PUSHING]
    if not clear:
        return "; no part's draws set them apart from all units"
    told = [
        f"{one_line(f.part)} ({f.cause}, {abs(f.mean_shift_sd):.2g} standard deviations "
        f"{'low' if f.mean_shift_sd < 0 else 'high'})"
        for f in clear
    ]
    return f"; their draws differ from those of all units most in {listed(told)}"


def leading(a: Assessment) -> tuple[str, ...]:
    """The sentences on parts."""
    return tuple(ranking_sentence(a.rankings[output]) for output in ("frequency", "margin") if output in a.rankings)


def deciding(a: Assessment) -> tuple[str, ...]:
    """All of them, in reading order."""
    made = [how_units_fail(a), where_units_fail(a), where_units_fail_first(a), start_at_the_ends(a), coldest_start(a)]
    made += leading(a)
    made += [causes_sentence(a.rankings[output]) for output in ("frequency", "margin") if output in a.rankings]
    made += [wrong_modes_sentence(a), *failing_sentences(a), lots_sentence(a)]
    return tuple(text for text in made if text)
