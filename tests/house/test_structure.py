"""The house's own rules, held by tests."""

import ast
import pickle
import subprocess
import sys
from pathlib import Path

import pytest

import filmfit
from filmfit.errors import (
    Faults,
    FilmfitError,
    MaterialError,
    RecordsError,
    RunFileError,
    SpectrumError,
    UsageError,
)

PACKAGE = Path(filmfit.__file__).parent
FILES = sorted(PACKAGE.rglob("*.py"))
HOMES = {
    "lmfit": ("fit/",),
    "matplotlib": ("report/figures.py", "report/rate_figures.py"),
    "tmm": ("optics/by_tmm.py",),
    "sqlalchemy": ("records/",),
    "alembic": ("records/",),
    "click": ("cli/",),
    "rich": ("cli/", "report/text.py"),
    "pydantic": ("runfile/", "result.py"),
    "pydantic_core": ("runfile/",),
    "tree_sitter": ("runfile/lines.py",),
    "tree_sitter_toml": ("runfile/lines.py",),
    "charset_normalizer": ("spectra/text.py",),
    "threadpoolctl": ("jobs/",),
}
LONGEST_FILE = 300
LONGEST_BODY = 40  # lines without signature and docstring


def tree(path):
    return ast.parse(path.read_text(encoding="utf-8"))


def name(path):
    return path.relative_to(PACKAGE).as_posix()


def imports(path):
    for node in ast.walk(tree(path)):
        if isinstance(node, ast.Import):
            yield from (one.name for one in node.names)
        elif isinstance(node, ast.ImportFrom) and node.module:
            yield node.module


def test_floors_hold(checkout):
    told = subprocess.run(
        [Path(sys.executable).with_name("lint-imports")], cwd=checkout, capture_output=True, text=True, check=False
    )
    assert told.returncode == 0, told.stdout


@pytest.mark.parametrize("package", HOMES)
def test_one_home_for_each_package(package):
    assert any(module.split(".")[0] == package for path in FILES for module in imports(path)), "the row is out of date"
    strangers = [name(path) for path in FILES for module in imports(path)
                 if module.split(".")[0] == package and not name(path).startswith(HOMES[package])]  # fmt: skip
    assert strangers == []


@pytest.mark.parametrize("path", FILES, ids=name)
def test_file(path):
    source = path.read_text(encoding="utf-8")
    parsed = tree(path)
    assert len(source.splitlines()) <= LONGEST_FILE
    assert path.name != "utils.py"
    if path.name != "__init__.py":
        assert ast.get_docstring(parsed), "a module says what it knows"
    for node in ast.walk(parsed):
        if isinstance(node, ast.ImportFrom):
            assert all(one.name != "*" for one in node.names)
        if isinstance(node, ast.FunctionDef):
            body = node.body[1:] if ast.get_docstring(node) else node.body
            lines = node.end_lineno - body[0].lineno + 1 if body else 0
            assert lines <= LONGEST_BODY or "migrations" in path.parts, node.name
        if isinstance(node, ast.Call) and getattr(node.func, "id", "") == "print":
            assert name(path).startswith(("cli/", "report/"))


def test_the_front_door_is_narrow_and_lazy():
    assert len(filmfit.__all__) <= 12
    assert sorted(filmfit.__all__) == filmfit.__all__
    for one in filmfit.__all__:
        assert getattr(filmfit, one) is not None
    with pytest.raises(AttributeError):
        filmfit.nothing_like_this  # noqa: B018 - the access is the test
    code = "import sys, filmfit; print(sorted({'numpy', 'scipy', 'pydantic', 'click'} & set(sys.modules)))"
    told = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert told.stdout.strip() == "[]"


@pytest.mark.parametrize("path", FILES, ids=name)
def test_every_public_function_says_what_it_does(path):
    public = (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef)
    silent = []
    parsed = tree(path)
    classes = [node for node in parsed.body if isinstance(node, ast.ClassDef) and not node.name.startswith("_")]
    for owner in [parsed, *classes]:
        silent += [node.name for node in owner.body
                   if isinstance(node, public) and not node.name.startswith("_") and not ast.get_docstring(node)]  # fmt: skip
    assert silent == []


def test_top_level(checkout):
    told = subprocess.run(["git", "ls-files"], cwd=checkout, capture_output=True, text=True, check=False)
    if told.returncode:
        pytest.skip("not a git checkout")
    top = {line.split("/")[0] for line in told.stdout.split() if not line.startswith(".")}
    assert top <= {"README.md", "DEVELOPERS.md", "pyproject.toml", "filmfit", "materials", "tests", "examples"}


@pytest.mark.parametrize("kind", [FilmfitError, UsageError, RunFileError, SpectrumError, MaterialError, RecordsError])
def test_errors_survive_pickling(kind):
    error = pickle.loads(pickle.dumps(kind("a.toml:3: run.id", "''", "a name", "write one")))
    assert str(error) == "a.toml:3: run.id: ''; allowed: a name; write one"
    assert error.as_dict() == {"where": "a.toml:3: run.id", "found": "''", "allowed": "a name", "do": "write one"}
    several = pickle.loads(pickle.dumps(Faults([error, error])))
    assert str(several).splitlines() == [str(error)] * 2
