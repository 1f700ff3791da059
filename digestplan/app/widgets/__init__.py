"""Widgets: they draw and take keys, and know no forecast code."""
