"""What the figures do not say: the same words on the console and on the sign-off page."""

from __future__ import annotations

from yieldosc.quantities import format_quantity
from yieldosc.reports.amounts import signed
from yieldosc.studies.results import Assessment

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


def cautions(a: Assessment) -> tuple[str, ...]:
    """The study's own cautions first, then the model's error, what was not assessed, and what the figures are for."""
    return tuple(dict.fromkeys((*a.cautions, model_error(a), NOT_ASSESSED, REVISIONS, APPROVAL, SAFETY)))


def model_error(a: Assessment) -> str:
    """One line: prediction against the bench frequency, or that none was given."""
    bench_hz = a.study.design.bench_frequency_hz
    if bench_hz is None or a.bench_ratio is None:
        return "Model error unknown: no bench frequency of a reference board is given to compare the prediction with."
    off = 1 / a.bench_ratio - 1
    scale, unit = (1e6, "ppm") if abs(off) < 1e-3 else (100.0, "%")
    return (
        f"Model error on the reference board: prediction {signed(f'{off * scale:.3g}')} {unit} from the measured "
        f"{format_quantity(bench_hz, 'Hz', 9)}; every unit is scaled by {a.bench_ratio:.9g}."
    )
