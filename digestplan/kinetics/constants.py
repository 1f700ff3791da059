"""Constants of nature, as fixed by the SI of 2019."""

GAS_CONSTANT = 8.31446261815324  # [J/(mol K)] exact: product of the two below
BOLTZMANN = 1.380649e-23  # [J/K] exact
AVOGADRO = 6.02214076e23  # [1/mol] exact
PLANCK = 6.62607015e-34  # [J s] exact
ZERO_CELSIUS = 273.15  # [K] exact
