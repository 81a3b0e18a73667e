"""Size ceilings: module 400 lines, class 200, function 50, 6 parameters (self counts)."""

from __future__ import annotations

import ast
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parents[2]
MODULE_LINES, CLASS_LINES, FUNCTION_LINES, PARAMETERS = 400, 200, 50, 6
SOURCES = ("app", "linedata/builders", "sample_spectra")


def _lines(node: ast.AST) -> int:
    return node.end_lineno - node.lineno + 1


def _parameters(node: ast.FunctionDef) -> int:
    given = node.args
    every = [*given.posonlyargs, *given.args, *given.kwonlyargs]
    return len(every) + (given.vararg is not None) + (given.kwarg is not None)


def over_ceiling(path: Path) -> list[str]:
    """What in one module exceeds a ceiling, in words."""
    text = path.read_text(encoding="utf-8")
    found = []
    if len(text.splitlines()) > MODULE_LINES:
        found.append(f"{path.name}: {len(text.splitlines())} lines")
    for node in ast.walk(ast.parse(text)):
        if isinstance(node, ast.ClassDef) and _lines(node) > CLASS_LINES:
            found.append(f"{path.name}: class {node.name} has {_lines(node)} lines")
        if isinstance(node, (ast.FunctionDef, ast.AsyncFunctionDef)):
            if _lines(node) > FUNCTION_LINES:
                found.append(f"{path.name}: {node.name} has {_lines(node)} lines")
            if _parameters(node) > PARAMETERS:
                found.append(f"{path.name}: {node.name} takes {_parameters(node)} parameters")
    return found


def test_every_source_module_is_under_the_ceilings():
    modules = [p for folder in SOURCES for p in sorted((ROOT / folder).rglob("*.py"))]
    assert len(modules) > 20
    assert [line for path in modules for line in over_ceiling(path)] == []


def test_tests_are_under_the_module_ceiling():
    long = [f"{p.name}: {n} lines" for p in sorted((ROOT / "tests").rglob("*.py"))
            if (n := len(p.read_text(encoding="utf-8").splitlines())) > MODULE_LINES]
    assert long == []


@pytest.mark.parametrize(
    ("source", "words"),
    [
        ("x = 1\n" * 401, "401 lines"),
        ("class Big:\n" + "    x = 1\n" * 200, "class Big has 201 lines"),
        ("def long():\n" + "    x = 1\n" * 50, "long has 51 lines"),
        ("def wide(a, b, c, d, e, f, g):\n    pass\n", "wide takes 7 parameters"),
        ("def wide(a, b, *c, d, e, f, **g):\n    pass\n", "wide takes 7 parameters"),
        ("class A:\n    def m(self, a, b, c, d, e, f):\n        pass\n", "m takes 7 parameters"),
    ],
)
def test_the_checker_reports_what_is_over(tmp_path, source, words):
    path = tmp_path / "module.py"
    path.write_text(source, encoding="utf-8")
    assert over_ceiling(path) == [f"module.py: {words}"]


def test_the_checker_accepts_what_is_just_under(tmp_path):
    path = tmp_path / "module.py"
    path.write_text("def wide(a, b, c, d, e, f):\n" + "    x = 1\n" * 49, encoding="utf-8")
    assert over_ceiling(path) == []
