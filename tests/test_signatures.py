"""The public names: a docstring with units, few arguments by place, no open doors."""

from __future__ import annotations

import ast
import re

from source_tree import Function, functions, modules, public_functions

BY_PLACE = 2
"""Arguments that may be given by place."""

MORE_BY_PLACE = {
    "gainbench.units.quantity.format_quantity": "value, unit, dimension: one phrase, as in parse(text, dimension)",
    "gainbench.simulate.response.simulate": "plant, stage, firmware, duty: each of a type of its own, none is a number",
}
"""Functions that take more by place, each with its reason."""

LIBRARY = [one for home in ("core", "resources") for one in public_functions(home) if not one.is_command]
EVERY = [one for module in modules() for one in functions(module)]


def doc(one: Function) -> str:
    return ast.get_docstring(one.node) or ""


def test_the_public_names_are_found():
    found = {one.label for one in LIBRARY}
    for known in ("plant.refer", "units.quantity.parse", "sheetfile.document.parse_sheet", "results.Finding.text"):
        assert f"gainbench.{known}" in found
    assert not [name for name in found if name.startswith("gainbench.sheetfile.entries.Quantity")]


def test_every_module_says_what_it_is_for():
    first_lines = {one.name: (ast.get_docstring(one.tree) or "").partition("\n")[0] for one in modules()}
    assert not [name for name, line in first_lines.items() if not line.endswith((".", ":", ",", "-"))]


def test_every_function_with_a_name_says_what_it_does():
    within = [one for one in EVERY if not one.owner and not one.node.name.startswith("_") and one.module.home != "app"]
    assert not {one.label for one in [*LIBRARY, *within] if len(doc(one).split()) < 2}


def parameters_told(text: str) -> list[str] | None:
    """Names in a docstring's list of parameters, in order; None where it has no list."""
    section = re.search(r"^Parameters\n-{10}\n(.*?)(?=^\w[\w ]*\n-{3,}$|\Z)", text, flags=re.MULTILINE | re.DOTALL)
    if section is None:
        return None
    entries = re.findall(r"^(\S[^:\n]*?) ?:(?= |$)", section.group(1), flags=re.MULTILINE)
    return [name.strip(" *") for line in entries for name in line.split(",")]


def test_the_parameters_told_are_the_parameters_there_are():
    told = {one.label: (parameters_told(doc(one)), [argument.arg for argument in one.arguments]) for one in LIBRARY}
    listed = {label: pair for label, pair in told.items() if pair[0] is not None}
    assert len(listed) > 50
    assert not {label: pair for label, pair in listed.items() if pair[0] != pair[1]}


def numeric(annotation: ast.expr | None) -> bool:
    """Whether it is a number that has a unit, or an array of them."""
    return annotation is not None and re.search(r"\b(float|NDArray|ArrayLike)\b", ast.unparse(annotation)) is not None


def test_where_numbers_go_in_the_docstring_gives_their_unit():
    unit = re.compile(r"\[[^\]]+\]|\b(SI|units?|share|ratio|pure)\b")
    with_numbers = [one for one in LIBRARY if any(numeric(argument.annotation) for argument in one.arguments)]
    assert len(with_numbers) > 10
    assert not [one.label for one in with_numbers if not unit.search(doc(one))]


def test_arguments_after_the_first_two_are_named():
    assert {one.label for one in LIBRARY if len(one.positional) > BY_PLACE} == MORE_BY_PLACE.keys()
    assert all(MORE_BY_PLACE.values())


def test_no_function_takes_just_anything():
    assert not [one.label for one in EVERY if one.node.args.kwarg is not None]


def test_units_are_no_argument_inside_the_library():
    inside = [one for one in LIBRARY if not one.module.name.startswith("gainbench.units")]
    assert not [
        f"{one.label}({argument.arg})"
        for one in inside
        for argument in one.arguments
        if re.fullmatch(r"(\w+_)?units?", argument.arg)
    ]


def is_unnamed(returned: ast.expr | None) -> bool:
    """Whether a result is a tuple of different things, or of numbers side by side; a sequence of like things is not."""
    if not (isinstance(returned, ast.Subscript) and ast.unparse(returned.value) == "tuple"):
        return False
    parts = {ast.unparse(part) for part in getattr(returned.slice, "elts", [returned.slice])} - {"..."}
    return len(parts) != 1 or parts == {"float"}


def test_results_are_named():
    assert not [one.label for one in LIBRARY if is_unnamed(one.node.returns)]
