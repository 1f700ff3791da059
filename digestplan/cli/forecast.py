"""``digestplan forecast PLAN``."""

import argparse

from digestplan.cli import output


def run(chosen: argparse.Namespace) -> None:
    """Forecast one plan and write its report, or its JSON document."""
    from digestplan.forecast.run import forecast
    from digestplan.plan.read import read_plan

    result = forecast(read_plan(chosen.plan), chosen.draws, chosen.seed)
    if chosen.json:
        from digestplan.report.as_json import dumps, forecast_document

        output.write(dumps(forecast_document(result)))
        return
    from digestplan.report.text import forecast_text

    output.write(forecast_text(result))
