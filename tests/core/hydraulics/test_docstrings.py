"""Every public number of the hydraulics says its unit, and the docstring names the arguments that exist."""

from __future__ import annotations

import importlib
import inspect
import pkgutil
import re

import pytest

import core.hydraulics

# names whose values are not dimensional numbers
NO_NUMBER = {"stage", "parameters", "fluid", "name", "index", "stages", "measures"}


def _found():
    for module in pkgutil.iter_modules(core.hydraulics.__path__, "core.hydraulics."):
        loaded = importlib.import_module(module.name)
        for name, thing in vars(loaded).items():
            thing = inspect.unwrap(thing) if callable(thing) else thing
            if inspect.isfunction(thing) and thing.__module__ == module.name and not name.startswith("_"):
                yield pytest.param(thing, id=f"{module.name}.{name}")


PUBLIC = list(_found())


def _documented(text: str) -> dict[str, str]:
    """Return parameter names and what is said about each, from the numpydoc section."""
    section = re.search(r"Parameters\n-+\n(.*?)(?:\n\n[A-Z][a-z]+\n-+|\Z)", text, re.DOTALL)
    found: dict[str, str] = {}
    if section:
        for names, body in re.findall(r"^(\w[\w, ]*) : .*\n((?:    .*\n?)+)", section.group(1) + "\n", re.MULTILINE):
            found.update({name.strip(): body for name in names.split(",")})
    return found


@pytest.mark.parametrize("function", PUBLIC)
def test_parameters_match_and_carry_units(function):
    documented = _documented(inspect.getdoc(function) or "")
    names = list(inspect.signature(function).parameters)
    assert list(documented) == names
    for name in set(names) - NO_NUMBER:
        if name.startswith(("is_", "has_")):
            continue  # true or false
        assert re.search(r"\[[^\]]+\]", documented[name]), f"{name} has no unit in brackets"


@pytest.mark.parametrize("function", PUBLIC)
def test_returns_are_documented(function):
    assert re.search(r"^Returns\n-------\n", inspect.getdoc(function) or "", re.MULTILINE)
