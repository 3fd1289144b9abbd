"""Results → sentences. Console and workbook take every sentence on a result from here, so they cannot disagree."""

from __future__ import annotations

from dataclasses import dataclass

from yieldosc.reports.advice import next_steps, open_points, pedigree_sentence
from yieldosc.reports.amounts import bare_percent, range_text
from yieldosc.reports.capability_words import capability_sentences
from yieldosc.reports.cautions import cautions
from yieldosc.reports.deciding import deciding, leading
from yieldosc.reports.knowledge_words import spread_sentence
from yieldosc.reports.requirements import RequirementLine, percent, requirement_lines
from yieldosc.studies.digits import percent_text
from yieldosc.studies.results import Assessment

BLOCKING = ("limit-not-judged", "outside-model-range")  # findings that leave a study without a verdict


@dataclass(frozen=True, slots=True, kw_only=True)
class Summary:
    """Everything that is said in words about one assessment."""

    verdict: str  # "MEETS"
    headline: str  # the sentence behind the verdict
    conditions: tuple[str, ...]
    yield_label: str
    yield_value: str
    yield_note: str
    range_label: str
    range_value: str
    range_note: str
    requirements: tuple[RequirementLine, ...]
    deciding: tuple[str, ...]
    leading: tuple[str, ...]  # of `deciding`, the sentences on parts
    spread: str  # which assumption the yield hangs on
    capability: tuple[str, ...]
    next_steps: tuple[str, ...]
    open_points: tuple[str, ...]
    pedigrees: str
    cautions: tuple[str, ...]


def summarise(a: Assessment) -> Summary:
    """All sentences on an assessment."""
    return Summary(
        verdict=verdict_words(a),
        headline=headline(a),
        conditions=tuple(f"On condition: {condition}." for condition in a.conditions),
        yield_label="Yield, declared set",
        yield_value=percent_text(a.yield_, target=a.study.design.yield_target),
        yield_note=yield_note(a),
        range_label=range_label(a),
        range_value=range_text([r.yield_ for r in a.rivals] or [a.yield_]),
        range_note=range_note(a),
        requirements=requirement_lines(a),
        deciding=deciding(a),
        leading=leading(a),
        spread=spread_sentence(a),
        capability=capability_sentences(a),
        next_steps=next_steps(a),
        open_points=open_points(a),
        pedigrees=pedigree_sentence(a),
        cautions=cautions(a),
    )


def verdict_words(a: Assessment) -> str:
    """The verdict in capitals, with what hangs on conditions called so."""
    conditional = a.verdict == "meets" and a.conditions
    return f"{a.verdict.upper()}, ON CONDITIONS" if conditional else a.verdict.upper()


def headline(a: Assessment) -> str:
    """One sentence: the verdict on the joint yield with its reason, and that it is conditional where it is."""
    target = a.study.design.yield_target
    if a.verdict == "not assessable":
        return _not_assessable(a)
    if target is None:
        return "No yield target is given, so nothing is met or missed."
    goal = f"the yield target of {percent(target)}"
    if a.verdict == "meets":
        only = ", on the conditions below" if a.conditions else ""
        return f"The lower bound of the predicted yield reaches {goal}{only}."
    if a.verdict == "does not meet":
        return f"The upper bound of the predicted yield misses {goal}."
    return f"After {_looks(a)} the interval of the predicted yield still contains {goal}."


def _not_assessable(a: Assessment) -> str:
    reasons = [f.text for f in a.findings if f.code in BLOCKING]
    return "No verdict can be given." if not reasons else f"No verdict can be given. {reasons[0]}"


def _looks(a: Assessment) -> str:
    return f"{len(a.looks)} of {a.looks_planned} planned look{'' if a.looks_planned == 1 else 's'}"


def yield_note(a: Assessment) -> str:
    """Confidence, units, and which look of how many."""
    units, failures = a.yield_.units or 0, a.yield_.failures or 0
    counted = f"{failures:,} of {units:,} units fail"
    if a.looks_planned == 1:
        return f"{percent(a.study.design.confidence)} confidence; {counted}; one look"
    return (
        f"{percent(a.study.design.confidence)} confidence for all {a.looks_planned} planned looks together; {counted}; "
        f"look {len(a.looks)} of {a.looks_planned}"
    )


def range_label(a: Assessment) -> str:
    """Names the range for what it is."""
    count = len(a.rivals)
    return f"Range over the {count} sets tried" if count > 1 else "Range over the sets tried"


def range_note(a: Assessment) -> str:
    """Which sets are lowest and highest, and that this is no bound."""
    if len(a.rivals) < 2:
        return "no other set of assumptions differs from the declared one; a range of the sets tried, not a bound"
    if range_text([r.yield_ for r in a.rivals]) == bare_percent(a.rivals[0].yield_):
        return f"every set shows the same; {a.rival_units:,} units each; a range of the sets tried, not a bound"
    low = min(a.rivals, key=lambda r: r.yield_.estimate)
    high = max(a.rivals, key=lambda r: r.yield_.estimate)
    return (
        f"lowest: {low.name}; highest: {high.name}; {a.rival_units:,} units each; "
        "a range of the sets tried, not a bound"
    )
