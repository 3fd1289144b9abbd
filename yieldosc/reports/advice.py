"""Sentences on what to do next, and on what stays open."""

from __future__ import annotations

import math

from yieldosc.parts.parameter import PEDIGREES
from yieldosc.reports.amounts import Deviation, bare_percent, listed, points_text
from yieldosc.reports.requirements import percent
from yieldosc.studies.results import Assessment, RivalResult, Tighter

OFF_CENTRE = 0.2  # of the half-width of the limits: less is not worth a change of values
MOST_MEANING = 80  # characters; longer ones are named and stand on the sheet of assumptions
START_OUTCOMES = ("no_bias", "no_start", "low_margin", "slow_start")


def next_steps(a: Assessment) -> tuple[str, ...]:
    """In the order in which they are worth doing."""
    made = [_for_the_verdict(a)]
    if a.verdict != "meets":
        made += [_centring(a), _better_grade(a), _start_up(a)]
    made += [_confirm(a), _worst_rival(a)]
    return tuple(text for text in made if text)


def _for_the_verdict(a: Assessment) -> str:
    units, target = a.yield_.units or 0, a.study.design.yield_target
    if a.verdict == "not assessable":
        return "Remove what keeps this study from a verdict: see the warnings among the findings."
    if target is None:
        return "State a yield target in the Design sheet: without one nothing can be met or missed."
    if a.verdict == "meets":
        return "" if a.conditions else "Keep the parts, values and revisions named here; the target needs no change."
    if a.verdict == "not proven":
        return (
            f"{units:,} units do not separate the yield from the target of {percent(target)}: simulate more "
            f"(--units {4 * units}), or improve the design."
        )
    return ""


def _centring(a: Assessment) -> str:
    design = a.study.design
    medians = [(c.settled_hz or c.frequency_hz).q50 for c in a.corners]
    medians = [f for f in medians if math.isfinite(f)]
    if not medians or not a.outcomes.get("out_of_limits"):
        return ""
    middle = (min(medians) + max(medians)) / 2
    off = middle - (design.frequency_low_hz + design.frequency_high_hz) / 2
    if abs(off) < OFF_CENTRE * (design.frequency_high_hz - design.frequency_low_hz) / 2:
        return ""
    scale = Deviation.of(design)
    return (
        f"Centre the frequency first: the medians over all corners have their middle at {scale.text(middle)}, the "
        f"limits theirs at {scale.text(middle - off)}. Other nominal values cost nothing."
    )


def _better_grade(a: Assessment) -> str:
    helping = [t for t in a.tighter if t.difference.low > 0]
    if not a.tighter:
        return ""
    if not helping:
        parts = listed(list(dict.fromkeys(t.part for t in a.tighter)))
        return (
            f"The next tighter grade of a single leading part ({parts}) does not raise the yield measurably: change "
            "nominal values, limits or circuit, or tighten several parts together."
        )
    best = max(helping, key=lambda t: t.difference.estimate)
    reaches = _reaches(a, best)
    return (
        f"Tighten {best.part} from {best.from_tolerance} to {best.to_tolerance}: the yield changes by "
        f"{points_text(best.difference)} to {bare_percent(best.yield_)}{reaches}."
    )


FREE_VALUES = ("R", "C", "L")  # traits whose nominal value a designer chooses; a crystal's or a device's is bought


def _reaches(a: Assessment, best: Tighter) -> str:
    target = a.study.design.yield_target
    if target is None:
        return ""
    if best.yield_.low >= target:
        return f", which reaches the target of {percent(target)}"
    if best.yield_.high < target:
        return f", which alone does not reach the target of {percent(target)}"
    return f", which may or may not reach the target of {percent(target)}"


def _start_up(a: Assessment) -> str:
    ranking = a.rankings.get("margin")
    if ranking is None or not any(a.outcomes.get(name) for name in START_OUTCOMES):
        return ""
    chosen = {p.part for p in a.study.parameters if p.trait in FREE_VALUES}
    moved = [line for line in ranking.parts if line.per_percent and line.part in chosen]
    if not moved:
        return ""
    first = max(moved, key=lambda line: abs(line.per_percent or 0.0))
    change = first.per_percent or 0.0
    direction = "higher" if change > 0 else "lower"
    return (
        f"For more start-up margin make {first.part} {direction}: 1 % of it moves the nominal margin by "
        f"{abs(change):.2g} %."
    )


def _confirm(a: Assessment) -> str:
    roles = {p: [q.role for q in a.study.parameters if q.pedigree == p] for p in ("assumed", "typical")}
    doubtful = roles["assumed"] + roles["typical"]
    if not doubtful:
        return ""
    return f"Replace assumed and typical values by guaranteed or measured ones: {listed(doubtful)}."


def _worst_rival(a: Assessment) -> str:
    target = a.study.design.yield_target
    rivals = [r for r in a.rivals if r.difference is not None]
    if target is None or not rivals or a.verdict in ("does not meet", "not assessable"):
        return ""
    worst: RivalResult = min(rivals, key=lambda r: r.yield_.estimate)
    if worst.yield_.estimate >= target:
        return ""
    meaning = worst.meaning if len(worst.meaning) <= MOST_MEANING else f"the set '{worst.name}'"
    return f"Find out whether this holds, for it would miss the target: {meaning} (yield {bare_percent(worst.yield_)})."


def pedigree_counts(a: Assessment) -> dict[str, int]:
    """How many values of each pedigree, in the order of trust."""
    return {p: sum(q.pedigree == p for q in a.study.parameters) for p in PEDIGREES}


def pedigree_sentence(a: Assessment) -> str:
    """ "Of 8 values 6 are guaranteed, 1 is typical and 1 is assumed."""
    counts = {p: n for p, n in pedigree_counts(a).items() if n}
    total = sum(counts.values())
    words = [f"{n} {'is' if n == 1 else 'are'} {p}" for p, n in counts.items()]
    return f"Of {total} value{'' if total == 1 else 's'} {listed(words)}."


def open_points(a: Assessment) -> tuple[str, ...]:
    """What a checker must settle before approving: doubtful values, warnings, sets that miss, what nobody stated."""
    made = [f"Condition of the verdict: {condition}." for condition in a.conditions]
    made += [str(f) for f in a.findings if f.level == "warning"]
    target = a.study.design.yield_target
    missing = [r for r in a.rivals if r.difference is not None and target is not None and r.yield_.estimate < target]
    if missing and a.verdict == "meets":
        made.append(f"{len(missing)} of {len(a.rivals)} sets tried miss the target.")
    simulated = [p.role for p in a.study.parameters if p.pedigree == "simulated"]
    if simulated:
        made.append(f"Simulated, not measured: {listed(simulated)}.")
    if a.provenance.disagreeing and not any(f.code == "audit-disagreement" for f in a.findings):
        made.append(f"{a.provenance.disagreeing} audited unit-corners disagree between the two solvers.")
    return tuple(dict.fromkeys(made))
