"""The expansion of a branch table: its terms against hand-expanded circuits, sympy and 80-digit determinants; what it
refuses, in full; and that no text of a user reaches the code it generates."""

from __future__ import annotations

import mpmath
import numpy as np
import pytest
import sympy

from tests.independent import DIGITS, Unit, from_branches
from tests.samples import CHOICES
from yieldosc.circuits import network as module
from yieldosc.circuits import registry
from yieldosc.circuits.circuit import Branch
from yieldosc.circuits.network import MOST_NODES, NetworkError, expand, network

# One of each kind around a transconductance; every kind of admittance that a table may hold is here.
FET_COLPITTS = (
    Branch("L", "L", ("d", "g"), ("L",)),
    Branch("C1", "C", ("d", "gnd"), ("C1",)),
    Branch("C2", "C", ("g", "gnd"), ("C2",)),
    Branch("R", "R", ("d", "gnd"), ("R",)),
    Branch("gm", "transconductance", ("d", "gnd", "g", "gnd"), ("gm",), True),
)


def as_sympy(poly, s):
    return sum(value * s**power * sympy.Mul(*map(sympy.Symbol, names)) for (power, names), value in poly.items())


def test_colpitts_of_the_class_notes_by_hand():
    """C01: s³ L C1 C2 + s² L C2/R + s (C1 + C2) + (gm + 1/R) = 0 (EE416 class notes, lectures 04-22, 04-27; seen).
    Exact: the comparison is symbolic."""
    a, b = expand(FET_COLPITTS, "gm")
    s, L, C1, C2, R, gm = sympy.symbols("s L C1 C2 R gm")
    notes = s**3 * L * C1 * C2 + s**2 * L * C2 / R + s * (C1 + C2) + (gm + 1 / R)
    assert sympy.expand(as_sympy(a, s) + gm * as_sympy(b, s) - R * notes) == 0


def test_rc_divider_by_hand():
    """R from an ideal follower to a node with C to ground: v_q = K v_n closes to sRC + 1 − K."""
    rows = (
        Branch("R", "R", ("q", "n"), ("R",)),
        Branch("C", "C", ("n", "gnd"), ("C",)),
        Branch("K", "gain", ("q", "n", "gnd"), ("K",), True),
    )
    a, b = expand(rows, "K")
    assert a == {(0, ()): 1, (1, ("C", "R")): 1}
    assert b == {(0, ()): -1}


def test_gain_row_with_a_lag_by_hand():
    """(1 + sτ)(sRC + 1) − K."""
    rows = (
        Branch("R", "R", ("q", "n"), ("R",)),
        Branch("C", "C", ("n", "gnd"), ("C",)),
        Branch("K", "gain", ("q", "n", "gnd"), ("K", "tau"), True),
    )
    a, b = expand(rows, "K")
    s, tau, R, C = sympy.symbols("s tau R C")
    assert sympy.expand(as_sympy(a, s) - (1 + s * tau) * (s * R * C + 1)) == 0
    assert b == {(0, ()): -1}


@pytest.mark.parametrize("tau", [(), ("tau",)])
def test_wien_bridge_with_its_op_amp_row_by_hand(tau):
    """v_p/v_o = s R2 C1/((1 + sR1C1)(1 + sR2C2) + sR2C1), v_m/v_o = RG/(RG + RF), s τ v_o = v_p − v_m (voltage
    dividers): the closed loop multiplied out."""
    rows = (
        Branch("R1", "R", ("o", "n"), ("R1",)),
        Branch("C1", "C", ("n", "p"), ("C1",)),
        Branch("R2", "R", ("p", "gnd"), ("R2",)),
        Branch("C2", "C", ("p", "gnd"), ("C2",)),
        Branch("RF", "R", ("o", "m"), ("RF",), True),
        Branch("RG", "R", ("m", "gnd"), ("RG",)),
        Branch("A", "opamp", ("o", "p", "m"), tau),
    )
    a, b = expand(rows, "RF")
    s, R1, R2, C1, C2, RF, RG = sympy.symbols("s R1 R2 C1 C2 RF RG")
    t = sympy.Symbol("tau") if tau else 0
    arms = (1 + s * R1 * C1) * (1 + s * R2 * C2) + s * R2 * C1
    wanted = arms * (RG + RF) * s * t - s * R2 * C1 * (RG + RF) + arms * RG
    assert sympy.expand(as_sympy(a, s) + RF * as_sympy(b, s) - wanted) == 0


def test_crystal_arm_by_hand():
    """y = s Cm/(1 + s Rm Cm + s² Lm Cm) beside C0, with a negative resistance −1/gm across it."""
    rows = (
        Branch("X", "crystal", ("a", "gnd"), ("Lm", "Cm", "Rm")),
        Branch("C0", "C", ("a", "gnd"), ("C0",)),
        Branch("gm", "transconductance", ("a", "gnd", "gnd", "a"), ("gm",), True),
    )
    a, b = expand(rows, "gm")
    s, Lm, Cm, Rm, C0, gm = sympy.symbols("s Lm Cm Rm C0 gm")
    arm = 1 + s * Rm * Cm + s**2 * Lm * Cm
    wanted = s * Cm + (s * C0 - gm) * arm
    assert sympy.expand(as_sympy(a, s) + gm * as_sympy(b, s) - wanted) == 0


@pytest.mark.parametrize(
    ("windings", "series"),
    [("abcd", ()), ("abb0", ("r1", "r2")), ("a0c0", ("r1", "r2"))],
    ids=["free", "tapped", "grounded"],
)
def test_coupled_pair_against_sympy(windings, series):
    """Windings between live nodes: nodal matrix with the pair's impedance matrix [[z1, sM], [sM, z2]] inverted."""
    live = sorted(set(windings) - {"0"})
    first = live[0]
    last = live[-1]
    rows = (
        Branch("T", "coupled", tuple("gnd" if n == "0" else n for n in windings), ("L1", "L2", "k", *series)),
        *(Branch(f"C{n}", "C", (n, "gnd"), (f"C{n}",)) for n in live),
        Branch("gm", "transconductance", (first, "gnd", last, "gnd"), ("gm",), True),
    )
    made = network(rows, "gm")
    s, M, L1, L2, gm = sympy.symbols("s M L1 L2 gm")
    r1, r2 = sympy.symbols("r1 r2") if series else (0, 0)
    z1, z2 = s * L1 + r1, s * L2 + r2
    pair = sympy.Matrix([[z2, -s * M], [-s * M, z1]])  # times 1/(z1 z2 − s²M²): the inverse
    incidence = sympy.zeros(2, len(live))
    for winding in (0, 1):
        for end, sign in ((0, 1), (1, -1)):
            node = windings[2 * winding + end]
            if node != "0":
                incidence[winding, live.index(node)] += sign
    delta = z1 * z2 - s**2 * M**2
    nodal = incidence.T * pair * incidence + delta * sympy.diag(*(s * sympy.Symbol(f"C{n}") for n in live))
    nodal[0, len(live) - 1] += delta * gm
    wanted = sympy.cancel(sympy.expand(nodal.det(method="berkowitz")) / sympy.expand(delta) ** (len(live) - 1))
    rest = {"T mutual": M, "T leakage": L1 * L2 - M**2}
    a, b = (
        sum(
            value * s**power * sympy.Mul(*(rest.get(n, sympy.Symbol(n)) for n in names))
            for power, row in enumerate(terms)
            for value, names in row
        )
        for terms in (made.terms_a, made.terms_b)
    )
    ours = sympy.expand(a + gm * b)
    quotient = sympy.cancel(sympy.expand(wanted) / ours)
    assert quotient.free_symbols <= {s}  # common powers of s are taken out
    assert quotient == s ** sympy.degree(quotient, s)


def _tables():
    for name, choices in CHOICES.items():
        for number, (options, values) in enumerate(choices()):
            if name != "colpitts" or number % 9 == 0:
                yield pytest.param(name, options, values, id=f"{name}-{number}")


TABLES = list(_tables())


@pytest.mark.parametrize(
    ("name", "options", "values"), [case for case in TABLES if not case.id.startswith("wien_bridge")]
)
def test_no_coefficient_subtracts(name, options, values):
    """Sums over spanning trees (Kirchhoff 1847): no term is subtracted, so no digits cancel (op-amp rows aside)."""
    circuit = registry.build(name, options, values)
    made = network(circuit.branches, circuit.gain_symbol)
    assert all(v > 0 for terms in (made.terms_a, made.terms_b) for row in terms for v, _ in row)


@pytest.mark.parametrize(("name", "options", "values"), TABLES)
def test_coefficients_equal_an_80_digit_determinant(name, options, values):
    """Both sides are the same polynomial up to one factor. 1e-13: a few hundred roundings of 1.1e-16 at most."""
    circuit = registry.build(name, options, values)
    roles = {r.name: np.array([values.get(r.name, r.default)]) for r in circuit.roles}
    symbols = {k: float(np.ravel(v)[0]) for k, v in circuit.derive(roles, 25.0, frozenset()).symbols.items()}
    made = network(circuit.branches, circuit.gain_symbol)
    a, b = made.coefficients([symbols[n] for n in made.symbols])
    unit = Unit(from_branches(circuit.branches, symbols, circuit.gain_symbol), w0=1.0, r0=1.0)
    with mpmath.workdps(DIGITS):
        factor = unit.a[-1] / mpmath.mpf(float(a[-1]))
        for ours, theirs in ((a, unit.a), (b, unit.b)):
            assert len(theirs) <= len(ours)
            for k, value in enumerate(ours):
                wanted = theirs[k] / factor if k < len(theirs) else mpmath.mpf(0)
                assert abs(mpmath.mpf(float(value)) - wanted) <= 1e-13 * abs(wanted)


def test_scalar_coefficients_equal_vectors_bit_for_bit():
    circuit = registry.build("colpitts", *list(CHOICES["colpitts"]())[10])
    made = network(circuit.branches, circuit.gain_symbol)
    rng = np.random.default_rng(0)
    table = {n: rng.uniform(0.5, 2, 50) for n in made.symbols}
    a, b = made.coefficients([table[n] for n in made.symbols])
    for row in (0, 17, 49):
        one_a, one_b = made.coefficients([float(table[n][row]) for n in made.symbols])
        assert [c[row] for c in (*a, *b)] == [*one_a, *one_b]


HOSTILE = "__import__('os').system('touch /tmp/reached')"


def test_a_hostile_symbol_name_is_only_a_name(tmp_path):
    target = tmp_path / "reached"
    hostile = f"v[0]); __import__('pathlib').Path({str(target)!r}).touch("
    rename = {"C1": hostile, "R": "__class__", "L": 'x"\n\\', "C2": "0*"}
    rows = tuple(Branch(HOSTILE, r.kind, r.nodes, tuple(rename.get(n, n) for n in r.symbols)) for r in FET_COLPITTS)
    plain, named = network(FET_COLPITTS, "gm"), network(rows, "gm")
    values = {"L": 2.0, "C1": 3.0, "C2": 5.0, "R": 7.0, "gm": 1.0}
    back = {v: k for k, v in rename.items()}
    want = plain.coefficients([values[n] for n in plain.symbols])
    got = named.coefficients([values[back.get(n, n)] for n in named.symbols])
    assert got == want
    assert not target.exists()


def test_hostile_node_names_change_nothing():
    nodes = {"d": HOSTILE, "g": "gnd ", "gnd": "gnd"}
    rows = tuple(Branch(r.name, r.kind, tuple(nodes[n] for n in r.nodes), r.symbols) for r in FET_COLPITTS)
    assert expand(rows, "gm") == expand(FET_COLPITTS, "gm")


def test_generated_code_sees_no_builtins_and_only_positions(monkeypatch):
    seen = []
    real = compile
    monkeypatch.setattr(
        "yieldosc.circuits.compiled.compile", lambda text, *rest: seen.append(text) or real(text, *rest), raising=False
    )
    network.cache_clear()
    rows = tuple(Branch(r.name, r.kind, r.nodes, tuple(f"{n};evil" for n in r.symbols)) for r in FET_COLPITTS)
    made = network(rows, "gm;evil")
    assert len(seen) == 1
    assert set(seen[0]) <= set("lambda v:()[], .+*-0123456789")
    assert made.coefficients.__globals__["__builtins__"] == {}


def refusal(rows, gain="gm"):
    with pytest.raises(NetworkError) as caught:
        expand(tuple(rows), gain)
    return str(caught.value)


def test_an_unconnected_node_is_refused():
    rows = (*FET_COLPITTS, Branch("R9", "R", ("far", "away"), ("R9",)))
    assert refusal(rows) == ("the branch table has no determinant: a node is not connected, or a loop has no impedance")


def test_a_gain_element_without_effect_is_refused():
    rows = (*FET_COLPITTS[:4], Branch("gm", "transconductance", ("d", "gnd", "gnd", "gnd"), ("gm",), True))
    assert refusal(rows) == "the gain element gm has no effect: no loop goes through it"


def test_a_gain_that_enters_twice_is_refused():
    rows = (*FET_COLPITTS, Branch("again", "transconductance", ("g", "gnd", "d", "gnd"), ("gm",)))
    assert refusal(rows) == "the determinant is not linear in the gain element gm"


def test_too_many_nodes_are_refused():
    chain = ["d", *(f"n{k}" for k in range(MOST_NODES))]
    rows = [*FET_COLPITTS, *(Branch(f"R{k}", "R", chain[k : k + 2], (f"R{k}",)) for k in range(MOST_NODES))]
    rows = [Branch(r.name, r.kind, tuple(r.nodes), r.symbols) for r in rows]
    assert refusal(rows) == "the branch table has 14 nodes beside ground; at most 12 are accepted"


def test_too_many_terms_are_refused():
    """Ten nodes joined each to each have 11^9 spanning trees (Cayley): far beyond the limit, and refused early."""
    names = [f"n{k}" for k in range(10)]
    rows = [Branch(f"R{i}{j}", "R", (names[i], names[j]), (f"R{i}{j}",)) for i in range(10) for j in range(i + 1, 10)]
    rows += [Branch(f"C{i}", "C", (names[i], "gnd"), (f"C{i}",)) for i in range(10)]
    rows.append(Branch("gm", "transconductance", ("n0", "gnd", "n5", "gnd"), ("gm",), True))
    assert refusal(rows) == (
        "the branch table expands to more than 20,000 terms; leave out branches that do not matter at the oscillation "
        "frequency, or merge series and parallel parts"
    )


def test_a_table_just_inside_the_limit_is_expanded():
    """Number of terms by Kirchhoff: the determinant of the Laplacian counts a resistor mesh's spanning trees."""
    names = [f"n{k}" for k in range(5)]
    pairs = [(i, j) for i in range(5) for j in range(i + 1, 5)]
    rows = [Branch(f"G{i}{j}", "conductance", (names[i], names[j]), (f"G{i}{j}",)) for i, j in pairs]
    rows += [Branch(f"C{i}", "C", (names[i], "gnd"), (f"C{i}",)) for i in range(5)]
    rows.append(Branch("gm", "transconductance", ("n0", "gnd", "n4", "gnd"), ("gm",), True))
    a, _ = expand(tuple(rows), "gm")
    assert sum(a.values()) == round(np.linalg.det(6 * np.eye(5) - np.ones((5, 5)))) == 6**4


def test_the_compiled_table_is_cached():
    assert module.network(FET_COLPITTS, "gm") is module.network(FET_COLPITTS, "gm")
