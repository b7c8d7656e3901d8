"""The house stands: imports run down the floors, and nowhere in a circle."""

from __future__ import annotations

import ast
from graphlib import TopologicalSorter
from pathlib import Path

import pytest

ROOT = Path(__file__).parents[1] / "search"
FLOORS = ("foundation", "trial", "designs", "efficiency", "solvers", "runs", "field", "cli")
PROOF_MAY_USE = {"foundation", "trial", "proof"}


def module_of(path: Path) -> str:
    """Dotted name of a source file."""
    parts = path.relative_to(ROOT.parent).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


MODULES = {module_of(path): path for path in ROOT.rglob("*.py")}


def imports(path: Path) -> set[str]:
    """Every module of the package that a file imports: at its top, in functions, and for types alone."""
    found: set[str] = set()
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: relative import"
            module = node.module or ""
            found |= {f"{module}.{alias.name}" for alias in node.names}
            found.add(module)
    return {name for name in found if name in MODULES and name != module_of(path)}


GRAPH = {name: imports(path) for name, path in MODULES.items()}


def floor(module: str) -> str:
    """The floor of a module; the package itself is the roof for Python."""
    parts = module.split(".")
    return parts[1] if len(parts) > 1 else "roof"


@pytest.mark.parametrize("module", sorted(GRAPH))
def test_imports_go_down(module: str) -> None:
    """A file imports its own floor and lower ones; the checker imports trial and foundation alone."""
    here = floor(module)
    for other in GRAPH[module]:
        there = floor(other)
        if there == "roof" and other == "search":
            continue  # `from search import x` names the package on the way to a floor
        if here == "proof":
            assert there in PROOF_MAY_USE, f"{module} imports {other}"
        elif here in ("cli", "roof", "api"):
            assert there != "roof"
        else:
            assert there in FLOORS, f"{module} imports {other}"
            assert FLOORS.index(there) <= FLOORS.index(here), f"{module} imports {other}"


def test_solvers_never_ask_for_a_bound() -> None:
    """The search is handed a target: it cannot see how that was found."""
    for module, others in GRAPH.items():
        if floor(module) == "solvers":
            assert not any(other.startswith("search.efficiency.bounds") for other in others), module


def test_no_circle() -> None:
    """The files can be put in an order in which each imports only earlier ones."""
    graph = {
        name: {other for other in others if not name.startswith(f"{other}.")} - {"search"}
        for name, others in GRAPH.items()
    }
    order = list(TopologicalSorter(graph).static_order())
    assert len(order) >= len(graph) - 1


def test_every_floor_says_what_it_answers() -> None:
    """Every package and every file opens with a sentence."""
    for path in MODULES.values():
        assert ast.get_docstring(ast.parse(path.read_text(encoding="utf-8"))), path
