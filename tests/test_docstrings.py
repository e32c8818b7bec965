"""The examples in docstrings run, in every module of the package."""

from __future__ import annotations

import doctest
import importlib
import pkgutil

import pytest

import drc_power

MODULES = [m.name for m in pkgutil.walk_packages(drc_power.__path__, "drc_power.") if not m.name.endswith("__main__")]


@pytest.mark.parametrize("name", MODULES)
def test_examples_run(name):
    found = doctest.testmod(importlib.import_module(name))
    assert found.failed == 0
