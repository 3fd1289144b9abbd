"""Production yield of oscillator circuits, from the BOM's tolerances to a workbook that can be signed.

    spreadsheet → lines → parts → study → block of units → outcomes → estimates → findings → page
    sheets/       sheets/  parts/  study  population/     solver/     studies/     reports/   reports/, cli/

    circuit(name)        roles, options, closed form; .evaluate(values) solves one unit or arrays of units
    load(path)           a study, or InputError with every problem of the file
    assess(study)        yield, verdict, ranks, rivals, extremes; .write_workbook(path), .to_dict()
    upgrade(study)       which part to buy better, at what price
    limits(study)        what the factory test must reject; what a trim reaches
    compare(a, b)        what changed between two studies, and what it did to each rate
"""

from yieldosc.api import AssessmentResult, assess, circuit, compare, limits, load, upgrade
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
    "compare",
    "limits",
    "load",
    "upgrade",
]
