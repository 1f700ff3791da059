"""Writes docs/cautions.md from the table: ``python -m tests.forecast.make_cautions``."""

from pathlib import Path

from digestplan.library.cautions import CautionEntry, cautions, deferral

PAGE = Path(__file__).parents[2] / "docs" / "cautions.md"
HEAD = """# Cautions

Every caution that a forecast can bring, as it stands in the one table,
`digestplan/library/cautions.toml`. This page is written from that table by
`python -m tests.forecast.make_cautions`, and a test holds the two together. Cautions are shown
beside the plan and on every bench sheet, and cannot be switched off. They are the usual ones: no
risk assessment, and no handling instructions.

- **stop**: do not go on before this is settled. **care**: act on it. **note**: know it.
- Those marked *safety* end with this sentence: “{deferral}”
- Words in braces are filled in from the plan.
- *Meets* says which tags of steps bring a caution (`digestplan/forecast/tags.py`): alone, together
  in one step, one later than the other, or in any order. A plain rinse between the two clears it
  only where the line says so.

| level | told | code | text | source |
| --- | --- | --- | --- | --- |
"""


def page():
    """The page, from the table: the most serious first."""
    order = ["stop", "care", "note"]
    rows = sorted(cautions().values(), key=lambda row: order.index(row.level))
    return HEAD.format(deferral=deferral()) + "\n".join(_line(row) for row in rows) + "\n"


def _line(row: CautionEntry):
    text = f"{row.text} *Meets: {_meets(row)}.*" if row.first else row.text
    kind = "*safety*" if row.kind == "safety" else "validity"
    return f"| **{row.level}** | {kind} | `{row.code}` | {text} | {row.source} |"


def _meets(row: CautionEntry):
    first, then = (" or ".join(tags) for tags in (row.first, row.then))
    if not then:
        return first
    how = {
        "later": f"{first}, later {then}",
        "any": f"{first} and {then}, in any order",
        "together": f"{first} together with {then}",
    }[row.order]
    return f"{how}; a plain rinse between clears it" if row.cleared_by_rinse else how


if __name__ == "__main__":
    PAGE.write_text(page(), encoding="utf-8")
