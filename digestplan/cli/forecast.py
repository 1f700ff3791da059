"""``digestplan forecast PLAN``."""

import argparse

from digestplan.cli import output
from digestplan.cli.plans import plan_of


def run(chosen: argparse.Namespace) -> None:
    """Forecast one plan and write its report, or its JSON document."""
    from digestplan.forecast.run import forecast

    result = forecast(plan_of(chosen), chosen.draws, chosen.seed)
    if chosen.json:
        from digestplan.report.as_json import dumps, forecast_document

        output.write(dumps(forecast_document(result)))
        return
    from digestplan.report.text import forecast_text

    output.write(forecast_text(result))
