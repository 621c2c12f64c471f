"""The shape of the code: which room knows which, and how long things may grow."""

import ast
import os
import shutil
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).parents[1]
TEXTS = {
    path: path.read_text(encoding="utf-8")
    for room in ("core", "gui")
    for path in sorted((ROOT / room).rglob("*.py"))
}
LONGEST_FILE = 600
LONGEST_FUNCTION = 60
MOST_PUBLIC_METHODS = 20

IMPORT_ALL_OF_CORE = """
import importlib, pkgutil, sys

class NoWindows:
    def find_spec(self, name, path=None, target=None):
        if name.split(".")[0] in ("PySide6", "shiboken6", "pyqtgraph", "OpenGL", "gui"):
            raise ImportError(f"core must not import {name}")

sys.meta_path.insert(0, NoWindows())
import core
found = [module.name for module in pkgutil.walk_packages(core.__path__, "core.")]
for name in found:
    importlib.import_module(name)
try:
    import gui
except ImportError:
    print(len(found))
"""


def name_of(path):
    return path.relative_to(ROOT).as_posix()


def test_core_imports_no_window():
    found = subprocess.run(
        [sys.executable, "-W", "error", "-c", IMPORT_ALL_OF_CORE], cwd=ROOT,
        capture_output=True, text=True, check=False,
    )  # fmt: skip
    assert found.stderr == ""
    assert found.returncode == 0
    assert int(found.stdout) > 20  # and the finder refused what it has to refuse


def test_every_room_knows_only_the_rooms_below():
    command = shutil.which(
        "lint-imports", path=f"{Path(sys.executable).parent}:{os.environ['PATH']}"
    )
    assert command, "import-linter belongs to the test requirements"
    found = subprocess.run(
        [command, "--no-cache"], cwd=ROOT, capture_output=True, text=True, encoding="utf-8",
        env=os.environ | {"PYTHONIOENCODING": "utf-8"}, check=False,
    )  # fmt: skip
    assert found.returncode == 0, found.stdout
    assert " 0 broken" in found.stdout


def test_no_file_is_too_long():
    lengths = {name_of(path): len(text.splitlines()) for path, text in TEXTS.items()}
    assert {name: n for name, n in lengths.items() if n > LONGEST_FILE} == {}


def nodes(kind):
    """Yield (file:name, node) of all functions or classes."""
    for path, text in TEXTS.items():
        for node in ast.walk(ast.parse(text)):
            if isinstance(node, kind):
                yield f"{name_of(path)}: {node.name}", node


def test_no_function_is_too_long():
    functions = nodes((ast.FunctionDef, ast.AsyncFunctionDef))
    lengths = {name: node.end_lineno - node.lineno + 1 for name, node in functions}
    assert len(lengths) > 500
    assert {name: n for name, n in lengths.items() if n > LONGEST_FUNCTION} == {}


def test_no_class_has_too_many_public_methods():
    counts = {}
    for name, node in nodes(ast.ClassDef):
        methods = [item.name for item in node.body if isinstance(item, ast.FunctionDef)]
        # Names in camelCase are Qt's: what a widget answers to Qt, not what others ask of it.
        counts[name] = sum(m == m.lower() and not m.startswith("_") for m in methods)
    assert len(counts) > 50
    assert {name: n for name, n in counts.items() if n > MOST_PUBLIC_METHODS} == {}


def test_every_module_says_what_it_is():
    silent = [name_of(p) for p, text in TEXTS.items() if not ast.get_docstring(ast.parse(text))]
    assert silent == []


def test_packages_hold_no_code():
    packages = [path for path in TEXTS if path.name == "__init__.py"]
    assert len(packages) > 10
    for path in packages:
        (docstring,) = ast.parse(TEXTS[path]).body
        assert isinstance(docstring, ast.Expr)
