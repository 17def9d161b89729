"""What DEVELOPERS.md promises of the source: layers, engines, sizes, the tree of errors."""

from __future__ import annotations

import ast
import importlib
import pkgutil
import re
import subprocess
import sys
from functools import cache
from pathlib import Path

import networkx as nx
import pytest

import contactlogic
from contactlogic import errors

ROOT = Path(contactlogic.__file__).parent

LAYERS = (
    {"truth", "errors", "child", "integer", "naming", "algebra", "workbook"},
    {"formula", "job", "network", "design", "terminals"},
    {"check", "minimize", "ladder", "search", "sequence", "hazard", "fault", "commission"},
    {"synthesis"},
    {"sequenced", "sequencer", "hazardfree", "failoff", "repair", "trace"},
    {"purchase"},
    {"draw", "report"},
    {"page"},
    {"cli"},
    {"__main__"},
)
"""Units from the bottom up; a unit may import its own layer and those below."""

HEIGHT = {name: height for height, layer in enumerate(LAYERS) for name in layer}

SYNTHESISERS = {"minimize", "ladder", "search", "sequence", "synthesis"}

ENGINES = (
    "biodivine_aeon",
    "pysat",
    "ortools.linear_solver",
    "ortools.constraint_solver",  # its routing
    "ortools.math_opt",  # the modelling layer over several solvers
    "pyeda",
    "dd",
    "graphviz",
    "jinja2",
    "lark",
    "markdown_it",
    "matplotlib",
    "openpyxl",
    "xlsxwriter",
    "quantiphy",
    "rkm_codes",
)
"""Third-party engines; each is met in one module, so that it can be exchanged there."""

HEAVY = {
    *(engine.split(".")[0] for engine in ENGINES),
    *("networkx", "numpy", "pandas", "pydantic", "rich", "sympy", "typer"),
}
"""What takes long to load; only functions that need it import it."""

TEXT_EVALUATORS = {"eval", "exec", "__import__", "sympify", "parse_expr", "literal_eval"}


def name_of(path: Path) -> str:
    """Dotted name below the package: `job.model`, `check` for its __init__.py, "" for the root."""
    parts = path.relative_to(ROOT).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


SOURCES = {name_of(path): path for path in sorted(ROOT.rglob("*.py"))}
MODULES = sorted(SOURCES)
LIBRARY = [name for name in MODULES if name.split(".")[0] not in {"cli", "__main__"}]


@cache
def tree_of(module: str) -> ast.Module:
    return ast.parse(SOURCES[module].read_text(encoding="utf-8"))


def imports(module: str) -> list[tuple[str, str]]:
    """(module, name) for every import anywhere in the file; name is "" for a plain import."""
    package = module if SOURCES[module].name == "__init__.py" else module.rpartition(".")[0]
    here = ["contactlogic", *(package.split(".") if package else [])]
    found = []
    for node in ast.walk(tree_of(module)):
        if isinstance(node, ast.Import):
            found += [(alias.name, "") for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            base = here[: len(here) - node.level + 1] if node.level else []
            source = ".".join([*base, *([node.module] if node.module else [])])
            found += [(source, alias.name) for alias in node.names]
    return found


def unit(module: str) -> str:
    return module.split(".")[0]


def units_used(module: str) -> set[str]:
    """Units of contactlogic that a module imports; "" for the public names at the root."""
    used = set()
    for source, name in imports(module):
        if source == "contactlogic":
            used.add(name if name in HEIGHT else "")
        elif source.startswith("contactlogic."):
            used.add(source.split(".")[1])
    return used


def third_party(module: str) -> set[str]:
    return {source.split(".")[0] for source, _ in imports(module)}


def calls(module: str) -> list[str]:
    """Dotted names of everything called: `print`, `sys.exit`."""
    return [
        ast.unparse(node.func)
        for node in ast.walk(tree_of(module))
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Name | ast.Attribute)
    ]


def test_the_sources_are_found():
    assert {"", "truth", "errors", "check.prove", "job.model"} <= set(MODULES)


@pytest.mark.parametrize("module", [name for name in MODULES if name])
def test_imports_go_one_way(module):
    own = unit(module)
    assert own in HEIGHT, f"{own} stands in no layer"
    used = units_used(module)
    if own not in {"cli", "__main__"}:
        assert "" not in used, "only the command line may use the public names at the root"
    upward = {other for other in used - {""} if HEIGHT[other] > HEIGHT[own]}
    assert not upward, f"{module} imports upward"


def test_units_do_not_import_each_other_in_a_circle():
    graph = nx.DiGraph()
    for module in MODULES:
        if module:
            graph.add_edges_from(
                (unit(module), other) for other in units_used(module) - {unit(module), ""}
            )
    assert list(nx.simple_cycles(graph)) == []


def test_the_proof_shares_no_code_with_what_it_proves():
    for module in MODULES:
        if unit(module) == "check":
            assert units_used(module) <= {
                "check", "truth", "errors", "network", "design", "terminals", "job"
            }  # fmt: skip
            names = {name for source, name in imports(module) if source == "contactlogic.network"}
            assert names <= {"Network", "Pole", "PoleCount", "Contact"}
            assert "contactlogic.network" not in {s for s, name in imports(module) if not name}
            assert "contactlogic" not in {source for source, _ in imports(module)}
        elif unit(module) in SYNTHESISERS - {"synthesis"}:
            assert "check" not in units_used(module)


@pytest.mark.parametrize("engine", ENGINES)
def test_each_engine_is_met_in_one_module(engine):
    met = {
        module
        for module in MODULES
        for source, name in imports(module)
        if f"{source}.{name}.".startswith(f"{engine}.")
    }
    assert len(met) <= 1


def test_only_the_renderer_and_the_guarded_child_start_processes():
    starters = [m for m in MODULES if {"subprocess", "multiprocessing"} & third_party(m)]
    assert set(starters) <= {"draw.render", "child"}


def test_the_command_line_alone_uses_its_parser():
    assert {unit(module) for module in MODULES if "typer" in third_party(module)} <= {"cli"}


@pytest.mark.parametrize("module", MODULES)
def test_modules_are_short_and_say_what_they_do(module):
    assert len(SOURCES[module].read_text(encoding="utf-8").splitlines()) <= 420
    assert ast.get_docstring(tree_of(module))


@pytest.mark.parametrize("module", MODULES)
def test_nothing_evaluates_text(module):
    called = calls(module)
    assert not [name for name in called if name.split(".")[-1] in TEXT_EVALUATORS]
    assert not {"compile", "builtins.compile"} & set(called)  # re.compile is another thing
    assert not {name for _, name in imports(module)} & TEXT_EVALUATORS
    loaders = {"pickle", "marshal", "shelve", "code", "runpy"}
    if (
        module == "child"
    ):  # pickles pass between the caller and a child it has started, nowhere else
        loaders -= {"pickle"}
    assert not third_party(module) & loaders


@pytest.mark.parametrize("module", LIBRARY)
def test_the_library_is_silent_and_never_exits(module):
    barred = {
        "print", "input", "exit", "quit", "SystemExit", "sys.exit", "os._exit", "os.abort",
        "sys.stdout.write", "sys.stderr.write", "logging.basicConfig", "breakpoint",
    }  # fmt: skip
    if module == "child":  # the child process ends so, past the clean-up of the engine it ran
        barred -= {"os._exit"}
    if module == "search.catalogue_build":  # a command of its own that tells how far it is
        barred -= {"print"}
    assert not barred & set(calls(module))
    raised = [
        ast.unparse(node.exc)
        for node in ast.walk(tree_of(module))
        if isinstance(node, ast.Raise) and node.exc is not None
    ]
    assert "SystemExit" not in raised


def drawn_tree(text: str) -> dict[str, str | None]:
    """Parent of each name in a tree drawn with ├── └── │."""
    above: list[str] = []
    parents: dict[str, str | None] = {}
    for line in text.splitlines():
        match = re.fullmatch(r"( *)((?:│   |    )*)((?:├── |└── )?)([A-Z]\w+)(?:  .*)?", line)
        if match and (match[3] or match[4] == "ContactLogicError"):
            depth = 0 if not match[3] else 1 + (len(match[1]) - 4 + len(match[2])) // 4
            above[depth:] = [match[4]]
            parents[match[4]] = above[depth - 1] if depth else None
    return parents


def real_tree() -> dict[str, str | None]:
    for found in pkgutil.walk_packages([str(ROOT)], "contactlogic."):
        if not found.name.endswith("__main__"):
            importlib.import_module(found.name)
    parents: dict[str, str | None] = {"ContactLogicError": None}
    waiting = [errors.ContactLogicError]
    while waiting:
        base = waiting.pop()
        for child in base.__subclasses__():
            parents[child.__name__] = base.__name__
            waiting.append(child)
    return parents


def test_the_tree_of_errors_is_as_drawn():
    assert drawn_tree(errors.__doc__ or "") == real_tree()
    assert real_tree().keys() == set(errors.__all__) - {"Place"}


def loaded_by(statement: str) -> set[str]:
    script = f"import sys\n{statement}\nprint(*sys.modules)"
    run = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    return {name.split(".")[0] for name in run.stdout.split()}


def test_importing_the_package_loads_nothing_heavy():
    assert not loaded_by("import contactlogic") & HEAVY


def test_importing_any_library_module_loads_no_engine():
    names = ", ".join(f"contactlogic.{module}" for module in LIBRARY if module)
    assert not loaded_by(f"import {names}") & HEAVY


@pytest.mark.parametrize("name", contactlogic.__all__)
def test_public_names_stay_what_they_are(name):
    # Loading a module binds its name in the package, over a public name spelt alike.
    script = (
        f"import contactlogic, types\nfirst = contactlogic.{name}\n"
        f"assert first is contactlogic.{name}\nassert not isinstance(first, types.ModuleType)"
    )
    run = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True)
    assert run.returncode == 0, run.stderr


def test_the_type_marker_is_shipped():
    assert (ROOT / "py.typed").is_file()
