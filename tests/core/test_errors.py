"""One exception tree, drawn where it is defined; messages that say where, what, why and how to put it right."""

from __future__ import annotations

import ast
import re

import pytest

import gainbench.errors as errors
from gainbench.errors import GainbenchError, SheetError, SheetProblem, UnitError
from source_tree import modules

TREE = [one for one in vars(errors).values() if isinstance(one, type) and issubclass(one, Exception)]


def test_the_drawing_shows_the_tree_that_is():
    drawn = re.findall(r"^ {4}\+-- (\w+) {2,}\S", errors.__doc__ or "", flags=re.MULTILINE)
    assert sorted(drawn) == sorted(one.__name__ for one in TREE if one is not GainbenchError)
    assert "\n    GainbenchError\n" in (errors.__doc__ or "")


@pytest.mark.parametrize("error", TREE, ids=lambda one: one.__name__)
def test_every_error_has_one_root_and_says_what_it_is(error):
    assert issubclass(error, GainbenchError)
    assert error is GainbenchError or error.__base__ is GainbenchError
    assert error.__doc__


def test_every_error_is_raised_somewhere():
    raised = {
        node.exc.func.id
        for module in modules()
        for node in ast.walk(module.tree)
        if isinstance(node, ast.Raise) and isinstance(node.exc, ast.Call) and isinstance(node.exc.func, ast.Name)
    }
    assert {one.__name__ for one in TREE if one is not GainbenchError} <= raised


def test_a_unit_error_ends_with_an_example():
    error = UnitError("the unit is missing", example="0.6 ohm")
    assert str(error) == 'the unit is missing (for example "0.6 ohm")'
    assert (error.reason, error.example) == ("the unit is missing", "0.6 ohm")
    assert str(UnitError("the unit is missing")) == "the unit is missing"


def test_a_problem_names_path_value_reason_and_example():
    problem = SheetProblem(path="machine.resistance", value='"-1 ohm"', reason="must be above 0", example='"0.6 ohm"')
    assert str(problem) == 'machine.resistance = "-1 ohm": must be above 0 (for example "0.6 ohm")'
    assert str(SheetProblem(path="machine.kind", value="", reason="is missing")) == "machine.kind: is missing"


def test_a_sheet_error_carries_its_problems():
    problem = SheetProblem(path="title", value="", reason="is missing")
    assert SheetError("one.bench.toml: title: is missing", problems=(problem,)).problems == (problem,)
    assert SheetError("one.bench.toml: no such file").problems == ()
