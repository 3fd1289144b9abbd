"""Rows of a user's branch table: plain text in, checked rows out, with every problem named.

Keys of a row (any case): name, kind, from, to, control+, control-, values, gain. `values` lists role names in the order
of the kind, separated by commas, semicolons or blanks; empty: the row's own name. `gain` marks the gain element: yes,
or `1 + g/RG` where the margin is to be taken of an op-amp stage's K = 1 + g/RG (several roles: 1 + g/(RG + RS)).
"""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from dataclasses import dataclass

from yieldosc.circuits.circuit import CircuitError

GROUND_WORDS = ("gnd", "ground", "0", "earth")
ROLE_NAME = re.compile(r"[A-Za-z][A-Za-z0-9_]{0,30}")
OVER = re.compile(r"1\s*\+\s*g\s*/\s*\(?\s*([A-Za-z][\w\s+]*?)\s*\)?")
KEYS = ("name", "kind", "from", "to", "control+", "control-", "values", "gain")
MINUS_SIGNS = str.maketrans({"−": "-", "–": "-"})


@dataclass(frozen=True, slots=True)
class Kind:
    """What a row of one kind needs: `values` by the number of them, words that name it, whether it has controls."""

    name: str
    words: tuple[str, ...]
    values: tuple[str, ...]  # each a legend of role meanings, one per allowed number of values
    controls: str = ""  # what control+ and control- are
    output_only: bool = False  # `to` is ground
    may_gain: bool = False


KINDS = (
    Kind("R", ("resistor", "resistance"), ("R",), may_gain=True),
    Kind("C", ("capacitor", "capacitance"), ("C",)),
    Kind("L", ("coil", "inductor", "inductance", "choke"), ("L", "L, series resistance")),
    Kind(
        "coupled",
        ("coupled coils", "coupled coil pair", "coil pair", "tapped coil", "transformer"),
        ("L1, L2, k", "L1, L2, k, series resistance 1, series resistance 2"),
        controls="the second winding's start and end",
    ),
    Kind(
        "crystal",
        ("quartz", "xtal"),
        ("FS, Cm, ESR (motional arm only)", "FS, Cm, C0, ESR", "FL, CL, Cm, C0, ESR"),
    ),
    Kind(
        "transconductance",
        ("gm", "vccs"),
        ("gm",),
        controls="the controlling voltage's nodes",
        may_gain=True,
    ),
    Kind(
        "gain",
        ("voltage gain", "amplifier", "buffer"),
        ("gain", "gain, lag in seconds"),
        controls="the controlling voltage's nodes",
        output_only=True,
        may_gain=True,
    ),
    Kind(
        "opamp",
        ("op-amp", "op amp", "operational amplifier"),
        ("no value (ideal)", "gain–bandwidth product"),
        controls="the + and − inputs",
        output_only=True,
    ),
)
BY_WORD = {word: kind for kind in KINDS for word in (kind.name.lower(), *kind.words)}


@dataclass(frozen=True, slots=True)
class Row:
    """A checked row. gain_over: roles whose sum divides g in K = 1 + g/Σ; empty: the margin is g/g_c itself."""

    name: str
    kind: str
    start: str
    end: str
    control_plus: str = ""
    control_minus: str = ""
    values: tuple[str, ...] = ()
    gain_element: bool = False
    gain_over: tuple[str, ...] = ()


def parse_rows(rows: Sequence[Mapping[str, str]]) -> tuple[Row, ...]:
    """Rows from plain text; CircuitError with every problem of every row."""
    problems: list[str] = []
    out = []
    for number, raw in enumerate(rows, start=1):
        cells = {_key(key): " ".join(str(text).split()) for key, text in raw.items()}
        row = _row(number, cells, problems)
        if row is not None:
            out.append(row)
    problems += _names_twice(out)
    if problems:
        raise CircuitError(problems)
    return tuple(out)


def _key(text: str) -> str:
    """Heading → key: case, blanks and the kind of minus sign do not matter."""
    key = text.translate(MINUS_SIGNS).strip().lower().replace(" ", "").replace("_", "")
    other = {"controlplus": "control+", "controlminus": "control-", "roles": "values", "gainelement": "gain",
             "branch": "name", "value": "values"}  # fmt: skip
    return other.get(key, key)


def _row(number: int, cells: Mapping[str, str], problems: list[str]) -> Row | None:
    name = cells.get("name", "")
    where = f"branch {name}" if name else f"branch row {number}"
    before = len(problems)
    if not name:
        problems.append(f"{where} has no name: give every branch one")
    unknown = sorted(key for key in cells if key not in KEYS)
    if unknown:
        problems.append(f"{where} has unknown columns {', '.join(unknown)}; known are {', '.join(KEYS)}")
    kind = BY_WORD.get(cells.get("kind", "").lower())
    if kind is None:
        listed = ", ".join(k.name for k in KINDS)
        problems.append(f"{where} is of kind {cells.get('kind', '')!r}; write one of {listed}")
        return None
    start, end = _node(cells.get("from", "")), _node(cells.get("to", ""))
    plus, minus = _node(cells.get("control+", "")), _node(cells.get("control-", ""))
    problems += _node_problems(where, kind, (start, end), (plus, minus))
    values = _values(where, kind, name, cells.get("values", ""), problems)
    marked, over = _mark(where, kind, cells.get("gain", ""), problems)
    if len(problems) > before:
        return None
    end = "gnd" if kind.output_only else end
    return Row(name, kind.name, start, end, plus, minus, values, marked, over)


def _node(text: str) -> str:
    return "gnd" if text.lower() in GROUND_WORDS else text


def _node_problems(where: str, kind: Kind, ends: tuple[str, str], controls: tuple[str, str]) -> list[str]:
    problems = []
    if not ends[0] or (not ends[1] and not kind.output_only):
        problems.append(f"{where} needs a node in from and in to")
    if kind.output_only and ends[1] not in ("", "gnd"):
        problems.append(f"{where}: a {kind.name} row drives its from node against gnd; leave to empty")
    if kind.output_only and ends[0] == "gnd":
        problems.append(f"{where} drives gnd: from must be the output's node")
    if not kind.output_only and ends[0] and ends[0] == ends[1]:
        problems.append(f"{where} joins node {ends[0]} to itself: connect it between two nodes, or remove it")
    if kind.controls and not all(controls):
        problems.append(f"{where} needs control+ and control-: {kind.controls}")
    if not kind.controls and any(controls):
        problems.append(f"{where} is of kind {kind.name} and has no controls; leave control+ and control- empty")
    if kind.controls and all(controls) and controls[0] == controls[1]:
        problems.append(f"{where} has the same node {controls[0]} in control+ and control-")
    return problems


def _values(where: str, kind: Kind, name: str, text: str, problems: list[str]) -> tuple[str, ...]:
    given = tuple(part for part in re.split(r"[,;\s]+", text) if part)
    counts = {0 if "no value" in legend else legend.count(",") + 1: legend for legend in kind.values}
    if not given and 0 not in counts:
        if 1 not in counts:
            listed = "; or ".join(counts.values())
            problems.append(f"{where} needs the names of its values, in this order: {listed}")
            return ()
        if not name:
            return ()  # the missing name has been said
        given = (name,)
    if len(given) not in counts:
        listed = "; or ".join(counts.values())
        problems.append(f"{where} names {len(given)} values; a row of kind {kind.name} has {listed}")
    for role in given:
        if not ROLE_NAME.fullmatch(role):
            problems.append(
                f"{where}: {role!r} cannot name a value; use a letter, then letters, digits and _ (31 at most)"
            )
    return given


def _mark(where: str, kind: Kind, text: str, problems: list[str]) -> tuple[bool, tuple[str, ...]]:
    """Whether the row is the gain element, and the roles under g in K = 1 + g/Σ."""
    word = text.lower()
    if word in ("", "no", "-"):
        return False, ()
    if not kind.may_gain:
        allowed = ", ".join(k.name for k in KINDS if k.may_gain)
        problems.append(f"{where} cannot be the gain element: it is of kind {kind.name}; choose one of kind {allowed}")
        return True, ()
    if word in ("yes", "y", "x", "g", "true", "1"):
        return True, ()
    found = OVER.fullmatch(text)
    if found is None:
        problems.append(f"{where}: gain is {text!r}; write yes, or 1 + g/RG with the role that RG stands for")
        return True, ()
    return True, tuple(part.strip() for part in found.group(1).split("+"))


def _names_twice(rows: Sequence[Row]) -> list[str]:
    names = [row.name for row in rows]
    twice = [name for name in dict.fromkeys(names) if names.count(name) > 1]
    return [f"branch {name} stands twice: give every branch its own name" for name in twice]
