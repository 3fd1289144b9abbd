"""A user's own branch table: built-in circuits repeated row by row, what is refused, and poles that grow by themselves."""

from __future__ import annotations

import itertools
import pickle
import time

import numpy as np
import pytest

from tests.circuits.families.common import built, independent, solve_circuit, symbols_of
from tests.samples import BJT, COIL, QUARTZ, TANK
from yieldosc.circuits.circuit import Circuit, CircuitError
from yieldosc.circuits.network import expand
from yieldosc.circuits.own_circuit import Row, build_own, parse_rows
from yieldosc.circuits.term_count import most_terms
from yieldosc.solver import make_evaluator
from yieldosc.solver.no_crossing import no_crossing_reason
from yieldosc.solver.solution import Status

FIELDS = ("frequency_hz", "startup_margin", "growth_per_s", "critical_gain", "upper_ratio", "resistance_ratio")


def row(name, kind, start, end="", plus="", minus="", values="", gain=""):
    return {"name": name, "kind": kind, "from": start, "to": end, "control+": plus, "control-": minus} | {
        "values": values,
        "gain": gain,
    }


def repeated(circuit: Circuit) -> tuple[list[dict[str, str]], dict[str, str]]:
    """A built-in circuit's table as plain rows, each symbol a value of its own; and symbol → value's name."""
    names = {s: s if s[0].isalpha() else f"v{s}" for b in circuit.branches for s in b.symbols}
    rows = []
    for b in circuit.branches:
        values = ", ".join(names[s] for s in b.symbols)
        gain = "yes" if b.gain_element else ""
        if b.kind in ("opamp", "gain"):
            rows.append(row(b.name, b.kind, b.nodes[0], "", *b.nodes[1:], values, gain))
        elif b.kind == "crystal":
            rows.append(row(b.name, b.kind, *b.nodes, values=", ".join((f"fs_{b.name}", *map(names.get, b.symbols[1:])))))
        else:
            rows.append(row(b.name, b.kind, *b.nodes, values=values, gain=gain))
    return rows, names


REPEATED = [
    pytest.param("colpitts", {"ground": "base"}, {**BJT, **TANK, "CB": 10e-9, "RL": 10e3}, id="colpitts"),
    pytest.param("hartley", {}, {**BJT, **COIL, "CC": 1e-9, "CE": 1e-7, "L1_dcr": 0.5, "L2_dcr": 0.2}, id="coupled"),
    pytest.param("hartley", {"ground": "base"}, {**BJT, **COIL, "CT": 1e-9, "CB": 1e-8, "RL": 10e3}, id="lossless-pair"),
    pytest.param(
        "phase_shift",
        {"buffered": "yes"},
        {"R1": 1e4, "R2": 1e4, "R3": 1e4, "C1": 1e-8, "C2": 1e-8, "C3": 1e-8, "RIN": 1e5, "RF": 9e5, "GBW": 1e6},
        id="op-amp-and-buffers",
    ),
    pytest.param(
        "pierce",
        {},
        {**QUARTZ, "C1": 27e-12, "C2": 22e-12, "RF": 1e6, "gm": 5e-3, "Cm3": 2e-15, "ESR3": 90.0},
        id="crystal-with-overtone",
    ),
]


@pytest.mark.parametrize(("name", "options", "values"), REPEATED)
def test_a_built_in_circuit_repeated_gives_the_same_numbers(name, options, values):
    """To 1e-12 (the requirement). The repeated table holds the same symbols; a crystal's arm is given by its fs."""
    circuit, arrays = built(name, options, values)
    symbols = symbols_of(circuit, arrays)
    rows, names = repeated(circuit)
    design = float(np.ravel(circuit.design_frequency(arrays))[0])
    own = build_own(parse_rows(rows), design)
    given = {names[s]: np.array([v]) for s, v in symbols.items()}
    for b in circuit.branches:
        if b.kind == "crystal":
            given[f"fs_{b.name}"] = 1 / (2 * np.pi * np.sqrt(given[b.symbols[0]] * given[b.symbols[1]]))
        if b.kind == "opamp" and b.symbols:
            given[names[b.symbols[0]]] = 1 / (2 * np.pi * given[names[b.symbols[0]]])
    mine = solve_circuit(own, {r.name: given[r.name] for r in own.roles})
    theirs = solve_circuit(circuit, arrays)
    assert mine.status[0] == theirs.status[0]
    for field in FIELDS:
        one, other = getattr(mine, field), getattr(theirs, field)
        assert (one is None) == (other is None)
        if one is not None:
            np.testing.assert_allclose(one, other, rtol=1e-12, err_msg=field)


WIEN_ROWS = [
    row("R1", "R", "o", "n"),
    row("C1", "capacitor", "n", "p"),
    row("R2", "Resistor", "p", "GND"),
    row("C2", "C", "p", "0"),
    row("RF", "R", "q", "m", gain="1 + g/(RG + RS)"),
    row("RG", "R", "m", "s"),
    row("RS", "R", "s", "gnd"),
    row("U1", "op-amp", "q", "", "p", "m", "GBW"),
    row("RO", "R", "q", "o"),
]
WIEN_VALUES = {"R1": 1e4, "C1": 1e-8, "R2": 1e4, "C2": 1e-8, "RF": 22e3, "RG": 9.88e3, "GBW": 1e6, "RO": 75.0}


def test_an_op_amp_bridge_with_its_own_gain_law():
    """Margin of K = 1 + RF/(RG + RS), with the lamp a branch of its own, as the built-in bridge has it."""
    own = build_own(parse_rows(WIEN_ROWS), 1591.5)
    mine = solve_circuit(own, {k: np.array([v]) for k, v in {**WIEN_VALUES, "RS": 120.0}.items()})
    circuit, arrays = built("wien_bridge", {}, {**WIEN_VALUES, "RS_start": 120.0, "RS_full": 480.0})
    theirs = solve_circuit(circuit, arrays)
    for field in ("frequency_hz", "startup_margin", "growth_per_s", "critical_gain"):
        np.testing.assert_allclose(getattr(mine, field), getattr(theirs, field), rtol=1e-12, err_msg=field)


def test_a_data_sheet_crystal_in_an_own_table():
    """FL, CL, Cm, C0, ESR in one row; its band is the crystal's, so that a mode elsewhere is another mode."""
    rows = [
        row("X1", "crystal", "g", "d", values="FL CL Cm C0 ESR"),
        row("C1", "C", "g", "gnd"),
        row("C2", "C", "d", "gnd"),
        row("RF", "R", "g", "d"),
        row("Rout", "R", "d", "gnd"),
        row("gm", "gm", "d", "gnd", "g", "gnd", gain="x"),
    ]
    own = build_own(parse_rows(rows), 8e6)
    values = {**QUARTZ, "C1": 32e-12, "C2": 32e-12, "RF": 1e6, "Rout": 20e3, "gm": 5e-3}
    arrays = {k: np.array([v]) for k, v in values.items()}
    mine = solve_circuit(own, arrays)
    bare = {"Cin": 1e-22, "Cout": 1e-22, "Cfb": 1e-22}
    circuit, built_arrays = built("pierce", {}, {**values, **bare})
    theirs = solve_circuit(circuit, built_arrays)
    np.testing.assert_allclose(mine.frequency_hz, theirs.frequency_hz, rtol=1e-12)
    np.testing.assert_allclose(mine.resistance_ratio, theirs.resistance_ratio, rtol=1e-6)  # the gate's 1e12 Ω is left out
    centre, half = own.band(arrays)
    assert half == pytest.approx(15e-15 / 4e-12)
    assert centre == pytest.approx(8e6 / np.sqrt(1 + 15e-15 / 22e-12), rel=1e-12)
    far = build_own(parse_rows(rows), 5e6)
    assert far.band(arrays) == (5e6, np.log(2.0))


def test_it_travels_to_another_process():
    own = build_own(parse_rows(WIEN_ROWS), 1591.5)
    nominal = {**WIEN_VALUES, "RS": 120.0}
    arrays = {k: np.array([v, v * 1.01]) for k, v in nominal.items()}
    here = make_evaluator(own, nominal)
    there = pickle.loads(pickle.dumps(here))
    for field in ("frequency_hz", "startup_margin"):
        np.testing.assert_array_equal(getattr(there.solve(arrays, 25.0), field), getattr(here.solve(arrays, 25.0), field))


def test_roles_say_what_they_are():
    own = build_own(parse_rows(WIEN_ROWS), 1591.5)
    assert {r.name: (r.kind, r.unit) for r in own.roles} == {
        "R1": ("resistor", "Ω"), "C1": ("capacitor", "F"), "R2": ("resistor", "Ω"), "C2": ("capacitor", "F"),
        "RF": ("resistor", "Ω"), "RG": ("resistor", "Ω"), "RS": ("resistor", "Ω"), "GBW": ("ic", "Hz"),
        "RO": ("resistor", "Ω"),
    }  # fmt: skip
    assert all(r.required and r.meaning for r in own.roles)


# -- refusals -----------------------------------------------------------------------------------------------------------


def problems(rows, hz=1e3):
    with pytest.raises(CircuitError) as caught:
        build_own(parse_rows(rows), hz)
    return list(caught.value.problems)


TANK_ROWS = [
    row("L1", "L", "a", "gnd"),
    row("C1", "C", "a", "gnd"),
    row("R1", "R", "a", "gnd"),
    row("K1", "gain", "b", "", "a", "gnd", gain="yes"),
    row("R2", "R", "b", "a"),
]


def changed(number, **cells):
    rows = [dict(r) for r in TANK_ROWS]
    rows[number] |= cells
    return rows


def test_the_tank_itself_is_accepted():
    s = solve_circuit(
        build_own(parse_rows(TANK_ROWS), 5.03e6),
        {k: np.array([v]) for k, v in {"L1": 1e-6, "C1": 1e-9, "R1": 1e3, "K1": 2.5, "R2": 1e3}.items()},
    )
    assert s.critical_gain[0] == pytest.approx(2, rel=1e-12)  # (K − 1)/R2 = 1/R1
    assert s.frequency_hz[0] == pytest.approx(1 / (2 * np.pi * np.sqrt(1e-15)), rel=1e-12)


@pytest.mark.parametrize(
    ("rows", "text"),
    [
        (changed(0, name=""), "branch row 1 has no name: give every branch one"),
        (
            changed(0, kind="memristor"),
            "branch L1 is of kind 'memristor'; write one of R, C, L, coupled, crystal, transconductance, gain, opamp",
        ),
        (
            changed(0, colour="red"),
            "branch L1 has unknown columns colour; known are name, kind, from, to, control+, control-, values, gain",
        ),
        (changed(1, to=""), "branch C1 needs a node in from and in to"),
        (changed(1, to="a"), "branch C1 joins node a to itself: connect it between two nodes, or remove it"),
        (changed(3, to="a"), "branch K1: a gain row drives its from node against gnd; leave to empty"),
        (changed(3, **{"from": "gnd"}), "branch K1 drives gnd: from must be the output's node"),
        (changed(3, **{"control+": ""}), "branch K1 needs control+ and control-: the controlling voltage's nodes"),
        (changed(3, **{"control-": "a"}), "branch K1 has the same node a in control+ and control-"),
        (
            changed(2, **{"control+": "b"}),
            "branch R1 is of kind R and has no controls; leave control+ and control- empty",
        ),
        (changed(0, values="L1, r, q"), "branch L1 names 3 values; a row of kind L has L; or L, series resistance"),
        (
            changed(0, values="1L"),
            "branch L1: '1L' cannot name a value; use a letter, then letters, digits and _ (31 at most)",
        ),
        (
            changed(0, gain="yes"),
            "branch L1 cannot be the gain element: it is of kind L; choose one of kind R, transconductance, gain",
        ),
        (
            changed(3, gain="maybe"),
            "branch K1: gain is 'maybe'; write yes, or 1 + g/RG with the role that RG stands for",
        ),
        (changed(1, name="L1"), "branch L1 stands twice: give every branch its own name"),
        (
            changed(0, kind="crystal"),
            "branch L1 needs the names of its values, in this order: FS, Cm, ESR (motional arm only); or "
            "FS, Cm, C0, ESR; or FL, CL, Cm, C0, ESR",
        ),
        ([], "the branch table is empty: give one row per branch"),
        (
            changed(3, gain=""),
            "no branch is marked as the gain element: mark the one whose gain falls as the amplitude grows",
        ),
        (changed(4, gain="yes"), "2 branches are marked as the gain element (K1, R2): mark one"),
        (changed(3, gain="1 + g/RX"), "branch K1: RX under g is not the value of an R branch"),
        (
            changed(4, values="C1"),
            "branch R2: the value C1 is in Ω here and in F elsewhere; give it another name",
        ),
        (
            [*TANK_ROWS, row("R9", "R", "a", "z")],
            "node z is touched by branch R9 only: connect it, or remove the branch",
        ),
        (
            [*TANK_ROWS, row("R8", "R", "y", "z"), row("R9", "R", "y", "z")],
            "nodes y, z: no R, L, C, crystal or amplifier leads to gnd; connect them",
        ),
        (
            [TANK_ROWS[2], *TANK_ROWS[3:]],
            "no frequency at which the gain element could start an oscillation: the table turns no phase; "
            "it needs capacitors or coils beside resistances",
        ),
        (
            [*TANK_ROWS[:3], row("K1", "gm", "a", "gnd", "b", "gnd", gain="yes"), row("R2", "R", "b", "gnd"),
             row("R3", "R", "b", "gnd")],
            "the gain element K1 has no effect: no loop goes through it",
        ),
    ],
)  # fmt: skip
def test_refused_tables(rows, text):
    assert problems(rows) == [text]


@pytest.mark.parametrize("hz", [0.0, -1.0, float("nan"), float("inf")])
def test_a_design_frequency_that_is_none(hz):
    assert problems(TANK_ROWS, hz) == [f"the design frequency must be above 0 Hz; found {hz!r}"]


def test_all_problems_at_once():
    rows = changed(0, kind="memristor")
    rows[1]["to"] = ""
    rows[3]["gain"] = "maybe"
    assert len(problems(rows)) == 3


def mesh(count: int, joints: int) -> list[dict[str, str]]:
    """`count` nodes, a capacitor each to ground, `joints` resistors among them, one transconductance."""
    nodes = [f"n{i}" for i in range(count)]
    pairs = list(itertools.combinations(range(count), 2))
    pairs.sort(key=lambda p: (p[1] - p[0], p[0]))
    rows = [row(f"R{i}_{j}", "R", nodes[i], nodes[j]) for i, j in pairs[:joints]]
    rows += [row(f"C{i}", "C", node, "gnd") for i, node in enumerate(nodes)]
    return [*rows, row("gm", "gm", "n0", "gnd", f"n{count - 1}", "gnd", gain="yes")]


@pytest.mark.parametrize("joints", [16, 40])
def test_a_large_table_is_counted_and_refused_before_it_is_expanded(joints):
    """12 nodes and 29 branches have a million terms: refused without the seconds and gigabytes that an expansion takes."""
    many = mesh(12, joints)
    assert len(many) == joints + 13
    started = time.perf_counter()
    assert problems(many) == [
        "the branch table expands to more than 20,000 terms; leave out branches that do not matter at the oscillation "
        "frequency, or merge series and parallel parts"
    ]
    assert time.perf_counter() - started < 2


def test_thirteen_nodes_are_refused():
    assert problems(mesh(13, 12)) == ["the branch table has 13 nodes beside ground; at most 12 are accepted"]


@pytest.mark.parametrize(("name", "options", "values"), REPEATED)
def test_the_count_is_never_below_the_number_of_terms(name, options, values):
    circuit, _ = built(name, options, values)
    a, b = expand(circuit.branches, circuit.gain_symbol)
    assert len(a) + len(b) <= most_terms(circuit.branches) * (1 + 1e-9)
    assert most_terms(circuit.branches) < 20 * (len(a) + len(b))  # buffers make it loose, never a hindrance


def test_the_count_of_a_passive_mesh_is_exact():
    """Cayley: k nodes joined each to each and to ground have (k + 1)^(k − 1) spanning trees."""
    nodes = ["gnd", *(f"n{i}" for i in range(5))]
    rows = [row(f"R{a}{b}", "R", a, b) for a, b in itertools.combinations(nodes, 2)]
    rows.append(row("gm", "gm", "n0", "gnd", "n1", "gnd", gain="yes"))
    from yieldosc.circuits.own_circuit import _branches  # noqa: PLC0415 -- the table itself would be refused

    resistors = [b for r in parse_rows(rows)[:-1] for b in _branches(r)]
    assert most_terms(resistors) == pytest.approx(6**4, rel=1e-9)


def test_a_user_s_text_never_becomes_code():
    hostile = "x);__import__('os')#"
    rows = changed(0, name=hostile)
    rows[0]["values"] = "Ltank"
    for r in rows:
        for key in ("from", "to", "control+"):
            r[key] = f"{hostile}a" if r[key] == "a" else r[key]
    own = build_own(parse_rows(rows), 5.03e6)
    values = {"Ltank": 1e-6, "C1": 1e-9, "R1": 1e3, "K1": 2.5, "R2": 1e3}
    s = solve_circuit(own, {k: np.array([v]) for k, v in values.items()})
    assert s.critical_gain[0] == pytest.approx(2, rel=1e-12)


def test_a_table_without_a_crossing_says_what_to_look_at():
    """Control nodes of the gain row exchanged: the feedback damps, whatever its gain."""
    turned = changed(3, **{"control+": "gnd", "control-": "a"})
    values = {"L1": 1e-6, "C1": 1e-9, "R1": 1e3, "K1": 2.5, "R2": 1e3}
    assert no_crossing_reason(build_own(parse_rows(TANK_ROWS), 5.03e6), values) is None
    assert no_crossing_reason(build_own(parse_rows(turned), 5.03e6), values) == (
        "at the nominal values no gain of K1 brings the circuit to oscillation near the design frequency of 5.03e+06 Hz; "
        "check the branch table (the sense of the gain element's nodes first) and the frequency"
    )
    assert no_crossing_reason(build_own(parse_rows(TANK_ROWS), 1e6), values) is not None  # a factor 2 away is no crossing


# -- poles that grow before the gain element does anything ----------------------------------------------------------------

TWO_TANKS = [
    row("L1", "L", "a", "gnd"),
    row("C1", "C", "a", "gnd"),
    row("R1", "R", "a", "gnd"),
    row("K1", "gain", "b", "", "a", "gnd"),
    row("R2", "R", "b", "a"),
    row("RX", "R", "a", "x"),
    row("L2", "L", "x", "gnd"),
    row("C2", "C", "x", "gnd"),
    row("R3", "R", "x", "gnd"),
    row("K2", "gain", "y", "", "x", "gnd", gain="yes"),
    row("R4", "R", "y", "x"),
]
TWO = {"L1": 1e-6, "C1": 1e-9, "R1": 1e3, "R2": 1e3, "RX": 1e6, "L2": 1e-6, "C2": 25e-9, "R3": 1e3, "K2": 2.5, "R4": 1e3}


@pytest.mark.parametrize(
    ("fixed", "marked", "status"),
    [
        (1.9, 2.5, Status.STARTS),  # the fixed tank is damped
        (1.9, 1.9, Status.NO_START),
        (2.5, 1.9, Status.WRONG_MODE),  # it grows alone
        (2.5, 2.5, Status.WRONG_MODE),  # both grow, and the fixed one faster (its C is smaller)
    ],
)
def test_poles_that_grow_at_gain_zero_are_counted(fixed, marked, status):
    """K1 above 2 makes the first tank grow whatever K2, the gain element, is: counting must start from two poles."""
    own = build_own(parse_rows(TWO_TANKS), 1e6)
    arrays = {k: np.array([v]) for k, v in {**TWO, "K1": fixed, "K2": marked}.items()}
    s = solve_circuit(own, arrays)
    assert Status(s.status[0]) is status
    growing = independent(own, arrays, 25.0, level_ohm=100.0).growing()
    assert len(growing) == 2 * (fixed > 2) + 2 * (marked > 2)
    nominal = {k: float(v[0]) for k, v in arrays.items()}
    others = make_evaluator(own, nominal).other_modes(arrays, 25.0)[0]
    assert len(others) == (1 if fixed > 2 else 0)
    if fixed > 2:
        assert s.other_mode_hz[0] == pytest.approx(1 / (2 * np.pi * np.sqrt(1e-15)), rel=2e-3)


def test_a_unit_of_a_population_that_grows_alone_is_found():
    """The nominal unit's fixed tank is damped; one unit's is not: the fast path must notice."""
    own = build_own(parse_rows(TWO_TANKS), 1e6)
    nominal = {**TWO, "K1": 1.9}
    arrays = {k: np.full(3, v) for k, v in nominal.items()}
    arrays["K1"] = np.array([1.9, 2.5, 1.8])
    s = make_evaluator(own, nominal).solve(arrays, 25.0)
    assert [Status(code) for code in s.status] == [Status.STARTS, Status.WRONG_MODE, Status.STARTS]


def test_rows_are_plain_values():
    assert parse_rows(TANK_ROWS)[3] == Row("K1", "gain", "b", "gnd", "a", "gnd", ("K1",), True, ())
