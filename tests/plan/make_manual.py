"""Rewrite the tables of keys in docs/plan-file.md: `python tests/plan/make_manual.py`."""

import re
from pathlib import Path

from digestplan.plan.fields import SECTIONS, Field
from digestplan.quantities import KINDS

MANUAL = Path(__file__).parents[2] / "docs" / "plan-file.md"
_TABLE = re.compile(r"(<!-- keys: (?P<section>[\w.]*) -->\n).*?(<!-- end -->)", re.DOTALL)
_KINDS = {
    "text": "text",
    "texts": "list of texts",
    "choice": "one of the words below",
    "flag": "`true` or `false`",
    "moment": "date with time",
    "whole": "whole number",
    "times": "list of times",
    "temperatures": "list of temperatures",
    "table": "section",
    "tables": "list of tables",
    "programme": "temperature programme",
}


def kind_of(field):
    """What kind of value a key takes, in words."""
    if field.choices:
        return " · ".join(f"`{word}`" for word in field.choices)
    if field.kind in _KINDS:
        return _KINDS[field.kind]
    return re.sub(r"^an? ", "", KINDS[field.kind].words)


def row_of(field: Field) -> str:
    """One key as a row of its table."""
    example = f"`{field.example}`".replace("|", "\\|") if field.example else ""
    default = "**required**" if field.required else f"`{field.default}`" if field.default else ""
    return f"| `{field.name}` | {field.note} | {kind_of(field)} | {example} | {default} |"


def table_of(section: str) -> str:
    """The table of a section's keys."""
    head = "| key | what it means | kind | such as | left out |\n| --- | --- | --- | --- | --- |"
    return "\n".join([head, *(row_of(field) for field in SECTIONS[section])])


def rewritten(manual: str) -> str:
    """The manual with its tables as the table of keys has them now."""
    return _TABLE.sub(lambda m: f"{m[1]}{table_of(m['section'])}\n{m[3]}", manual)


if __name__ == "__main__":
    MANUAL.write_text(rewritten(MANUAL.read_text(encoding="utf-8")), encoding="utf-8")
