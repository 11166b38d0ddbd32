"""The way of the data: imports only point up the list of layers, and heavy packages are loaded when they are needed."""

import ast
import subprocess
import sys
from collections.abc import Iterator
from pathlib import Path

import pytest

PACKAGE = Path(__file__).parents[2] / "rooftruss"
LAYERS = [
    "errors", "units", "basis", "shapes", "loads", "analysis", "timber", "design", "shop", "output", "run", "cli"
]  # fmt: skip
HEAVY = {"pandas", "scipy", "openpyxl", "rich"}
MODULES = sorted(path for path in PACKAGE.rglob("*.py"))


def named(path: Path) -> str:
    return path.relative_to(PACKAGE).as_posix()


every = pytest.mark.parametrize("path", MODULES, ids=named)


def layer(path: Path) -> str:
    return path.relative_to(PACKAGE).parts[0].removesuffix(".py")


def imports(tree: ast.AST) -> Iterator[tuple[ast.stmt, str]]:
    """All imports of a syntax tree with the module that each one names."""
    for node in ast.walk(tree):
        if isinstance(node, ast.ImportFrom):
            yield node, "." * node.level + (node.module or "")
        elif isinstance(node, ast.Import):
            yield from ((node, alias.name) for alias in node.names)


def at_import_time(tree: ast.Module) -> Iterator[ast.stmt]:
    """Statements that run when the module is imported; what stands under TYPE_CHECKING does not."""
    waiting: list[ast.stmt] = list(tree.body)
    while waiting:
        node = waiting.pop()
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            continue
        if isinstance(node, ast.If) and "TYPE_CHECKING" in ast.unparse(node.test):
            continue
        yield node
        waiting += [child for child in ast.iter_child_nodes(node) if isinstance(child, ast.stmt)]


def parsed(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"), str(path))


def test_every_module_has_a_layer():
    assert {layer(path) for path in MODULES} - {"__init__", "__main__"} <= set(LAYERS)
    assert len(MODULES) > 20


@every
def test_imports_only_point_up_the_list(path):
    own = layer(path)
    for node, name in imports(parsed(path)):
        assert not name.startswith("."), f"{path.name}:{node.lineno} imports relatively"
        if name == "rooftruss":
            names = [alias.name for alias in node.names]
            assert names == ["__version__"], f"{path.name}:{node.lineno} imports {names}: name the module"
        elif name.startswith("rooftruss.") and own not in ("__init__", "__main__"):
            above = name.split(".")[1]
            assert LAYERS.index(above) <= LAYERS.index(own), f"{path.name}:{node.lineno} imports {name} from {own}"


@every
def test_only_units_imports_pint(path):
    found = [node.lineno for node, name in imports(parsed(path)) if name.split(".")[0] == "pint"]
    assert not found or path == PACKAGE / "units.py", f"{path.name}:{found} imports pint"


@pytest.mark.parametrize("path", [path for path in MODULES if layer(path) != "output"], ids=named)
def test_heavy_packages_wait_until_they_are_used(path):
    """Only output/, which writes data frames and workbooks, may load them with the module."""
    for node in at_import_time(parsed(path)):
        names = [name for _, name in imports(node)] if isinstance(node, ast.Import | ast.ImportFrom) else []
        assert not HEAVY & {name.split(".")[0] for name in names}, f"{path.name}:{node.lineno} loads {names}"


def test_the_stages_run_without_the_heavy_packages():
    """The modules below output, imported in a fresh interpreter, bring none of them in."""
    below = LAYERS[: LAYERS.index("output")]
    names = [
        ".".join(("rooftruss", *path.relative_to(PACKAGE).with_suffix("").parts))
        for path in MODULES
        if layer(path) in below and path.name != "__init__.py"
    ]
    code = f"import sys, importlib\nfor n in {names!r}: importlib.import_module(n)\n"
    code += f"print(sorted(set({sorted(HEAVY | {'pint'})!r}) & sys.modules.keys()))"
    done = subprocess.run(
        [sys.executable, "-c", code], cwd=PACKAGE.parent, capture_output=True, text=True, check=True, timeout=60
    )
    assert done.stdout.strip() == "[]"
