"""The import direction: alerts → samples → fleet, config above all, and pure modules that know nothing outside them."""

import ast
from collections.abc import Iterator
from pathlib import Path

import pytest

ROOT = Path(__file__).resolve().parent.parent
# Each app may import itself and what stands to its right.
APPS = ("alerts", "samples", "fleet")
PURE = (
    "fleet/codes.py",
    "fleet/figures.py",
    "fleet/mass_balance.py",
    "fleet/wording.py",
    "samples/demo/mill.py",
    "samples/demo/plan.py",
    "samples/demo/simulator.py",
    "samples/demo/stories.py",
    "samples/figures.py",
    "samples/lines.py",
    "samples/newest_bottle.py",
    "samples/sample_codes.py",
    "samples/problems.py",
    "samples/readings.py",
    "samples/coding",
    "samples/trends",
    "samples/checks",
    "samples/intake",
    "alerts/advice.py",
    "alerts/rules.py",
    "alerts/sentences.py",
)
OUTSIDE = {
    *("django", "celery", "psycopg", "redis", "requests", "environs", "plotly"),
    *("os", "pathlib", "shutil", "subprocess", "socket", "tempfile", "time", "random", "threading", "logging"),
}
CLOCK_CALLS = {"now", "today", "utcnow", "localdate", "localtime", "time_ns", "monotonic", "open", "print", "input"}


def imported(tree: ast.AST) -> Iterator[tuple[int, str]]:
    """Every imported module with its line; a relative import begins with a dot."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from ((node.lineno, name.name) for name in node.names)
        elif isinstance(node, ast.ImportFrom):
            yield node.lineno, "." * node.level + (node.module or "")


def called(tree: ast.AST) -> Iterator[tuple[int, str]]:
    """Every call by the last part of its name: `datetime.now()` is `now`."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Call):
            function = node.func
            if isinstance(function, ast.Attribute):
                yield node.lineno, function.attr
            elif isinstance(function, ast.Name):
                yield node.lineno, function.id


def direction_faults(path: str, source: str) -> list[str]:
    app = path.partition("/")[0]
    allowed = APPS[APPS.index(app) :]
    faults = []
    for line, module in imported(ast.parse(source)):
        top = module.partition(".")[0]
        if not top:
            faults.append(f"{path}:{line} relative import")
        elif top in {"config", "tests"} or (top in APPS and top not in allowed):
            faults.append(f"{path}:{line} {app} imports {module}")
    return faults


def purity_faults(path: str, source: str) -> list[str]:
    tree = ast.parse(source)
    pure_names = tuple(name.removesuffix(".py").replace("/", ".") for name in PURE)
    faults = []
    for line, module in imported(tree):
        top = module.partition(".")[0]
        inside = any(f"{module}.".startswith(f"{name}.") for name in pure_names)
        if top in OUTSIDE or (top in APPS and not inside):
            faults.append(f"{path}:{line} pure module imports {module}")
    calls = [f"{path}:{line} pure module calls {name}()" for line, name in called(tree) if name in CLOCK_CALLS]
    return faults + calls


def python_files(place: str) -> list[str]:
    start = ROOT / place
    found = [start] if start.is_file() else sorted(start.rglob("*.py"))
    return [str(path.relative_to(ROOT)) for path in found]


@pytest.mark.parametrize("path", [path for app in APPS for path in python_files(app)])
def test_imports_point_one_way(path: str) -> None:
    assert direction_faults(path, (ROOT / path).read_text()) == []


@pytest.mark.parametrize("path", [path for place in PURE for path in python_files(place)])
def test_pure_modules_know_nothing_outside_them(path: str) -> None:
    assert purity_faults(path, (ROOT / path).read_text()) == []


@pytest.mark.parametrize("path", python_files("config/stack"))
def test_the_stack_starts_without_django(path: str) -> None:
    modules = {module.partition(".")[0] for _, module in imported(ast.parse((ROOT / path).read_text()))}
    assert not modules & {"django", "celery", *APPS}


@pytest.mark.parametrize(
    ("path", "source"),
    [
        ("fleet/models.py", "from samples.models import Sample"),
        ("fleet/views.py", "def view():\n    import alerts.models"),
        ("samples/tasks.py", "from alerts import evaluation"),
        ("alerts/mail.py", "from config import settings"),
        ("alerts/mail.py", "from . import rules"),
        ("samples/results.py", "from tests.builders import sample"),
    ],
)
def test_a_wrong_direction_is_noticed(path: str, source: str) -> None:
    assert len(direction_faults(path, source)) == 1


@pytest.mark.parametrize(
    "source",
    [
        "from django.db import models",
        "import os.path",
        "from time import sleep",
        "from samples.models import Sample",
        "from datetime import datetime\nage = datetime.now() - drawn",
        "def read(name):\n    return open(name)",
    ],
)
def test_an_impure_module_is_noticed(source: str) -> None:
    assert len(purity_faults("samples/trends/level.py", source)) == 1


def test_what_is_allowed_passes() -> None:
    assert direction_faults("alerts/mail.py", "from samples.models import Sample\nfrom fleet.models import Site") == []
    assert (
        purity_faults("samples/trends/level.py", "import numpy as np\nfrom samples.coding import iso4406\nimport math")
        == []
    )
