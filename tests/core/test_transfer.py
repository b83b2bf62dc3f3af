"""The plant handed out as python-control objects."""

from __future__ import annotations

import numpy as np
import pytest

from gainbench.plant import refer
from gainbench.transfer import transfer_functions
from quantities import assert_quantity
from rigs import FIXED, fixed_sheet


@pytest.mark.parametrize("name", FIXED)
def test_static_gains_are_those_of_the_equations(name):
    rig = fixed_sheet(name).rig
    plant = refer(rig)
    found = transfer_functions(rig)
    b, ke, kt, r = plant.viscous, plant.back_emf, plant.torque, plant.resistance
    bottom = ke * kt + r * b
    why = "a linear solve"
    if b > 0.0:
        assert_quantity(found.current_by_voltage.dcgain(), b / bottom, rtol=1e-9, unit="A/V", why=why)
    if not plant.elastic:
        assert_quantity(found.speed_by_load.dcgain(), -r / bottom, rtol=1e-9, unit="rad/(s N m)", why=why)
    assert_quantity(found.speed_by_voltage.dcgain(), kt / bottom, rtol=1e-9, unit="rad/(s V)", why=why)


def test_signals_are_named_and_the_filter_is_seen():
    rig = fixed_sheet("sine").rig
    found = transfer_functions(rig)
    assert found.plant.input_labels == ["voltage", "load_torque"]
    assert found.plant.output_labels == ["current", "sampled_current", "speed", "load_speed"]
    w = 1.0 / rig.stage.current_filter
    ratio = found.plant[1, 0](1j * w) / found.plant[0, 0](1j * w)
    assert_quantity([ratio.real, ratio.imag], [0.5, -0.5], rtol=1e-9, unit="1", why="1/(1 + j) at the filter's corner")


def test_k1_resonance_and_antiresonance_are_poles_and_zeros():
    # Two inertias: zeros at sqrt(k/JL), poles at sqrt(k (1/JM + 1/JL)). Derived, K1.
    rig = fixed_sheet("elastic").rig
    plant = refer(rig)
    found = transfer_functions(rig)
    zeros = found.speed_by_voltage.zeros()
    expected = np.sqrt(plant.stiffness / plant.load_inertia)
    assert_quantity(
        np.abs(zeros).max(), expected, rtol=1e-9, unit="rad/s", why="its product is k/JL whatever the damping"
    )
