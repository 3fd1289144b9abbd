"""What each command does: read, call the library, show, write, choose the exit status."""

from __future__ import annotations

import argparse
from pathlib import Path

from yieldosc.circuits import registry
from yieldosc.circuits.circuit import CircuitError
from yieldosc.cli import files
from yieldosc.cli.streams import Streams
from yieldosc.cli.words import MOST_UNITS, options_of, unit_values, whole_number
from yieldosc.errors import Finding, InputError, refusal
from yieldosc.quantities import QuantityError, parse_quantity
from yieldosc.reports import console as pages
from yieldosc.reports.progress import progress_bar
from yieldosc.reports.workbook import write_workbook
from yieldosc.sheets.bom import read_bom
from yieldosc.sheets.draft import write_draft
from yieldosc.sheets.opening import open_book
from yieldosc.sheets.study_file import is_study, load_study
from yieldosc.studies.assess import assess as run_assessment
from yieldosc.studies.refusals import refuse_without_crossing
from yieldosc.studies.serialise import assessment_dict
from yieldosc.unit import NamedCircuit, Unit, evaluate_nominal


def named(name: str) -> NamedCircuit:
    """The circuit of that name, or an InputError that lists them."""
    try:
        return NamedCircuit(registry.family(name))
    except CircuitError as error:
        raise InputError(Finding("error", "unknown-circuit", text) for text in error.problems) from None


def circuits(arguments: argparse.Namespace, streams: Streams) -> int:
    """`circuits [NAME]`."""
    if arguments.name is None:
        listed = [registry.family(name) for name in registry.names()]
        if not streams.silent:
            pages.print_circuits(listed, streams.results)
        streams.write_json(
            {"circuits": [{"name": f.name, "title": f.title} for f in listed]}, force=arguments.force
        )
        return 0
    circuit = named(arguments.name)
    options = options_of(circuit, arguments.option)
    if not streams.silent:
        pages.print_circuit(circuit.family, options, streams.results)
    streams.write_json(pages.circuit_dict(circuit.family, options), force=arguments.force)
    return 0


def unit(arguments: argparse.Namespace, streams: Streams) -> int:
    """`unit CIRCUIT ROLE=VALUE …` or `unit STUDY`."""
    try:
        temperature_c = parse_quantity(arguments.temperature, "°C").value
    except QuantityError as error:
        raise refusal("temperature", f"--temperature {arguments.temperature}: {error}") from None
    if is_study(Path(arguments.target)):
        if arguments.values or arguments.option:
            raise refusal(
                "command", "a study brings its own values and options; leave out ROLE=VALUE and --option"
            )
        study = load_study(Path(arguments.target))
        refuse_without_crossing(study)
        streams.show_findings(study.findings)
        result: Unit = evaluate_nominal(study, temperature_c)
    else:
        circuit = named(arguments.target)
        options = options_of(circuit, arguments.option)
        values = unit_values(circuit, options, arguments.values)
        result = circuit.evaluate(values, options=options, temperature_c=temperature_c)
    if not streams.silent:
        pages.print_unit(result, streams.results)
    streams.write_json(result.to_dict(), force=arguments.force)
    return 0


def draft(arguments: argparse.Namespace, streams: Streams) -> int:
    """`draft BOM --circuit NAME -o STUDY.xlsx`."""
    circuit = named(arguments.circuit)
    options = options_of(circuit, arguments.option)
    target = Path(arguments.output)
    if target.suffix.lower() != ".xlsx":
        raise refusal("command", f"-o {target}: a draft is an Excel workbook; give a name that ends in .xlsx")
    if target.exists() and not arguments.force:
        raise refusal("exists", f"{target} exists and is not overwritten; choose another name, or add --force")
    source = Path(arguments.bom)
    if target.exists() and source.exists() and target.samefile(source):
        raise refusal("exists", f"{target} is the BOM itself and is never altered; choose another name")
    book = open_book(source)
    drafted = None

    def fill(temporary: Path) -> None:
        nonlocal drafted
        drafted = write_draft(book, circuit=circuit.name, options=options, path=temporary)

    files.write_through(target, fill)
    assert drafted is not None
    streams.show_findings(drafted.findings)
    if not streams.silent:
        pages.print_draft(drafted, str(target), streams.results)
    streams.write_json(
        {"study": str(target), "findings": [f.to_dict() for f in drafted.findings]}, force=arguments.force
    )
    return 0


def check(arguments: argparse.Namespace, streams: Streams) -> int:
    """`check INPUT`."""
    path = Path(arguments.input)
    if is_study(path):
        study = load_study(path)
        refuse_without_crossing(study)
        lines, findings = study.bom, study.findings
        if not streams.silent:
            pages.print_study(study, streams.results)
    else:
        reading = read_bom(open_book(path))
        lines, findings = reading.lines, reading.findings
        if not streams.silent:
            pages.print_check(reading.lines, reading.findings, streams.results)
    streams.write_json(
        {"parts": [line.to_dict() for line in lines], "findings": [f.to_dict() for f in findings]},  # type: ignore[attr-defined]
        force=arguments.force,
    )
    return 2 if any(f.level == "error" for f in findings) else 0


def assess(arguments: argparse.Namespace, streams: Streams) -> int:
    """`assess STUDY`."""
    units = None if arguments.units is None else whole_number("--units", arguments.units, least=1, most=MOST_UNITS)
    seed = whole_number("--seed", arguments.seed, least=0, most=2**63 - 1)
    workers = None if arguments.workers is None else whole_number("--workers", arguments.workers, least=1, most=256)
    study = load_study(Path(arguments.study))
    directory = files.result_directory(arguments.output, study_name=study.name, digest=study.digest)
    files.claim_directory(directory, digest=study.digest, force=arguments.force)
    with progress_bar(quiet=arguments.quiet) as advance:
        result = run_assessment(study, units=units, seed=seed, workers=workers, progress=advance)
    content = assessment_dict(result)
    workbook = directory / f"{files.plain_name(study.name)}{files.WORKBOOK_SUFFIX}"
    files.write_through(workbook, lambda temporary: write_workbook(result, temporary))
    files.write_record(directory / files.RECORD, content)
    if streams.silent:
        streams.show_findings(result.findings)
    else:
        pages.print_assessment(result, streams.results)
        pages.print_written(workbook, streams.results)
    streams.write_json(content, force=arguments.force)
    return 0 if result.verdict == "meets" else 1
