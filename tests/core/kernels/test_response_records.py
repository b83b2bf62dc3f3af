"""The records the kernels share: free to import, and told apart."""

from __future__ import annotations

import subprocess
import sys

from gainbench.kernels.response_records import BACKWARD, FORWARD, TRAPEZOID, PlantState, Row


def test_records_load_no_compiler():
    script = "import sys, gainbench.kernels.response_records; print('numba' in sys.modules)"
    found = subprocess.run([sys.executable, "-c", script], check=True, capture_output=True, text=True).stdout
    assert found.strip() == "False"


def test_rules_are_told_apart():
    assert len({BACKWARD, FORWARD, TRAPEZOID}) == 3


def test_states_stand_in_the_order_of_the_matrices():
    assert PlantState._fields == ("current", "speed", "filtered", "load_speed", "twist", "angle")
    assert Row._fields == ("current", "speed", "load_speed", "twist", "voltage", "motor_drag", "load_drag")
