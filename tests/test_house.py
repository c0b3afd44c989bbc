"""The house rules that a machine can hold: arrows, file sizes, what lies at the top, what no file may say."""

import ast
import subprocess
import sys
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
SOURCES = sorted([*ROOT.glob("solver/**/*.py"), *ROOT.glob("app/**/*.py")])
TOP = {"README.md", "DEVELOPERS.md", "pyproject.toml", "app", "solver", "tests", "samples"}
LEAVINGS = {"build", "dist", "htmlcov"}  # what ordinary tools leave behind, never committed


def test_imports_follow_the_arrows() -> None:
    run = subprocess.run(
        [str(Path(sys.executable).with_name("lint-imports")), "--no-cache"],
        cwd=ROOT,
        capture_output=True,
        text=True,
        check=False,
    )
    assert run.returncode == 0, run.stdout


def test_live_knows_no_widgets() -> None:
    for path in ROOT.glob("app/live/*.py"):
        for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
            assert not (isinstance(node, ast.ImportFrom) and node.module == "PySide6.QtWidgets"), path.name


def test_the_top_level_holds_what_it_should() -> None:
    here = {p.name for p in ROOT.iterdir() if not p.name.startswith(".") and p.suffix != ".egg-info"}
    assert here - LEAVINGS == TOP


@pytest.mark.parametrize("path", SOURCES, ids=lambda p: str(p.relative_to(ROOT)))
def test_files_stay_small(path: Path) -> None:
    assert len(path.read_text(encoding="utf-8").splitlines()) <= 400


@pytest.mark.parametrize("path", SOURCES, ids=lambda p: str(p.relative_to(ROOT)))
def test_functions_stay_small(path: Path) -> None:
    for node in ast.walk(ast.parse(path.read_text(encoding="utf-8"))):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            doc = ast.get_docstring(node, clean=False)
            length = (node.end_lineno or 0) - node.lineno + 1 - (len(doc.splitlines()) if doc else 0)
            assert length <= 60, f"{path.name}: {node.name} has {length} lines"


@pytest.mark.parametrize("path", SOURCES, ids=lambda p: str(p.relative_to(ROOT)))
def test_every_public_thing_says_what_it_is(path: Path) -> None:
    tree = ast.parse(path.read_text(encoding="utf-8"))
    if path.name != "__init__.py":
        assert ast.get_docstring(tree), f"{path.name} opens without a sentence"
    for node in tree.body:
        if isinstance(node, ast.FunctionDef | ast.ClassDef) and not node.name.startswith("_"):
            assert ast.get_docstring(node), f"{path.name}: {node.name}"
