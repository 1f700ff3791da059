"""Plan texts that the tests of the forecast vary."""

BASE = """
digestplan = 1
title = "a test"
start = 2026-03-12T17:30:00
visits = ["2026-03-13T08:30 / 2026-03-13T17:00"]
[sample]
wet_mass = "{mass}"
substrate_fraction = "{fraction}"
shape = "slab"
thickness = "{thickness}"
target_extent = {target}
keep_loss_limit = 0.05
keep_selectivity = "{selectivity}"
law = "{law}"
susceptibility = "{susceptibility}"
[lot]
label_activity = "280 CDU/mg"
remaining = "{remaining}"
[enzyme]
reference_temperature = "37 degC"
rate_law = "arrhenius"
activation_energy = "{energy}"
inactivation_rate = "{death}"
inactivation_energy = "230 kJ/mol"
{more}
[[steps]]
do = "digest"
charge = "{charge}"
volume = "3 mL"
lag = "0 min"
{programme}
"""

DEFAULTS = {
    "mass": "180 mg",
    "fraction": "0.30",
    "thickness": "1.5 mm",
    "target": "0.9",
    "selectivity": "60",
    "law": "first_order",
    "susceptibility": "2e-5 g/(CDU h)",
    "remaining": "0.82",
    "energy": "52 kJ/mol",
    "death": "0.03 1/h",
    "more": "",
    "charge": "6 mg",
    "programme": 'temperature = "37 degC"\nfor = "16 h"',
}
SPREAD = {
    "remaining": "0.82 ± 0.06",
    "energy": "52 kJ/mol ± 6 kJ/mol",
    "death": "0.03 1/h x/ 1.6",
    "susceptibility": "2e-5 g/(CDU h) x/ 1.3",
}
DEPTH = 'diffusivity = "3e-11 m**2/s"'


def plan_text(**changes):
    """A plan file with some of its values changed."""
    return BASE.format(**{**DEFAULTS, **changes})
