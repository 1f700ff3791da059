"""The bench sheet and its calendar: one neutral model of a forecast, and a writer a form."""
