"""Production yield of oscillator circuits, from the BOM's tolerances to a workbook that can be signed.

    spreadsheet → lines → parts → study → block of units → outcomes → estimates → findings → page
    sheets/       sheets/  parts/  study  population/     solver/     studies/     reports/   reports/, cli/

    circuit(name)        roles, options, closed form; .evaluate(values) solves one unit or arrays of units
    load(path)           a study, or InputError with every problem of the file
    assess(study)        yield, verdict, ranks, rivals, extremes; .write_workbook(path), .to_dict()
"""

from yieldosc.api import AssessmentResult, assess, circuit, load
from yieldosc.errors import Finding, InputError, YieldoscError
from yieldosc.study import Study
from yieldosc.unit import NamedCircuit, Outcome, Unit

__all__ = [
    "AssessmentResult",
    "Finding",
    "InputError",
    "NamedCircuit",
    "Outcome",
    "Study",
    "Unit",
    "YieldoscError",
    "assess",
    "circuit",
    "load",
]
