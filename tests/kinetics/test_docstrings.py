"""Docstrings of the formulas are read: arguments in order, units, references."""

import importlib
import inspect
import pkgutil
import re

import numpydoc.docscrape as numpydoc
import pytest

import digestplan.kinetics

UNIT = re.compile(r"\[[^\]\s][^\]]*\]\.?$")


def public_functions():
    for info in pkgutil.iter_modules(digestplan.kinetics.__path__):
        module = importlib.import_module(f"digestplan.kinetics.{info.name}")
        for name, function in inspect.getmembers(module, inspect.isfunction):
            if function.__module__ == module.__name__ and not name.startswith("_"):
                yield pytest.param(function, id=f"{info.name}.{name}")


@pytest.mark.parametrize("function", list(public_functions()))
def test_docstring_names_every_argument_with_its_unit(function):
    """Every argument stands in order and ends with its unit; results too; a source is given."""
    doc = numpydoc.FunctionDoc(inspect.unwrap(function))
    documented = [name for p in doc["Parameters"] for name in p.name.split(", ")]

    assert documented == list(inspect.signature(function).parameters)
    for entry in [*doc["Parameters"], *doc["Returns"]]:
        assert UNIT.search(" ".join(entry.desc).strip()), f"{entry.name}: no [unit] at its end"
    assert doc["Returns"]
    assert doc["References"]
