"""Sentences on the parts of failing units beside the shares of variance: what spreads an output need not fail units."""

from __future__ import annotations

from yieldosc.reports.amounts import listed, share_text
from yieldosc.reports.terminal import one_line
from yieldosc.studies.results import Assessment, FailureShare, RankLine

LEVEL = 0.05  # over all variables together (Bonferroni)


def failing_sentences(a: Assessment) -> tuple[str, ...]:
    """Which part's draws stand out among failing units, and where that and the shares of variance disagree."""
    if not a.failure_share:
        return ()
    out = standing_out(a)
    if not out:
        return (
            "Among failing units no part's draws stand out from those of all units: they fail by many parts together.",
        )
    first = out[0]
    side = "high" if first.mean_shift_sd > 0 else "low"
    text = (
        f"Among failing units {one_line(first.part)} ({first.cause}) stands out: its draws lie "
        f"{abs(first.mean_shift_sd):.2f} standard deviations on the {side} side of those of all units."
    )
    return tuple(t for t in (text, _leads_no_variance(a, first), _fails_nothing(a, out)) if t)


def standing_out(a: Assessment) -> tuple[FailureShare, ...]:
    """Draws whose distance is beyond chance for all variables together, the largest first."""
    beyond = [f for f in a.failure_share if f.p_value < LEVEL / len(a.failure_share)]
    return tuple(sorted(beyond, key=lambda f: -f.ks_distance))


def variance_lines(a: Assessment, f: FailureShare) -> dict[str, RankLine]:
    """Output → the ranking's line of the part that a draw belongs to."""
    return {
        output: line
        for output, ranking in a.rankings.items()
        for line in ranking.parts
        if f.part == line.part or f.part.startswith(f"{line.part} ")
    }


def _leads_no_variance(a: Assessment, first: FailureShare) -> str:
    lines = variance_lines(a, first)
    leads = [o for o, line in lines.items() if line.part in a.rankings[o].leaders]
    if leads or not lines:
        return ""
    shares = [f"{share_text(line.total)} of the variance of the {_name(o)}" for o, line in lines.items()]
    return (
        f"{one_line(first.part)} does not lead the variance (it holds {listed(shares)}): what spreads the output most "
        "is not what fails units most."
    )


def _fails_nothing(a: Assessment, out: tuple[FailureShare, ...]) -> str:
    """Parts that lead a variance alone and whose draws among failing units are like those of all units."""
    told = []
    for output, ranking in a.rankings.items():
        own = [f for f in a.failure_share if len(ranking.leaders) == 1 and _belongs(f, ranking.leaders[0])]
        if own and not any(f in out for f in own):
            told.append(f"{one_line(ranking.leaders[0])} leads the variance of the {_name(output)}")
    if not told:
        return ""
    return f"{listed(told)}, but failing units draw it like all others: tightening it would save few of them."


def _belongs(f: FailureShare, part: str) -> bool:
    return f.part == part or f.part.startswith(f"{part} ")


def _name(output: str) -> str:
    return "start-up margin" if output == "margin" else output
