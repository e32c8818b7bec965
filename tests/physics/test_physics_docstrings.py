"""Every public function of the physics says what it takes, in which unit, from which source, with an example."""

import doctest
import importlib
import inspect
import pkgutil
import re

import pytest

import drc_power.physics
from drc_power.physics.units import UNIT_OF_SUFFIX, unit_of

MODULES = [
    importlib.import_module(f"drc_power.physics.{found.name}")
    for found in pkgutil.iter_modules(drc_power.physics.__path__)
]
FUNCTIONS = [
    function
    for module in MODULES
    for name, function in inspect.getmembers(module, inspect.isfunction)
    if function.__module__ == module.__name__ and not name.startswith("_")
]
NOT_NUMBERS = {"text", "word", "flag", "record", "any"}
"""In place of a unit: words, switches, records of this room, numbers whose unit the caller chooses (tables alone)."""


def name_of(function):
    return f"{function.__module__.removeprefix('drc_power.physics.')}.{function.__name__}"


ENTRY = re.compile(r"^(?P<names>[a-z]\w*(?:, [a-z]\w*)*): (?P<text>.*(?:\n    .*)*)", re.MULTILINE)
"""`v_in_v, v_out_v: voltages [V], shape (corner,)`, carried on by indented lines."""


def units_by_parameter(function):
    """{parameter: the bracketed units of its entry}."""
    entries = ENTRY.finditer(inspect.getdoc(function) or "")
    return {
        name: set(re.findall(r"\[([^\]\s]+)\]", entry["text"]))
        for entry in entries
        for name in entry["names"].split(", ")
    }


@pytest.mark.parametrize("module", MODULES, ids=lambda module: module.__name__)
def test_examples_run(module):
    assert module.__doc__, f"{module.__name__} does not say what it is for"
    failed, _ = doctest.testmod(module)
    assert not failed


@pytest.mark.parametrize("function", FUNCTIONS, ids=name_of)
def test_has_source_example_and_result(function):
    text = inspect.getdoc(function) or ""
    assert "Source:" in text, "no line `Source: ...`"
    assert ">>> " in text, "no runnable example"
    returns = re.search(r"^(Returns|Raises)\b", text, re.MULTILINE)
    assert returns, "no line `Returns ...` or `Raises ...`"


@pytest.mark.parametrize("function", FUNCTIONS, ids=name_of)
def test_every_parameter_carries_its_unit(function):
    documented = units_by_parameter(function)
    for name in inspect.signature(function).parameters:
        assert name in documented, f"{name} is not documented"
        units, unit = documented[name], unit_of(name)
        if unit:
            assert units == {unit}, f"{name} is said in {units}, its name says {unit}"
        else:
            assert units and units <= {"-"} | NOT_NUMBERS | set(UNIT_OF_SUFFIX.values()), (
                f"{name}: no unit, not even [-]"
            )
            assert units & ({"-"} | NOT_NUMBERS) or len(units) > 1, f"{name} has a unit but not in its name"


@pytest.mark.parametrize("function", FUNCTIONS, ids=name_of)
def test_the_result_carries_its_unit(function):
    text = inspect.getdoc(function)
    returns = re.search(r"^Returns (?:.|\n(?!\n|[A-Z]))*", text, re.MULTILINE)
    if returns is None:
        return
    units = set(re.findall(r"\[([^\]\s]+)\]", returns.group()))
    assert units, "the result has no unit, not even [-]"
    if unit_of(function.__name__):
        assert unit_of(function.__name__) in units


def test_units_are_only_left_to_the_caller_in_tables():
    loose = {name_of(function) for function in FUNCTIONS if "[any]" in function.__doc__}
    assert {name.split(".")[0] for name in loose} <= {"tables", "range"}


def test_no_suffix_hides_another():
    """The longest suffix wins, so `_k_per_w` is never read as watts."""
    for suffix, unit in UNIT_OF_SUFFIX.items():
        assert unit_of(f"quantity{suffix}") == unit
