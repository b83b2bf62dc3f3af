"""The machine's words and defaults, as format 1 gives them."""

from __future__ import annotations

import pytest

from gainbench.model import BackEmfValues, CurrentValues, Machine, MachineKind, WindingValues


@pytest.mark.parametrize(
    ("words", "enumeration"),
    [
        (("brushed-dc", "pm-sine", "pm-block"), MachineKind),
        (("line-to-line", "phase"), WindingValues),
        (("rms", "peak"), CurrentValues),
        (("line-to-line-rms", "line-to-line-peak", "phase-rms", "phase-peak"), BackEmfValues),
    ],
)
def test_words_of_format_1(words, enumeration):
    assert tuple(enumeration) == words


def test_defaults():
    machine = Machine(kind=MachineKind.BRUSHED_DC, resistance=1.0, inductance=1e-3, rotor_inertia=1e-5)
    assert (machine.viscous_friction, machine.coulomb_friction, machine.winding_temperature) == (0.0, 0.0, 25.0)


@pytest.mark.parametrize("rating", ["rated_voltage", "rated_current", "peak_current", "max_speed"])
def test_what_is_unknown_is_none_and_not_zero(rating):
    machine = Machine(kind=MachineKind.BRUSHED_DC, resistance=1.0, inductance=1e-3, rotor_inertia=1e-5)
    assert getattr(machine, rating) is None
