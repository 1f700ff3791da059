"""The house keeps its order: sizes, imports, types, names."""

import ast
import re
import statistics
import subprocess
import sys
from pathlib import Path

from tests import house

ROOT = house.ROOT
MACHINE_PATHS = re.compile(r"(?<![\w.~-])/(?:work|tmp|root|home)/\w")
TEXT = {".py", ".toml", ".md", ".txt", ".csv", ".json", ""}


def tracked() -> list[Path]:
    """Files that belong to the project."""
    listed = subprocess.run(
        ["git", "ls-files"], cwd=ROOT, capture_output=True, text=True, check=False
    )
    if listed.returncode != 0:
        return [p for p in ROOT.rglob("*") if p.is_file() and ".git" not in p.parts]
    return [ROOT / name for name in listed.stdout.splitlines()]


def test_no_file_is_longer_than_four_hundred_lines():
    """Every file of the package fits in 400 lines."""
    assert {name: n for name, n in house.file_lengths().items() if n > 400} == {}


def test_functions_fit_a_screen():
    """No body is over 60 lines, nine in ten are under 30, the median is at most 10."""
    measured = list(house.functions())
    bodies = sorted(f.lines for f in measured)

    assert [f for f in measured if f.lines > 60] == []
    assert bodies[len(bodies) * 9 // 10] < 30
    assert statistics.median(bodies) <= 10


def test_public_functions_are_typed():
    """Every public function says what it takes and gives."""
    assert [f.where for f in house.functions() if f.public and not f.typed] == []


def test_every_test_says_what_must_hold():
    """Every test has a docstring of a sentence."""
    silent = []
    for path in (ROOT / "tests").rglob("test_*.py"):
        for node in ast.walk(ast.parse(path.read_text("utf-8"))):
            is_test = isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef)
            if is_test and node.name.startswith("test_") and not ast.get_docstring(node):
                silent.append(f"{path.name}:{node.lineno} {node.name}")
    assert silent == []


def test_imports_run_one_way():
    """The rooms import as the architecture draws them."""
    command = "from importlinter.cli import lint_imports; raise SystemExit(lint_imports())"
    done = subprocess.run(
        [sys.executable, "-c", command], cwd=ROOT, capture_output=True, text=True, check=False
    )

    assert done.returncode == 0, done.stdout + done.stderr


def test_no_path_of_a_machine_is_in_the_project():
    """No file names a folder of the machine it was written on."""
    found = [
        f"{path.relative_to(ROOT)}: {match[0]}"
        for path in tracked()
        if path.suffix in TEXT and path.is_file() and path.name != "test_house.py"
        for match in [MACHINE_PATHS.search(path.read_text("utf-8", errors="replace"))]
        if match
    ]

    assert found == []


def test_nothing_else_at_the_top():
    """The top level holds what the project says it holds, and nothing else."""
    top = {path.relative_to(ROOT).parts[0] for path in tracked()}
    allowed = {
        *("README.md", "DEVELOPERS.md", "LICENSE", "pyproject.toml"),
        *("digestplan", "tests", "presets_demo", "docs"),
    }

    assert {name for name in top if not name.startswith(".")} <= allowed
