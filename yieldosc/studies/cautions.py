"""What the figures do not say: the whole list goes with every result, on console, sign-off page and in JSON."""

from __future__ import annotations

from yieldosc.quantities import format_quantity
from yieldosc.studies.results import Lots
from yieldosc.study import Study

PREDICTION = "A prediction from stated tolerances, not a measurement of boards."
RIGHT_PARTS = "Every rate supposes that no wrong or defective part is on the board."
TWO_UNCERTAINTIES = (
    "The interval covers sampling only; the range over the sets tried shows what assumptions do, and is no bound."
)
NOT_ASSESSED = (
    "Not assessed: crystals that sleep or wake at low drive, activity dips, moisture and contamination, handling and "
    "assembly damage, layout coupling, and a clock that runs but is not recognised by what it drives."
)
REVISIONS = "Valid only for the parts, values and revisions named here, identified by the input digest."
APPROVAL = "Approval is a human decision; this page supports it and does not make it."
SAFETY = (
    "Where a wrong or missing clock can hurt people, this is one input to the safety analysis that the governing "
    "standard requires; local codes and licensed practice decide."
)


def cautions(study: Study, bench_ratio: float | None, shared: Lots | None) -> tuple[str, ...]:
    """What the figures are, what they leave out, and who decides. shared: yields of lots where parts share reels."""
    made = [PREDICTION, RIGHT_PARTS, TWO_UNCERTAINTIES]
    if shared is not None:
        made.append(f"Parts of a reel are alike: the interval describes the pooled rate; {_lots_text(shared)}.")
    return (*made, model_error(study, bench_ratio), NOT_ASSESSED, REVISIONS, APPROVAL, SAFETY)


def model_error(study: Study, bench_ratio: float | None) -> str:
    """One line: prediction against the bench frequency, or that none was given."""
    bench_hz = study.design.bench_frequency_hz
    if bench_hz is None or bench_ratio is None:
        return "Model error unknown: no bench frequency of a reference board is given to compare the prediction with."
    off = 1 / bench_ratio - 1
    scale, unit = (1e6, "ppm") if abs(off) < 1e-3 else (100.0, "%")
    shown = f"{off * scale:+.3g}".replace("-", "−")
    return (
        f"Model error on the reference board: prediction {shown} {unit} from the measured "
        f"{format_quantity(bench_hz, 'Hz', 9)}; every unit is scaled by {bench_ratio:.9g}."
    )


def _lots_text(shared: Lots) -> str:
    """How lots spread, without a count that reads 0 % or 100 %."""
    size = f"{shared.units_per_lot:,} units"
    if shared.q05 >= 1:
        return f"in more than nine of ten simulated lots of {size} none failed"
    if shared.q95 <= 0:
        return f"in more than nine of ten simulated lots of {size} none was good"
    low = f"{100 * shared.q05:.3g} %" if shared.q05 > 0 else f"none of {size}"
    high = f"{100 * shared.q95:.3g} %" if shared.q95 < 1 else f"all of {size}"
    return f"nine lots in ten yield from {low} to {high}, the others lie outside"
