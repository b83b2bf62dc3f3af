"""What holds for every value of the model: frozen, slotted, named arguments only, a unit or a meaning per field."""

from __future__ import annotations

import ast
import inspect
from dataclasses import FrozenInstanceError, fields, is_dataclass
from itertools import pairwise

import pytest

import gainbench.model as model
import gainbench.results as results
from gainbench.sheetfile import parse_sheet

HOMES = ("gainbench.model.", "gainbench.results")
FOUND = {
    one
    for module in (model, results)
    for one in vars(module).values()
    if isinstance(one, type) and is_dataclass(one) and one.__module__.startswith(HOMES)
}
VALUES = sorted(FOUND, key=lambda one: one.__qualname__)

UNIT_IN_THE_NAME = ("_hz", "_deg", "_db", "_s", "_percent", "_a", "_v", "_j")
PURE = {"peak_sensitivity"}
"""Numbers whose name is a trade term for a pure number."""


def test_the_values_are_found():
    assert {"Sheet", "Machine", "Duty", "Gains", "Finding"} <= {one.__name__ for one in VALUES}


@pytest.mark.parametrize("value", VALUES, ids=lambda one: one.__name__)
def test_frozen_slotted_and_named(value):
    settings = value.__dataclass_params__
    assert settings.frozen
    assert "__slots__" in vars(value)
    assert all(one.kw_only for one in fields(value))


@pytest.mark.parametrize("value", VALUES, ids=lambda one: one.__name__)
def test_every_number_says_its_unit_or_what_it_counts(value):
    body = ast.parse(inspect.getsource(value)).body[0].body
    described = {
        field.target.id
        for field, text in pairwise(body)
        if isinstance(field, ast.AnnAssign) and isinstance(text, ast.Expr) and isinstance(text.value, ast.Constant)
    }
    numbers = {
        one.target.id for one in body if isinstance(one, ast.AnnAssign) and "float" in ast.unparse(one.annotation)
    }
    text = value.__doc__ or ""
    silent = {
        name
        for name in numbers - described - PURE
        if not name.endswith(UNIT_IN_THE_NAME) and f"{name} [" not in text and f"``{name}``" not in text
    }
    assert not silent


def test_a_sheet_cannot_be_changed_and_equals_its_like(demo_texts):
    for name, text in demo_texts.items():
        sheet, again = (parse_sheet(text, name).sheet for _ in range(2))
        assert sheet == again
        assert hash(sheet) == hash(again)
        with pytest.raises(FrozenInstanceError):
            sheet.rig.machine.resistance = 0.0
