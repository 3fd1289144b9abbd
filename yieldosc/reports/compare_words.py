"""What `compare` found, as a page: what changed, what it did to each rate, which change did it."""

from __future__ import annotations

from collections.abc import Iterator

from yieldosc.reports.amounts import listed, points_text
from yieldosc.reports.cautions import APPROVAL, SAFETY
from yieldosc.reports.decision import Decision, Section, points_cell, rate_cell, words, yield_cell
from yieldosc.reports.requirements import percent
from yieldosc.studies.compare.results import CompareResult
from yieldosc.studies.digits import percent_text

TITLES = {"circuit": "circuit", "part": "part", "assumption": "assumption", "limit": "limit", "condition": "condition"}
SHARED = (
    "Both studies run on the same numbered units: a part that is the same in both has the same value in both, so the "
    "differences are those of the changes alone."
)
MODEL = "A difference of predictions: whatever both models leave out is left out of it too."


def compare_page(r: CompareResult) -> Decision:
    """All that is said on the result."""
    change = r.rates[0]
    return Decision(
        title=f"{r.before.name} → {r.after.name}",
        stamp=f"digests {r.before.digest[:8]}, {r.after.digest[:8]} · seed {r.provenance.seed}",
        words=_words(r),
        tone="good" if change.difference.low > 0 else "bad" if change.difference.high < 0 else "open",
        headline=_headline(r),
        facts=(
            ("Yield, first study", percent_text(change.before), f"{r.units:,} units"),
            ("Yield, second study", percent_text(change.after), "the same units"),
            ("Change", points_text(change.difference), f"{percent(r.before.design.confidence)} interval"),
        ),
        sections=(
            _differences(r),
            _rates(r),
            _steps(r),
            Section(title="What it means", sentences=tuple(_meaning(r)), key="meaning"),
            Section(title="Notes", sentences=tuple(f.text for f in r.findings), mark="·", key="notes"),
            Section(title="Cautions", sentences=(SHARED, MODEL, APPROVAL, SAFETY), mark="!", key="cautions"),
        ),
    )  # fmt: skip


def _words(r: CompareResult) -> str:
    difference = r.rates[0].difference
    if difference.low > 0:
        return "THE SECOND STUDY YIELDS MORE"
    if difference.high < 0:
        return "THE SECOND STUDY YIELDS LESS"
    return "NO DIFFERENCE SHOWN"


def _headline(r: CompareResult) -> str:
    counts = {name: sum(d.group == name for d in r.differences) for name in TITLES}
    told = [f"{n} {name}{'s' if n > 1 else ''}" for name, n in counts.items() if n]
    return f"{listed(told)} said differently." if told else "The studies say the same in everything that counts."


def _differences(r: CompareResult) -> Section:
    rows = tuple((words(TITLES[d.group]), words(d.name), words(d.before), words(d.after)) for d in r.differences)
    return Section(
        title="What changed", columns=(("kind", ""), ("what", ""), ("first", "right"), ("second", "right")),
        rows=rows, key="differences", most=40,
    )  # fmt: skip


def _rates(r: CompareResult) -> Section:
    rows = tuple(
        (
            words(change.name.replace("_", " ")),
            *(yield_cell(e) if change.name == "yield" else rate_cell(e) for e in (change.before, change.after)),
            points_cell(change.difference),
        )
        for change in r.rates
    )
    return Section(
        title="What it did to each rate", note=f"{r.units:,} units of each; Tango's score interval for the difference",
        columns=(("rate", ""), ("first", "right"), ("second", "right"), ("change in points", "right")),
        rows=rows, key="rates",
    )  # fmt: skip


def _steps(r: CompareResult) -> Section:
    rows = tuple((words(s.name), yield_cell(s.yield_), points_cell(s.difference)) for s in r.steps)
    return Section(
        title="Each change alone", note=f"the first study with one change; {r.step_units:,} units; largest first",
        columns=(("change", ""), ("yield", "right"), ("change in points", "right")), rows=rows, key="steps",
    )  # fmt: skip


def _leads(r: CompareResult) -> bool:
    """One change that is sure, and more than twice as large as the next."""
    sizes = [abs(s.difference.estimate) for s in r.steps] + [0.0]
    return bool(r.steps) and r.steps[0].difference.low * r.steps[0].difference.high > 0 and sizes[0] > 2 * sizes[1]


def _meaning(r: CompareResult) -> Iterator[str]:
    target = r.after.design.yield_target
    after = r.rates[0].after
    if target is not None:
        reached = "reaches" if after.low >= target else "misses" if after.high < target else "cannot be told from"
        yield f"The second study {reached} its target of {percent(target)} on these units; assess gives the verdict."
    if _leads(r):
        yield f"{r.steps[0].name} does most of it: {points_text(r.steps[0].difference)} alone."
    together = r.together.estimate
    alone = sum(s.difference.estimate for s in r.steps)
    if r.steps and abs(together - alone) > 0.005:
        yield (
            f"The changes do not add up: {alone * 100:+.2f} points one by one, {together * 100:+.2f} together on the "
            "same units; they act on each other."
        )
