"""From a plan to its forecast."""
