"""The command line's grammar. Every command's --help ends with one example."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from importlib.metadata import version
from typing import NoReturn, TypeAlias

from yieldosc.cli import commands, decisions
from yieldosc.errors import refusal

STUDY = "a study workbook, a .toml study, or a result workbook"


class Parser(argparse.ArgumentParser):
    """Raises instead of printing and leaving, so that errors look the same everywhere and can be JSON."""

    def error(self, message: str) -> NoReturn:
        raise refusal("command", f"{message}; see {self.prog} --help")


def parse(words: Sequence[str]) -> argparse.Namespace:
    """The parsed command line; `run` is the function that carries it out."""
    parser = _parser()
    arguments, rest = parser.parse_known_args(list(words))
    if rest and hasattr(arguments, "values") and not any(word.startswith("-") for word in rest):
        arguments.values = [*arguments.values, *rest]  # ROLE=VALUE words may stand after an option
        rest = []
    if rest:
        raise refusal("command", f"unrecognized arguments: {' '.join(rest)}; see yieldosc --help")
    if not hasattr(arguments, "run"):
        raise refusal("command", "a command is needed; see yieldosc --help")
    return arguments


def _parser() -> Parser:
    parser = Parser(
        prog="yieldosc",
        description="Production yield of oscillators, from the BOM's tolerances to a workbook that can be signed.",
        epilog="example: yieldosc assess bom_examples/tide_tone_1khz.xlsx",
    )
    parser.add_argument("--version", action="version", version=f"yieldosc {version('yieldosc')}")
    sub = parser.add_subparsers(title="commands", metavar="COMMAND", parser_class=Parser)
    _circuits(sub)
    _unit(sub)
    _draft(sub)
    _check(sub)
    _assess(sub)
    _upgrade(sub)
    _limits(sub)
    _compare(sub)
    return parser


Sub: TypeAlias = "argparse._SubParsersAction[Parser]"


def _add(sub: Sub, name: str, summary: str, example: str) -> Parser:
    return sub.add_parser(
        name, help=summary, description=summary[0].upper() + summary[1:] + ".", epilog=f"example: yieldosc {example}"
    )


def _common(parser: Parser) -> None:
    parser.add_argument("--json", metavar="FILE", help="write JSON to FILE, or to stdout with -")
    parser.add_argument("--quiet", action="store_true", help="no progress, no notes; errors are still shown")
    parser.add_argument("--force", action="store_true", help="replace files of another input")


def _circuits(sub: Sub) -> None:
    parser = _add(
        sub, "circuits", "list the circuits, or describe one: roles, options, branches, range", "circuits wien_bridge"
    )
    parser.add_argument("name", nargs="?", metavar="NAME", help="a circuit; without one, the list")
    parser.add_argument(
        "--option", action="append", default=[], metavar="KEY=VALUE", help="a choice that the circuit offers"
    )
    _common(parser)
    parser.set_defaults(run=commands.circuits)


def _unit(sub: Sub) -> None:
    parser = _add(
        sub,
        "unit",
        "evaluate one unit: frequency, start-up margin, outcome, growth rate, other modes",
        "unit wien_bridge R1=10k C1=10n R2=10k C2=10n RF=20k5 RG=10k GBW=3MHz",
    )
    parser.add_argument(
        "target", metavar="CIRCUIT|STUDY", help="a circuit's name, or a study whose nominal unit is meant"
    )
    parser.add_argument("values", nargs="*", metavar="ROLE=VALUE", help="values as people write them: R1=4k7 C1=10n")
    parser.add_argument(
        "--option", action="append", default=[], metavar="KEY=VALUE", help="a choice that the circuit offers"
    )
    parser.add_argument("--temperature", default="25", metavar="°C", help="temperature of the unit [°C] (default 25)")
    _common(parser)
    parser.set_defaults(run=commands.unit)


def _draft(sub: Sub) -> None:
    parser = _add(
        sub,
        "draft",
        "make a study workbook from a bare BOM: a part proposed for each role, with what is left to fill in",
        "draft bom_examples/buoy_clock_bom.csv --circuit pierce -o buoy_clock.xlsx",
    )
    parser.add_argument("bom", metavar="BOM", help="spreadsheet or delimited text")
    parser.add_argument("--circuit", required=True, metavar="NAME", help="which circuit the board has")
    parser.add_argument(
        "--option", action="append", default=[], metavar="KEY=VALUE", help="a choice that the circuit offers"
    )
    parser.add_argument("-o", "--output", required=True, metavar="STUDY.xlsx", help="the workbook to write")
    _common(parser)
    parser.set_defaults(run=commands.draft)


def _check(sub: Sub) -> None:
    parser = _add(
        sub,
        "check",
        "read a study or a bare BOM and echo every line as understood; runs nothing",
        "check bom_examples/buoy_clock_bom.csv",
    )
    parser.add_argument("input", metavar="INPUT", help="a study, or a BOM")
    _common(parser)
    parser.set_defaults(run=commands.check)


def _assess(sub: Sub) -> None:
    parser = _add(
        sub,
        "assess",
        "the main job: what fraction starts and stays in limits, which parts decide it, is it evidence enough",
        "assess bom_examples/tide_tone_1khz.xlsx",
    )
    parser.add_argument("study", metavar="STUDY", help=STUDY)
    _run(parser, "exactly N units, one look (default: looks at fixed counts)")
    parser.set_defaults(run=commands.assess)


def _run(parser: Parser, units: str) -> None:
    """What every command that simulates takes."""
    parser.add_argument("-o", "--output", metavar="DIR", help="where results go (default output/<study>-<digest>)")
    parser.add_argument("--units", metavar="N", help=units)
    parser.add_argument("--seed", metavar="S", default="1", help="seed of every draw (default 1)")
    parser.add_argument("--workers", metavar="W", help="processes (default: one per processor)")
    _common(parser)


def _upgrade(sub: Sub) -> None:
    parser = _add(
        sub,
        "upgrade",
        "which part to buy better: yield and cost of a good unit for every next grade and for sets of them",
        "upgrade bom_examples/tide_tone_1khz.xlsx",
    )
    parser.add_argument("study", metavar="STUDY", help=STUDY)
    _run(parser, "units on which a set must prove itself, and as many fresh ones (default 65,536)")
    parser.set_defaults(run=decisions.upgrade)


def _limits(sub: Sub) -> None:
    parser = _add(
        sub,
        "limits",
        "factory test limits with escapes and false rejects, the trade between them; trim range and yield after trim",
        "limits bom_examples/tide_tone_1khz.xlsx",
    )
    parser.add_argument("study", metavar="STUDY", help=STUDY)
    _run(parser, "units of each of the two samples (default: what the escape limit needs)")
    parser.set_defaults(run=decisions.limits)


def _compare(sub: Sub) -> None:
    parser = _add(
        sub,
        "compare",
        "two studies or result workbooks: what changed, and what it did to each rate",
        "compare bom_examples/tide_tone_1khz.xlsx bom_examples/tide_tone_1khz_rev_b.xlsx",
    )
    parser.add_argument("first", metavar="A", help=STUDY)
    parser.add_argument("second", metavar="B", help="the other one")
    _run(parser, "units of each study, the same numbers (default 65,536)")
    parser.set_defaults(run=decisions.compare)
