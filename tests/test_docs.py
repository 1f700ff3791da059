"""The documents say what the program does."""

import re
from pathlib import Path

import pytest

from digestplan.cli.main import parser
from digestplan.kinetics.extent import LAWS
from digestplan.library.cautions import cautions
from tests.make_readme import README, fresh

ROOT = Path(__file__).parents[1]
DOCS = ROOT / "docs"


def commands():
    """Names of all commands."""
    (choices,) = (a.choices for a in parser()._actions if isinstance(a.choices, dict))
    return sorted(choices)


def test_the_readme_shows_what_the_commands_print():
    """Each block of the README that begins with a command shows what it prints today."""
    text = README.read_text("utf-8")

    assert "$ digestplan forecast" in text
    assert fresh(text) == text


def test_the_readme_is_short_and_begins_with_the_job():
    """The README has the job in its first paragraph and fewer than a hundred lines."""
    lines = README.read_text("utf-8").splitlines()

    assert len(lines) < 100
    assert "demineralise" in " ".join(lines[1:8])
    assert "python -m pytest" in "\n".join(lines)


@pytest.mark.parametrize("command", commands())
def test_every_command_is_documented(command):
    """Each command stands in docs/commands.md."""
    assert f"`digestplan {command}" in (DOCS / "commands.md").read_text("utf-8")


@pytest.mark.parametrize("law", sorted(LAWS))
def test_every_law_has_its_line_in_the_model(law):
    """Each extent law stands in docs/model.md under the word that a plan uses."""
    assert f"`{law}`" in (DOCS / "model.md").read_text("utf-8")


def test_every_caution_is_documented():
    """Each caution's code stands in docs/cautions.md."""
    text = (DOCS / "cautions.md").read_text("utf-8")

    assert [code for code in cautions() if f"`{code}`" not in text] == []


def test_links_between_documents_lead_somewhere():
    """Relative links of the documents point to files that exist."""
    broken = []
    for path in [README, ROOT / "DEVELOPERS.md", *DOCS.glob("*.md")]:
        targets = re.findall(r"\]\(([^)#:]+)(?:#[^)]*)?\)", path.read_text("utf-8"))
        broken += [f"{path.name}: {t}" for t in targets if not (path.parent / t).exists()]

    assert broken == []
