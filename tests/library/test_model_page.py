"""The model page has a chapter for every module of formulas."""

from pathlib import Path

import pytest

ROOT = Path(__file__).parents[2]
MODULES = sorted(
    path.stem
    for path in (ROOT / "digestplan" / "kinetics").glob("*.py")
    if path.stem not in {"__init__", "constants"}
)
HEADINGS = {
    line.removeprefix("## ").lower()
    for line in (ROOT / "docs" / "model.md").read_text("utf-8").splitlines()
    if line.startswith("## ")
}


@pytest.mark.parametrize("module", MODULES)
def test_every_module_of_formulas_has_its_chapter(module):
    """One word leads from a formula to its chapter."""
    word = module.replace("_", " ")

    assert word in HEADINGS or f"{word} and extent" in HEADINGS


def test_chapters_stand_once():
    """No chapter is written twice."""
    lines = [
        x for x in (ROOT / "docs" / "model.md").read_text("utf-8").splitlines() if x[:3] == "## "
    ]

    assert len(lines) == len(set(lines)) >= len(MODULES)
