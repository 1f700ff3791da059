"""What a command loads: nothing that it does not need."""

import subprocess
import sys
from pathlib import Path

import pytest

DEMO = Path(__file__).parents[1] / "presets_demo" / "porpoise-tendon-overnight.toml"
SHOW = """
import sys
from digestplan.cli.main import main
try:
    main({arguments!r})
except SystemExit:
    pass
roots = {{name.split(".")[0] for name in sys.modules}}
print("LOADED", *sorted(roots & {heavy!r}), file=sys.stderr)
print("SUBMODULES", *(n for n in {submodules!r} if n in sys.modules), file=sys.stderr)
"""
HEAVY = {
    "numpy",
    "scipy",
    "pint",
    "pandas",
    "sqlalchemy",
    "textual",
    "rich",
    "reportlab",
    "tomlkit",
}
HEAVY_PARTS = ["scipy.stats", "scipy.optimize", "scipy.integrate"]


def loaded(*arguments):
    """Which heavy modules a command loads, in a fresh interpreter."""
    script = SHOW.format(arguments=list(arguments), heavy=HEAVY, submodules=HEAVY_PARTS)
    done = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True
    )
    lines = [line.split() for line in done.stderr.splitlines()]
    return {
        word for line in lines if line and line[0] in {"LOADED", "SUBMODULES"} for word in line[1:]
    }


@pytest.mark.parametrize("arguments", [["--help"], ["--version"], ["forecast", "--help"]])
def test_help_loads_nothing(arguments):
    """Help and version load none of the heavy modules."""
    assert loaded(*arguments) == set()


def test_a_forecast_loads_only_what_it_computes_with():
    """A forecast loads no table library, database, terminal, PDF or statistics module."""
    assert loaded("forecast", str(DEMO)) == {"numpy", "scipy", "pint"}
