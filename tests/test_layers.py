"""The layers of the package: who may import whom, read from the source, late imports too."""

from __future__ import annotations

import ast
import subprocess
import sys
from functools import cache
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parent.parent / "acsolve"

BASE = ("source", "errors", "codes", "memory", "shown")
DOOR = ("__init__", "door", "draft", "drive", "given", "over", "path", "two_port")

#: Layer -> layers that it may import, besides its own.
MAY_IMPORT: dict[str, frozenset[str]] = {
    "base": frozenset(),
    "algebra": frozenset({"base"}),
    "circuit": frozenset({"ports", "base"}),
    "ports": frozenset({"base"}),
    "text": frozenset({"circuit", "base"}),
    "equations": frozenset({"ports", "circuit", "algebra", "base"}),
    "analyses": frozenset({"ports", "equations", "algebra", "circuit", "base"}),
    "report": frozenset({"ports", "analyses", "equations", "circuit", "algebra", "base"}),
    "door": frozenset({"ports", "text", "report", "analyses", "equations", "circuit", "base"}),
    "cli": frozenset({"door", "report"}),
    "main": frozenset({"cli"}),
}

#: Third-party library -> the layers or modules that are its home; numpy is at home everywhere.
HOMES: dict[str, tuple[str, ...]] = {
    "lark": ("text",),
    "flint": ("algebra", "equations", "analyses"),
    "scipy": ("algebra", "analyses"),
    "networkx": ("circuit",),
    "matplotlib": ("report",),
    "jinja2": ("report",),
    "markupsafe": ("report",),
    "sympy": ("acsolve.analyses.sympy_edge",),
    "typer": ("cli", "report"),
    "click": ("cli", "report"),
    "rich": ("cli", "report"),
    "numpy": tuple(MAY_IMPORT),
}

#: What the report takes from the equations: spelling, evaluation, states; no solving.
SPELLING = (
    "acsolve.equations.evaluate",
    "acsolve.equations.result",
    "acsolve.equations.naming",
    "acsolve.equations.write",
    "acsolve.equations.grouping",
)


def layer(module: str) -> str:
    """The layer of a module of the package."""
    name = module.removeprefix("acsolve").lstrip(".").split(".")[0] or "__init__"
    if name in BASE:
        return "base"
    if name in DOOR:
        return "door"
    return "main" if name == "__main__" else name


@cache
def sources() -> dict[str, ast.Module]:
    """The syntax tree of every module of the package."""
    found = {}
    for path in sorted(PACKAGE.rglob("*.py")):
        parts = path.relative_to(PACKAGE.parent).with_suffix("").parts
        name = ".".join(part for part in parts if part != "__init__")
        found[name] = ast.parse(path.read_text(encoding="utf-8"))
    return found


def imported(tree: ast.AST) -> set[str]:
    """The modules that a tree imports, anywhere in it."""
    found = set()
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found |= {alias.name for alias in node.names}
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "relative imports hide the layer"
            assert node.module is not None
            inner = {f"{node.module}.{alias.name}" for alias in node.names} & sources().keys()
            found |= inner or {node.module}
    return found


def at_once(tree: ast.Module) -> set[str]:
    """The modules that are imported while the module itself is: no late ones, none for types."""
    found = set()
    for node in tree.body:
        if isinstance(node, ast.Import | ast.ImportFrom) or (
            isinstance(node, ast.If | ast.Try) and "TYPE_CHECKING" not in ast.dump(node)
        ):
            found |= imported(node)
    return found


def is_ours(module: str) -> bool:
    """Whether a module belongs to the package."""
    return module.split(".", maxsplit=1)[0] == "acsolve"


@pytest.mark.parametrize("name", sorted(MAY_IMPORT))
def test_a_layer_imports_only_what_its_row_allows(name):
    """No module of a layer imports from a layer that its row of the table does not name."""
    wrong = [
        f"{module} imports {other}"
        for module, tree in sources().items()
        if layer(module) == name
        for other in imported(tree)
        if is_ours(other) and layer(other) not in MAY_IMPORT[name] | {name}
    ]
    assert wrong == []


def test_the_command_line_uses_the_door_alone():
    """The command line imports `acsolve` and `acsolve.report`: the door is complete."""
    wrong = [
        f"{module} imports {other}"
        for module, tree in sources().items()
        if layer(module) == "cli"
        for other in imported(tree)
        if layer(other) == "door" and other != "acsolve"
    ]
    assert wrong == []


def test_reports_solve_nothing():
    """A report spells names, evaluates finished forms and reads states; it solves nothing."""
    wrong = [
        f"{module} imports {other}"
        for module, tree in sources().items()
        if layer(module) == "report"
        for other in imported(tree)
        if layer(other) == "equations" and other not in SPELLING
    ]
    assert wrong == []


def test_base_imports_the_standard_library_alone():
    """Sources, diagnostics and codes need nothing that must be installed."""
    for module, tree in sources().items():
        if layer(module) == "base":
            outside = {other.split(".")[0] for other in imported(tree) if not is_ours(other)}
            assert outside <= sys.stdlib_module_names, module


def test_no_cycles():
    """Modules import each other in one direction; what is needed at once has an order."""
    graph = {
        module: {other for other in at_once(tree) if is_ours(other)} - {module}
        for module, tree in sources().items()
    }
    try:
        tuple(TopologicalSorter(graph).static_order())
    except CycleError as cycle:
        pytest.fail(f"a cycle of imports: {' -> '.join(cycle.args[1])}")


def test_every_library_has_one_home():
    """Each third-party library is imported from its home alone, and every one has a home."""
    wrong = []
    for module, tree in sources().items():
        for other in imported(tree):
            library = other.split(".")[0]
            if library == "acsolve" or library in sys.stdlib_module_names:
                continue
            homes = HOMES.get(library, ())
            if layer(module) not in homes and module not in homes:
                wrong.append(f"{module} imports {library}")
    assert wrong == []


def test_importing_the_package_is_cheap():
    """`import acsolve` in a fresh interpreter loads no third-party library at all."""
    watched = [*HOMES, "sympy", "mpmath", "numpy"]
    code = (
        f"import sys, acsolve; print(' '.join(name for name in {watched!r} if name in sys.modules))"
    )
    shown = subprocess.run(  # noqa: S603 - our own interpreter and text
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=PACKAGE.parent
    )
    assert shown.stdout.strip() == ""


def test_the_program_starts_without_symbolic_and_plotting_libraries():
    """Showing the command line's help loads none of the slow libraries."""
    code = (
        "import sys\n"
        "sys.argv = ['acsolve', '--help']\n"
        "from acsolve.cli.run import run\n"
        "run(['--help'])\n"
        "slow = ('sympy', 'scipy', 'matplotlib', 'networkx')\n"
        "print('LOADED', *(name for name in slow if name in sys.modules))\n"
    )
    shown = subprocess.run(  # noqa: S603 - our own interpreter and text
        [sys.executable, "-c", code], capture_output=True, text=True, check=True, cwd=PACKAGE.parent
    )
    assert shown.stdout.strip().splitlines()[-1] == "LOADED"
