"""The Python interface: circuits by name, studies from files, assessments with their workbook."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields
from pathlib import Path

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError
from yieldosc.errors import Finding, InputError, refusal
from yieldosc.reports.workbook import write_workbook
from yieldosc.sheets.study_file import load_study
from yieldosc.studies.assess import assess as run_assessment
from yieldosc.studies.results import Assessment
from yieldosc.studies.serialise import assessment_dict
from yieldosc.study import Study
from yieldosc.unit import NamedCircuit


@dataclass(frozen=True, kw_only=True)
class AssessmentResult(Assessment):
    """An assessment that can write itself down."""

    def to_dict(self) -> dict[str, object]:
        """The `assess` JSON contract."""
        return assessment_dict(self)

    def write_workbook(self, path: str | Path, *, overwrite: bool = False) -> None:
        """Write the result workbook; InputError when the file exists and `overwrite` is False."""
        target = Path(path)
        if target.exists() and not overwrite:
            raise refusal("exists", f"{target} exists and is not overwritten; choose another name, or overwrite=True")
        write_workbook(self, target)


def circuit(name: str) -> NamedCircuit:
    """A circuit by name: roles, options, closed form, `evaluate`. InputError that lists the names otherwise."""
    try:
        return NamedCircuit(registry.family(name))
    except CircuitError as error:
        raise InputError(Finding("error", "unknown-circuit", text) for text in error.problems) from None


def load(path: str | Path) -> Study:
    """A study from .xlsx or .toml; InputError with every problem of the file."""
    return load_study(Path(path))


def assess(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> AssessmentResult:
    """Yield with its verdict, and everything that says how far to believe it.

    units: exactly so many, one look; None: looks at fixed counts until a verdict stands. Same seed, same answer,
    whatever the number of workers. progress: told (done, total) in unit evaluations.
    """
    found = run_assessment(study, units=units, seed=seed, workers=workers, progress=progress)
    return AssessmentResult(**{f.name: getattr(found, f.name) for f in fields(found)})
