"""The Python interface: circuits by name, studies from files, runs that answer with their workbook."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, fields
from pathlib import Path

from openpyxl import Workbook

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError
from yieldosc.errors import Finding, InputError, refusal
from yieldosc.reports.workbook import save_whole, write_workbook
from yieldosc.reports.workbook_compare import compare_workbook
from yieldosc.reports.workbook_limits import limits_workbook
from yieldosc.reports.workbook_upgrade import upgrade_workbook
from yieldosc.sheets.study_file import load_study
from yieldosc.studies.assess import assess as run_assessment
from yieldosc.studies.compare.compare import compare as run_compare
from yieldosc.studies.compare.results import CompareResult
from yieldosc.studies.limits.limits import limits as run_limits
from yieldosc.studies.limits.results import LimitsResult
from yieldosc.studies.results import Assessment
from yieldosc.studies.serialise import assessment_dict
from yieldosc.studies.serialise_decisions import compare_dict, limits_dict, upgrade_dict
from yieldosc.studies.upgrade.results import UpgradeResult
from yieldosc.studies.upgrade.upgrade import upgrade as run_upgrade
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
        write_workbook(self, _free(path, overwrite=overwrite))


@dataclass(frozen=True, kw_only=True)
class UpgradeOutcome(UpgradeResult):
    """Grades and their price, able to write itself down."""

    def to_dict(self) -> dict[str, object]:
        """The `upgrade` JSON contract."""
        return upgrade_dict(self)

    def write_workbook(self, path: str | Path, *, overwrite: bool = False) -> None:
        """Write the workbook; InputError when the file exists and `overwrite` is False."""
        _save(upgrade_workbook(self), path, overwrite=overwrite)


@dataclass(frozen=True, kw_only=True)
class LimitsOutcome(LimitsResult):
    """Test limits, able to write themselves down."""

    def to_dict(self) -> dict[str, object]:
        """The `limits` JSON contract."""
        return limits_dict(self)

    def write_workbook(self, path: str | Path, *, overwrite: bool = False) -> None:
        """Write the workbook; InputError when the file exists and `overwrite` is False."""
        _save(limits_workbook(self), path, overwrite=overwrite)


@dataclass(frozen=True, kw_only=True)
class CompareOutcome(CompareResult):
    """What changed, able to write itself down."""

    def to_dict(self) -> dict[str, object]:
        """The `compare` JSON object."""
        return compare_dict(self)

    def write_workbook(self, path: str | Path, *, overwrite: bool = False) -> None:
        """Write the workbook; InputError when the file exists and `overwrite` is False."""
        _save(compare_workbook(self), path, overwrite=overwrite)


def _free(path: str | Path, *, overwrite: bool) -> Path:
    target = Path(path)
    if target.exists() and not overwrite:
        raise refusal("exists", f"{target} exists and is not overwritten; choose another name, or overwrite=True")
    return target


def _save(book: Workbook, path: str | Path, *, overwrite: bool) -> None:
    """Whole to a temporary name, then renamed."""
    save_whole(book, _free(path, overwrite=overwrite))


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


def upgrade(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> UpgradeOutcome:
    """Which part to buy better: every next grade, the cheapest set that reaches the yield target, other nominal values.

    units: on which a set must prove itself, and as many fresh ones to confirm it.
    """
    found = run_upgrade(study, units=units, seed=seed, workers=workers, progress=progress)
    return UpgradeOutcome(**{f.name: getattr(found, f.name) for f in fields(found)})


def limits(
    study: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> LimitsOutcome:
    """Factory test limits with escapes and false rejects; the trim where the study declares one.

    units: of each of the two samples, one that chooses and one that reports.
    """
    found = run_limits(study, units=units, seed=seed, workers=workers, progress=progress)
    return LimitsOutcome(**{f.name: getattr(found, f.name) for f in fields(found)})


def compare(
    before: Study,
    after: Study,
    *,
    units: int | None = None,
    seed: int = 1,
    workers: int | None = None,
    progress: Callable[[int, int], None] | None = None,
) -> CompareOutcome:
    """What changed between two studies and what it did to each rate, on the same draws."""
    found = run_compare(before, after, units=units, seed=seed, workers=workers, progress=progress)
    return CompareOutcome(**{f.name: getattr(found, f.name) for f in fields(found)})
