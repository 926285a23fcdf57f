"""The house rules, read from the source itself: floors, cycles, sizes, documentation."""

from __future__ import annotations

import ast
import re
from collections.abc import Iterator
from pathlib import Path

import networkx as nx
import pytest

ROOT = Path(__file__).parents[1]
FLOORS = ("profiles", "outputs", "fabricate")
MODULES = {
    f"{floor}.{path.stem}": path
    for floor in FLOORS
    for path in sorted((ROOT / floor).glob("*.py"))
    if path.stem != "__init__"
}
LONGEST_MODULE = 400
LETTERS_OF_FORMULAS = re.compile(r"^[A-Za-z]$")


def _imports(tree: ast.AST) -> Iterator[str]:
    """Yield what a module imports from the house, imports inside functions included."""
    for node in ast.walk(tree):
        if isinstance(node, ast.ImportFrom) and node.module and node.module.split(".")[0] in FLOORS:
            names = [f"{node.module}.{alias.name}" for alias in node.names]
            yield from (name if name in MODULES else node.module for name in names)
        elif isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names if alias.name.split(".")[0] in FLOORS)


def _graph(sources: dict[str, str]) -> nx.DiGraph:
    graph = nx.DiGraph()
    graph.add_nodes_from(sources)
    for name, text in sources.items():
        graph.add_edges_from((name, target) for target in _imports(ast.parse(text)) if target != name)
    return graph


def _upward(graph: nx.DiGraph) -> list[tuple[str, str]]:
    floor = {name: FLOORS.index(name.split(".")[0]) for name in graph}
    return [(source, target) for source, target in graph.edges if floor[target] > floor[source]]


SOURCES = {name: path.read_text(encoding="utf-8") for name, path in MODULES.items()}


def test_imports_go_down_only() -> None:
    assert _upward(_graph(SOURCES)) == []


def test_there_is_no_cycle() -> None:
    assert list(nx.simple_cycles(_graph(SOURCES))) == []


def test_an_upward_import_and_a_cycle_would_be_found() -> None:
    upward = SOURCES | {"profiles.face": "from fabricate.job import read_job\n"}
    assert _upward(_graph(upward)) == [("profiles.face", "fabricate.job")]
    circle = SOURCES | {"profiles.errors": "def inside():\n    import profiles.face\n"}
    assert list(nx.simple_cycles(_graph(circle)))


@pytest.mark.parametrize("name", MODULES)
def test_modules_are_short(name: str) -> None:
    assert len(SOURCES[name].splitlines()) <= LONGEST_MODULE


@pytest.mark.parametrize("floor", FLOORS)
def test_a_package_lists_its_modules(floor: str) -> None:
    tree = ast.parse((ROOT / floor / "__init__.py").read_text(encoding="utf-8"))
    listed = next(ast.literal_eval(node.value) for node in tree.body if isinstance(node, ast.Assign))
    assert listed == sorted(name.split(".")[1] for name in MODULES if name.startswith(f"{floor}."))


def _public_functions() -> Iterator[tuple[str, ast.FunctionDef]]:
    for name, text in SOURCES.items():
        for node in ast.parse(text).body:
            inside = node.body if isinstance(node, ast.ClassDef) and not node.name.startswith("_") else [node]
            for function in inside:
                if isinstance(function, ast.FunctionDef) and not function.name.startswith("_"):
                    yield f"{name}.{function.name}", function


def _starred(function: ast.FunctionDef) -> list[ast.arg]:
    return [function.args.vararg] if function.args.vararg else []


PUBLIC = dict(_public_functions())


@pytest.mark.parametrize("name", PUBLIC)
def test_public_functions_are_documented_with_whole_words(name: str) -> None:
    function = PUBLIC[name]
    assert ast.get_docstring(function)
    arguments = [argument.arg for argument in (*function.args.args, *function.args.kwonlyargs)]
    assert not [argument for argument in arguments if LETTERS_OF_FORMULAS.match(argument)]


@pytest.mark.parametrize(
    "name", [name for name, function in PUBLIC.items() if "Parameters\n" in ast.get_docstring(function)]
)
def test_documented_parameters_are_the_parameters(name: str) -> None:
    function = PUBLIC[name]
    text = (ast.get_docstring(function) or "").split("Parameters\n----------\n")[1].split("\n\n")[0]
    documented = [part for line in re.findall(r"^(\w[\w, ]*) :", text, re.MULTILINE) for part in line.split(", ")]
    arguments = [argument.arg for argument in (*function.args.args, *_starred(function), *function.args.kwonlyargs)]
    assert documented == [argument for argument in arguments if argument not in {"self", "cls"}]


def _dataclasses() -> Iterator[tuple[str, ast.Call | ast.Name]]:
    for name, text in SOURCES.items():
        for node in ast.walk(ast.parse(text)):
            if isinstance(node, ast.ClassDef):
                for decorator in node.decorator_list:
                    called = decorator.func if isinstance(decorator, ast.Call) else decorator
                    if isinstance(called, ast.Name) and called.id == "dataclass":
                        yield f"{name}.{node.name}", decorator


def test_every_dataclass_is_frozen() -> None:
    loose = [
        name
        for name, decorator in _dataclasses()
        if not isinstance(decorator, ast.Call)
        or not any(word.arg == "frozen" and word.value.value is True for word in decorator.keywords)
    ]
    assert loose == []


def test_nothing_visible_stands_beside_what_belongs_here() -> None:
    visible = {path.name for path in ROOT.iterdir() if not path.name.startswith((".", "__"))}
    wanted = {"README.md", "DEVELOPERS.md", "pyproject.toml", "LICENSE", "fabricate", "profiles", "outputs", "tests"}
    # The demo package is what the README's first command leaves here.
    assert visible - {"dishwright.egg-info", "build", "dist", "terrace-heater"} <= wanted
