"""Imports run one way: what a folder may know of the others is written down here and nowhere else."""

import ast
from pathlib import Path

import pytest

import yieldosc

ROOT = Path(yieldosc.__file__).parent
OUTSIDE = {  # third-party packages that a layer may use
    "circuits": {"numpy"},
    "solver": {"numpy"},
    "parts": {"numpy", "scipy"},
    "population": {"numpy", "scipy"},
    "settle": {"numpy"},
    "studies": {"numpy", "scipy", "SALib"},
    "sheets": {"python_calamine", "openpyxl", "numpy"},
    "reports": {"numpy", "rich", "openpyxl"},
    "cli": {"rich"},
}
INSIDE = {  # parts of the package that a layer may import from; itself is always allowed
    "errors": set(),
    "quantities": set(),
    "circuits": set(),
    "parts": {"quantities"},
    "solver": {"circuits"},
    "settle": {"circuits", "solver"},
    "evaluators": {"circuits", "solver", "settle"},
    "study": {"errors", "parts", "circuits"},
    "population": {"errors", "parts", "circuits", "solver", "settle", "study"},
    "unit": {"errors", "circuits", "solver", "settle", "evaluators", "study", "parts", "population"},
    "studies": {"errors", "parts", "circuits", "solver", "settle", "evaluators", "study", "population", "quantities"},
    "sheets": {"errors", "quantities", "parts", "circuits", "study"},
    "reports": {
        "errors", "quantities", "parts", "circuits", "solver", "study", "studies", "sheets", "unit", "population",
    },
    "api": {"errors", "circuits", "sheets", "studies", "reports", "study", "unit"},
    "cli": {
        "errors", "quantities", "parts", "circuits", "study", "studies", "sheets", "reports", "unit",
    },
}  # fmt: skip


def layer(path: Path) -> str:
    relative = path.relative_to(ROOT)
    return relative.parts[0] if len(relative.parts) > 1 else relative.stem


def imported(path: Path) -> set[str]:
    """Dotted names of every import of a file, those inside functions included."""
    names = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            names |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.module and node.level == 0:
            names.add(node.module)
    return names


MODULES = sorted(p for p in ROOT.rglob("*.py") if layer(p) not in ("__init__", "__main__"))


@pytest.mark.parametrize("path", MODULES, ids=lambda p: str(p.relative_to(ROOT)))
def test_imports_stay_inside_their_layer(path: Path) -> None:
    own = layer(path)
    assert own in INSIDE, f"{own} has no place in the order of imports"
    for name in imported(path):
        parts = name.split(".")
        if parts[0] == "yieldosc":
            target = parts[1] if len(parts) > 1 else "__init__"
            assert target == own or target in INSIDE[own], f"{own} imports {name}"
        elif own in OUTSIDE and parts[0] in set().union(*OUTSIDE.values()) | {"pandas"}:
            assert parts[0] in OUTSIDE[own], f"{own} imports {name}"


def test_only_sensitivity_knows_salib() -> None:
    users = {p.name for p in MODULES if any(n.split(".")[0] == "SALib" for n in imported(p))}
    assert users == {"sensitivity.py"}


def test_library_code_never_prints_or_exits() -> None:
    for path in MODULES:
        if layer(path) in ("cli", "reports"):
            continue
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Name):
                assert node.func.id not in ("print", "exit", "quit"), f"{path.name} line {node.lineno}"


def test_no_module_is_longer_than_400_lines() -> None:
    assert {p.name: n for p in MODULES if (n := len(p.read_text(encoding="utf-8").splitlines())) > 400} == {}
