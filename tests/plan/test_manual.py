"""The manual of the plan file says what the table of keys says."""

import re
import tomllib

import pytest

from digestplan.plan.fields import SECTIONS
from digestplan.plan.read import parse_plan
from tests.plan.make_manual import MANUAL, rewritten

TEXT = MANUAL.read_text(encoding="utf-8")


@pytest.mark.parametrize("section", SECTIONS)
def test_every_section_and_key_is_in_the_manual(section):
    """Each section has its table in the manual, and each key its row."""
    assert f"<!-- keys: {section} -->" in TEXT
    table = TEXT.split(f"<!-- keys: {section} -->")[1].split("<!-- end -->")[0]
    rows = re.findall(r"^\| `(\w+)` \| ", table, re.MULTILINE)
    assert rows == [field.name for field in SECTIONS[section]]


def test_manual_is_as_the_table_of_keys_has_it():
    """Meaning, kind, example and default of every key stand in the manual as in the table."""
    assert rewritten(TEXT) == TEXT


def test_examples_of_the_manual_load():
    """Every whole plan in the manual loads."""
    plans = re.findall(r"```toml\n(.*?)```", TEXT, re.DOTALL)
    whole = [plan for plan in plans if "digestplan = 1" in plan]
    assert len(whole) >= 2
    for plan in whole:
        assert parse_plan(plan, "manual").steps


@pytest.mark.parametrize(
    ("section", "field"),
    [(section, field) for section in SECTIONS for field in SECTIONS[section] if field.example],
    ids=lambda item: getattr(item, "name", item),
)
def test_example_of_a_key_is_toml(section, field):
    """The example of each key is what may stand behind its equals sign."""
    assert tomllib.loads(f"{field.name} = {field.example}")
