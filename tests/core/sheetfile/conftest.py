"""Texts of sheets to change by hand, as a user with an editor would."""

from __future__ import annotations

import re
from collections.abc import Callable

import pytest

from gainbench.errors import SheetError, SheetProblem
from gainbench.sheetfile import parse_sheet

Altered = Callable[..., str]

ELASTIC = """\
format = 1
[machine]
kind = "brushed-dc"
resistance = "1 ohm"
inductance = "1 mH"
speed_constant = "180 rpm/V"
rotor_inertia = "300 g*cm^2"
[train]
kind = "elastic"
load_inertia = "3 kg*cm^2"
shaft_stiffness = "45 N*m/rad"
shaft_damping = "9 mN*m*s/rad"
[stage]
bus_voltage = "48 V"
current_limit = "20 A"
pwm_frequency = "20 kHz"
current_rate = "10 kHz"
speed_rate = "2 kHz"
speed_sensor = "ideal"
[aims.current]
method = "magnitude-optimum"
[aims.speed]
method = "symmetric-optimum"
spread = 2.0
[duty]
reference_speed = "-100 rpm"
length = "1 s"
"""
"""The fewest keys of a sheet with an elastic train and an ideal sensor."""


@pytest.fixture(scope="session")
def demo(demo_texts: dict[str, str]) -> str:
    """The sheet that opens by default, which is the example of the format."""
    return demo_texts["label-unwinder"]


@pytest.fixture(scope="session")
def elastic() -> str:
    return ELASTIC


@pytest.fixture(scope="session")
def altered() -> Altered:
    """Sets a key's line in a text: ``altered(text, path, toml)``; without a value the line is taken out."""
    return _altered


def _altered(text: str, path: str, toml: str | None = None) -> str:
    if path.startswith("tolerance."):
        table, key = "tolerance", path.removeprefix("tolerance.")
    elif path.startswith(("kept[0].", "evidence[0].")):
        table, _, key = path.partition("[0].")
    else:
        table, _, key = path.rpartition(".")
    lines = text.split("\n")
    head = re.compile(rf"\[{{1,2}}{re.escape(table)}\]{{1,2}}")
    start = next((i for i, line in enumerate(lines) if head.match(line)), None) if table else -1
    if start is None:
        lines += [f"[{table}]"]
        start = len(lines) - 1
    end = next((i for i in range(start + 1, len(lines)) if lines[i].startswith("[")), len(lines))
    old = next((i for i in range(start + 1, end) if re.match(rf"{re.escape(key)} *=", lines[i])), None)
    new = [] if toml is None else [f"{key} = {toml}"]
    at = start + 1 if old is None else old
    lines[at : at if old is None else at + 1] = new
    return "\n".join(lines)


@pytest.fixture(scope="session")
def refusal() -> Callable[[str], SheetError]:
    """Gives the error that a text is refused with."""
    return _refusal


@pytest.fixture(scope="session")
def one_problem() -> Callable[[str], SheetProblem]:
    """Gives the one problem that a text is refused for, having looked whether its message is whole."""
    return _one_problem


def _refusal(text: str) -> SheetError:
    with pytest.raises(SheetError) as caught:
        parse_sheet(text, "bench")
    return caught.value


def _one_problem(text: str) -> SheetProblem:
    error = _refusal(text)
    assert len(error.problems) == 1, str(error)
    (problem,) = error.problems
    message = str(error)
    assert message.startswith("bench: ")
    assert "\n" not in message
    assert all(part in message for part in (problem.path, problem.value, problem.reason, problem.example))
    assert problem.path
    assert problem.reason
    assert problem.example
    return problem
