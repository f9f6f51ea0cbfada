"""The rules of the source itself: who imports what, sizes, docstrings that run, and calls that may not be made."""

from __future__ import annotations

import ast
import doctest
import importlib
import re
import statistics
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[1]
PACKAGE = ROOT / "gaitlab"
MODULES = sorted(PACKAGE.rglob("*.py"))
TESTS = sorted((ROOT / "tests").rglob("*.py"))

# What each layer may import of gaitlab; a name stands for itself and everything below it.
MAY_IMPORT = {
    "errors": [],
    "record_json": ["errors"],
    "robot": ["errors"],
    "air": ["errors", "robot"],
    "wiring": ["errors", "robot"],
    "ring": ["errors", "robot", "air", "wiring", "body.bellows"],
    "body": ["errors", "robot", "wiring", "ring.waves", "gait.records"],
    "gait": ["errors", "robot", "wiring", "ring", "body", "record_json"],
    "search": ["errors", "robot", "air", "wiring", "ring", "body", "gait", "record_json", "trust"],
    "trust": ["errors", "robot", "air", "wiring", "ring", "body", "gait", "record_json", "search"],
    "report": [
        "errors",
        "robot",
        "wiring",
        "ring.waves",
        "ring.sequence",
        "ring.tubing",
        "air.gas",
        "air.supply",
        "trust.speed",
        "trust.summary",
        "trust.sensitivity",
        "gait.records",
        "gait.trace_file",
        "record_json",
    ],
    "cli": [""],
}
# Libraries that one place only may know: library → modules (prefixes below gaitlab/).
ONLY_IN = {
    "pybullet": ("body.bullet",),
    "mujoco": ("body.mujoco",),
    "matplotlib": ("report.",),
    "PIL": ("report.",),
    "click": ("cli.",),
    "distributed": ("search.",),
    "dask": ("search.",),
    "jinja2": ("report.",),
}
EXTRAS = ("mujoco", "distributed", "dask", "jinja2")
# pybullet calls that touch no world; every other one takes physicsClientId.
WORLDLESS = {
    "connect", "getAPIVersion", "isNumpyEnabled", "getQuaternionFromEuler", "getEulerFromQuaternion", "getMatrixFromQuaternion",
    "multiplyTransforms", "invertTransform", "rotateVector", "getAxisAngleFromQuaternion", "getDifferenceQuaternion",
}  # fmt: skip


def name_of(path: Path) -> str:
    """Dotted name below gaitlab, e.g. ``body.bullet``."""
    parts = path.relative_to(PACKAGE).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def tree_of(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"))


def imports(tree: ast.AST) -> Iterator[str]:
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            yield node.module or ""
            yield from (f"{node.module}.{alias.name}" for alias in node.names)


class _WithoutTypes(ast.NodeTransformer):
    """Takes away what only a type checker reads."""

    def visit_If(self, node: ast.If) -> ast.AST | None:
        return None if isinstance(node.test, ast.Name) and node.test.id == "TYPE_CHECKING" else self.generic_visit(node)


def imports_at_run(path: Path) -> Iterator[str]:
    return imports(_WithoutTypes().visit(tree_of(path)))


def functions(tree: ast.AST) -> Iterator[ast.FunctionDef]:
    return (node for node in ast.walk(tree) if isinstance(node, ast.FunctionDef))


def length(node: ast.FunctionDef) -> int:
    """Lines of the body, its docstring not counted."""
    body = node.body[1:] if ast.get_docstring(node) and len(node.body) > 1 else node.body
    return (body[-1].end_lineno or 0) - body[0].lineno + 1


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_layers_import_only_what_lies_before_them(path: Path) -> None:
    layer = name_of(path).split(".")[0]
    if layer in ("", "__main__"):
        return
    allowed = [f"gaitlab.{name}".rstrip(".") for name in (layer, "__version__", *MAY_IMPORT[layer])]
    wrong = [
        name
        for name in imports(tree_of(path))
        if name.startswith("gaitlab.") and not any(name == a or name.startswith((a + ".", a + "_")) for a in allowed)
    ]
    assert not wrong


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_the_command_line_is_imported_by_nobody(path: Path) -> None:
    if name_of(path).split(".")[0] not in ("cli", "__main__"):
        assert not [name for name in imports(tree_of(path)) if name.startswith("gaitlab.cli")]


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_libraries_stay_in_their_place(path: Path) -> None:
    where = name_of(path)
    for name in imports_at_run(path):
        places = ONLY_IN.get(name.split(".")[0])
        assert places is None or where.startswith(places), f"{where} imports {name}"


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_extras_are_imported_inside_functions(path: Path) -> None:
    for node in tree_of(path).body:
        if isinstance(node, ast.Import | ast.ImportFrom):
            assert not [name for name in imports(node) if name.split(".")[0] in EXTRAS]


def test_help_and_check_start_without_engines_and_plots() -> None:
    code = "import sys, gaitlab.cli.main, gaitlab.cli.check_command; print(*sys.modules)"
    loaded = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout.split()
    assert not {"pybullet", "mujoco", "matplotlib", "distributed", "jinja2"} & set(loaded)


@pytest.mark.parametrize("path", [p for p in MODULES if name_of(p).startswith("body.bullet")], ids=name_of)
def test_every_pybullet_call_names_its_client(path: Path) -> None:
    tree = tree_of(path)
    aliases = {
        alias.asname or alias.name
        for node in ast.walk(tree)
        if isinstance(node, ast.Import)
        for alias in node.names
        if alias.name == "pybullet"
    }
    assert not [name for name in imports(tree) if name.startswith("pybullet.")], "import pybullet as a module"
    for node in ast.walk(tree):
        if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute):
            owner = node.func.value
            if isinstance(owner, ast.Name) and owner.id in aliases and node.func.attr not in WORLDLESS:
                keywords = {keyword.arg for keyword in node.keywords}
                assert "physicsClientId" in keywords, f"{path.name}:{node.lineno} {node.func.attr}"


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_robot_files_and_runs_are_data_never_code(path: Path) -> None:
    """No pickle, eval, exec, shell or compile of anything that a file could hold."""
    tree = tree_of(path)
    assert not {"pickle", "marshal", "shelve", "dill", "cloudpickle"} & {n.split(".")[0] for n in imports(tree)}
    for node in ast.walk(tree):
        if isinstance(node, ast.Call):
            called = node.func.id if isinstance(node.func, ast.Name) else ""
            assert called not in ("eval", "exec", "compile", "__import__"), f"{path.name}:{node.lineno}"
            for keyword in node.keywords:
                value = keyword.value.value if isinstance(keyword.value, ast.Constant) else None
                assert (keyword.arg, value) not in (("shell", True), ("allow_pickle", True)), (
                    f"{path.name}:{node.lineno}"
                )


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_public_things_have_docstrings(path: Path) -> None:
    tree = tree_of(path)
    if path.name != "__init__.py":
        assert ast.get_docstring(tree), "module docstring"
    public = [n for n in tree.body if isinstance(n, ast.FunctionDef | ast.ClassDef) and not n.name.startswith("_")]
    for node in list(public):
        if isinstance(node, ast.ClassDef):
            public += [m for m in node.body if isinstance(m, ast.FunctionDef) and not m.name.startswith("_")]
    bare = [node.name for node in public if not ast.get_docstring(node)]
    assert not bare


WITH_EXAMPLES = [path for path in MODULES if ">>>" in path.read_text(encoding="utf-8")]


@pytest.mark.parametrize("path", WITH_EXAMPLES, ids=name_of)
def test_examples_in_docstrings_run(path: Path) -> None:
    result = doctest.testmod(importlib.import_module(f"gaitlab.{name_of(path)}"))
    assert result.attempted > 0
    assert result.failed == 0


@pytest.mark.parametrize("path", MODULES, ids=name_of)
def test_modules_and_functions_stay_small(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= 400
    long = [f"{f.name}: {length(f)}" for f in functions(tree_of(path)) if length(f) > 60]
    assert not long


def test_most_functions_are_short() -> None:
    lengths = sorted(length(f) for path in MODULES for f in functions(tree_of(path)))
    assert statistics.median(lengths) <= 10
    assert lengths[int(0.9 * len(lengths))] < 35


@pytest.mark.parametrize("path", [*MODULES, *TESTS], ids=lambda p: str(p.relative_to(ROOT)))
def test_nothing_is_left_undone_or_left_out(path: Path) -> None:
    # Words are put together here so that this file does not find itself.
    words = ["TO" + "DO", "FIX" + "ME", "XX" + "X", "Not" + "ImplementedError", "place" + "holder"]
    words += [
        "pytest." + name
        for name in ("sk" + "ip", "importor" + "skip", "x" + "fail", "mark.sk" + "ip", "mark.x" + "fail")
    ]
    found = [word for word in words if re.search(rf"\b{re.escape(word)}", path.read_text(encoding="utf-8"))]
    assert not found


@pytest.mark.parametrize("path", TESTS, ids=lambda p: str(p.relative_to(ROOT)))
def test_tests_do_not_assert_wall_clock_times(path: Path) -> None:
    if "benchmarks" in path.parts or path.name == "test_rules.py":
        return
    for node in ast.walk(tree_of(path)):
        if isinstance(node, ast.Assert):
            text = ast.unparse(node)
            assert "perf_counter" not in text and "wall_s <" not in text and "monotonic()" not in text
