"""``digestplan temperatures PLAN --at 4,20,37``."""

import argparse

from digestplan.cli import output
from digestplan.cli.plans import plan_of
from digestplan.cli.progress import Progress


def run(chosen: argparse.Namespace) -> None:
    """Compare a plan at several temperatures, as a table or as its JSON document."""
    from digestplan.forecast.temperatures import DEFAULT, compare

    at = DEFAULT if chosen.at is None else chosen.at
    with Progress("comparing temperatures") as progress:
        result = compare(plan_of(chosen), at, chosen.draws, chosen.seed, progress=progress)
    if chosen.json:
        from digestplan.report.as_json import dumps
        from digestplan.report.temperatures_json import temperatures_document

        output.write(dumps(temperatures_document(result)))
        return
    from digestplan.report.temperatures_text import temperatures_text

    output.write(temperatures_text(result))
