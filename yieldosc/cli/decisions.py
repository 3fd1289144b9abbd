"""The commands that end in a decision: what to buy, what to test, what a change did."""

from __future__ import annotations

import argparse
import hashlib
from collections.abc import Callable, Mapping
from pathlib import Path
from typing import Protocol, TypedDict

from yieldosc.cli import files
from yieldosc.cli.streams import Streams
from yieldosc.cli.words import MOST_UNITS, whole_number
from yieldosc.errors import Finding
from yieldosc.reports import console as pages
from yieldosc.reports.compare_words import compare_page
from yieldosc.reports.console_decision import print_decision
from yieldosc.reports.decision import Decision
from yieldosc.reports.limits_words import limits_page
from yieldosc.reports.progress import progress_bar
from yieldosc.reports.upgrade_words import upgrade_page
from yieldosc.reports.workbook_compare import compare_workbook
from yieldosc.reports.workbook_limits import limits_workbook
from yieldosc.reports.workbook_upgrade import upgrade_workbook
from yieldosc.sheets.study_file import load_study
from yieldosc.studies.compare.compare import compare as run_compare
from yieldosc.studies.limits.limits import limits as run_limits
from yieldosc.studies.serialise_decisions import compare_dict, limits_dict, upgrade_dict
from yieldosc.studies.upgrade.upgrade import upgrade as run_upgrade


def upgrade(arguments: argparse.Namespace, streams: Streams) -> int:
    """`upgrade STUDY`."""
    study = load_study(Path(arguments.study))
    directory = files.result_directory(arguments.output, study_name=study.name, digest=study.digest)
    files.claim_directory(directory, digest=study.digest, force=arguments.force)
    with progress_bar(quiet=arguments.quiet) as advance:
        result = run_upgrade(study, progress=advance, **_settings(arguments))
    _out(
        arguments, streams, directory / f"{files.plain_name(study.name)}-upgrade.xlsx",
        page=upgrade_page(result), book=lambda: upgrade_workbook(result), content=upgrade_dict(result),
        findings=result.findings,
    )  # fmt: skip
    return 0 if result.chosen is not None or result.target is None else 1


def limits(arguments: argparse.Namespace, streams: Streams) -> int:
    """`limits STUDY`."""
    study = load_study(Path(arguments.study))
    directory = files.result_directory(arguments.output, study_name=study.name, digest=study.digest)
    files.claim_directory(directory, digest=study.digest, force=arguments.force)
    with progress_bar(quiet=arguments.quiet) as advance:
        result = run_limits(study, progress=advance, **_settings(arguments))
    _out(
        arguments, streams, directory / f"{files.plain_name(study.name)}-limits.xlsx",
        page=limits_page(result), book=lambda: limits_workbook(result), content=limits_dict(result),
        findings=result.findings,
    )  # fmt: skip
    return 1 if result.confirmed is False else 0


def compare(arguments: argparse.Namespace, streams: Streams) -> int:
    """`compare A B`."""
    before, after = load_study(Path(arguments.first)), load_study(Path(arguments.second))
    digest = hashlib.sha256(f"{before.digest}{after.digest}".encode()).hexdigest()
    name = f"{files.plain_name(before.name)}-to-{files.plain_name(after.name)}"
    directory = files.result_directory(arguments.output, study_name=name, digest=digest)
    files.claim_directory(directory, digest=digest, force=arguments.force)
    with progress_bar(quiet=arguments.quiet) as advance:
        result = run_compare(before, after, progress=advance, **_settings(arguments))
    content = compare_dict(result)
    content["provenance"] = {**_mapping(content["provenance"]), "input_sha256": digest}
    _out(
        arguments, streams, directory / f"{name}.xlsx",
        page=compare_page(result), book=lambda: compare_workbook(result), content=content, findings=result.findings,
    )  # fmt: skip
    return 0


def _mapping(value: object) -> Mapping[str, object]:
    assert isinstance(value, dict)
    return value


class _Book(Protocol):
    """A workbook that can be written."""

    def save(self, filename: Path) -> None: ...


class _Settings(TypedDict):
    units: int | None
    seed: int
    workers: int | None


def _settings(arguments: argparse.Namespace) -> _Settings:
    """units, seed and workers as every run takes them."""
    units, workers = arguments.units, arguments.workers
    return {
        "units": None if units is None else whole_number("--units", units, least=1, most=MOST_UNITS),
        "seed": whole_number("--seed", arguments.seed, least=0, most=2**63 - 1),
        "workers": None if workers is None else whole_number("--workers", workers, least=1, most=256),
    }


def _out(
    arguments: argparse.Namespace,
    streams: Streams,
    workbook: Path,
    *,
    page: Decision,
    book: Callable[[], _Book],
    content: dict[str, object],
    findings: tuple[Finding, ...],
) -> None:
    """Workbook and record to the result directory, the page to stdout, JSON where it was asked for."""
    files.write_through(workbook, lambda temporary: book().save(temporary))
    files.write_record(workbook.with_suffix(".json"), content)
    if streams.silent:
        streams.show_findings(findings)
    else:
        print_decision(page, streams.results)
        pages.print_written(workbook, streams.results)
    streams.write_json(content, force=arguments.force)
