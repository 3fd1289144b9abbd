"""What measured lots say and what they do not, as findings."""

from __future__ import annotations

from collections.abc import Sequence

from yieldosc.errors import Finding
from yieldosc.studies.scrutiny import MeasuredLot, MeasuredUncertainty

NEXT_LOT = "One lot tells nothing of the next"


def measured_findings(lots: Sequence[MeasuredLot], uncertainty: MeasuredUncertainty | None) -> list[Finding]:
    """One note per measured part, and one on what so few values leave open."""
    made = [Finding("warning" if lot.outside else "note", "measured-lot", _lot_text(lot)) for lot in lots]
    if uncertainty is not None:
        made.append(Finding("note", "measured-uncertainty", _uncertainty_text(uncertainty)))
    return made


def _lot_text(lot: MeasuredLot) -> str:
    name = lot.role if lot.part == lot.role else f"{lot.part} {lot.role}"
    text = f"{name}: {lot.values} measured values from {_share(lot.low)} to {_share(lot.high)} of the nominal value"
    if lot.values > 1:
        text += f", mean {_share(lot.mean)} ({_share(lot.mean_interval[0])} to {_share(lot.mean_interval[1])})"
    return f"{text}; {_against(lot)}. {NEXT_LOT}{_next(lot)}."


def _against(lot: MeasuredLot) -> str:
    if lot.declared is None:
        return "no tolerance is declared to compare them with"
    window = f"{_share(lot.declared[0])} to {_share(lot.declared[1])}"
    if lot.outside:
        return f"{lot.outside} of them lie outside the declared {window}"
    kinds = [word for word, holds in (("narrow", lot.narrow), ("off-centre", lot.off_centre)) if holds]
    how = f"the lot is {' and '.join(kinds)}" if kinds else "the lot fills it and is centred"
    return f"against the declared {window} {how}"


def _next(lot: MeasuredLot) -> str:
    if lot.declared is None:
        return ""
    return ": the set 'declared tolerance' lets it lie anywhere in what is declared"


def _uncertainty_text(u: MeasuredUncertainty) -> str:
    low, middle, high = (f"{100 * q:.3g} %" for q in (u.low, u.middle, u.high))
    return (
        f"So few measured values leave the yield open by themselves: over {u.lots} lots drawn from them with "
        f"replacement nine in ten yield {low} to {high}, half {middle} or less. The yield's own "
        "interval does not hold this."
    )


def _share(fraction: float) -> str:
    return f"{100 * fraction:+.3g} %".replace("-", "−")
