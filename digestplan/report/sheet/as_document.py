"""A sheet as the JSON document that scripts read."""

from typing import Any

from digestplan.report.as_json import FORMAT, clock, number
from digestplan.report.sheet.model import Facts, Sheet


def sheet_document(sheet: Sheet, written: str | None) -> dict[str, Any]:
    """
    Return a sheet as a document of plain values.

    Parameters
    ----------
    sheet
        The sheet.
    written
        The file that was written, or None.

    Returns
    -------
    document
        Amounts, actions, cautions and assumptions as they stand on the sheet; steps count from 0.
    """
    return {
        "digestplan": FORMAT,
        "title": sheet.title,
        "file": written,
        "amounts": [
            {"step": a.step, "what": a.what, "amount": a.amount, "how": a.how}
            for a in sheet.amounts
        ],
        "actions": [
            {
                "step": a.step,
                "do": a.do,
                "at": clock(a.at),
                "until": clock(a.until),
                "hours": number(a.hours),
                "text": a.text,
                "see": a.see,
                "by_itself": a.by_itself,
                "attended": a.attended,
            }
            for a in sheet.actions
        ],
        "cautions": [
            {"level": c.level, "where": c.where, "code": c.code, "text": c.text}
            for c in sheet.cautions
        ],
        "assumptions": [
            {"from": source, "values": values}
            for section in sheet.sections
            for block in section.blocks
            if isinstance(block, Facts) and block.small
            for source, values in block.rows
        ],
    }
