"""Words, tables and pages made from a finished forecast."""
