"""Plan the enzymatic digestion of small, irreplaceable pieces of tissue."""

__version__ = "0.1.0"
