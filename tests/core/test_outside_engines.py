"""The library against engines that others wrote: python-control's margins, and scipy's adaptive integrator."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from scipy.integrate import solve_ivp

from gainbench.assess import assess
from gainbench.model import Firmware, IntegratorRule, Sheet
from gainbench.results import Gains, LoopFigures
from oracle_bench import continuous, read_bench
from oracle_loops import PI
from oracle_motion import Motion
from oracle_response import respond
from quantities import assert_quantity
from rigs import fixed_sheet


def _one_rate(rule: IntegratorRule) -> Sheet:
    """Both loops at 10 kHz with one whole period of delay: what a library of plain discrete loops can build."""
    sheet = fixed_sheet("plain")
    stage = replace(sheet.rig.stage, speed_rate=sheet.rig.stage.current_rate)
    aims = replace(sheet.aims, firmware=Firmware(integrator=rule))
    return replace(sheet, rig=replace(sheet.rig, stage=stage), aims=aims)


@pytest.mark.parametrize("rule", list(IntegratorRule))
def test_margins_of_loops_built_from_blocks(rule: IntegratorRule) -> None:
    """Blocks joined by python-control: hold, delay, PI; the closed current loop inside the speed loop."""
    import control

    sheet = _one_rate(rule)
    found, machine, train = assess(sheet), sheet.rig.machine, sheet.rig.train
    assert found.current.gains is not None
    assert found.speed.gains is not None
    assert machine.torque_constant is not None
    Ts, Kt, R, L = sheet.rig.stage.current_period, machine.torque_constant, machine.resistance, machine.inductance
    J = machine.rotor_inertia + train.load_inertia
    motor = control.ss(
        [[-R / L, -Kt / L], [Kt / J, -machine.viscous_friction / J]], [[1.0 / L], [0.0]], np.eye(2), np.zeros((2, 1))
    )
    held = control.sample_system(motor, Ts, method="zoh")
    delay = control.ss([[0.0]], [[1.0]], [[1.0]], [[0.0]], Ts)

    def pi(gains: Gains) -> control.StateSpace:
        """x' = x + e with u = Kp e + Ki T (x, and this tick's share of e)."""
        share = {IntegratorRule.BACKWARD: 1.0, IntegratorRule.FORWARD: 0.0, IntegratorRule.TRAPEZOID: 0.5}[rule]
        return control.ss([[1.0]], [[1.0]], [[gains.ki * Ts]], [[gains.kp + share * gains.ki * Ts]], Ts)

    chain = held * delay * pi(found.current.gains)
    current, other = chain[0, 0], control.ss([], [], [], [[1.0, 0.0]], Ts)
    closed = control.feedback(chain, other)
    speed = closed[1, 0] * pi(found.speed.gains)
    for loop, figures in ((current, found.current.figures), (speed, found.speed.figures)):
        assert figures is not None
        omega = np.geomspace(1e-3, 0.9999, 3000) * np.pi / Ts
        _same_margins(control.stability_margins(control.frd(loop, omega, smooth=True)), figures)


def _same_margins(margins: tuple[float, ...], figures: LoopFigures) -> None:
    gain, phase, distance, _, crossover, _ = margins
    why = "the other library interpolates over frequency"
    assert figures.gain_margin_db is not None
    assert figures.peak_sensitivity is not None
    assert_quantity(figures.gain_margin_db, 20.0 * np.log10(gain), atol=0.01, unit="dB", why=why)
    assert_quantity(figures.phase_margin_deg, phase, atol=0.01, unit="deg", why=why)
    assert_quantity(figures.crossover_hz, crossover / (2.0 * np.pi), rtol=1e-5, unit="Hz", why=why)
    assert_quantity(1.0 / figures.peak_sensitivity, distance, rtol=1e-3, unit="1", why="its own grid of frequencies")


class Integrated(Motion):
    """The plant without friction, carried by an adaptive Runge-Kutta method of eighth order."""

    def run(self, voltage: float, h: float) -> None:
        if h <= 0.0:
            return
        plant = continuous(self.bench)
        load = self.bench.load_at_shaft(self.load, 1)
        torques = (load, 0.0) if len(self.bench.bodies) == 1 else (0.0, load)
        u = np.array([voltage, *torques])
        drive = plant.B @ u
        found = solve_ivp(lambda _t, x: plant.A @ x + drive, (0.0, h), self.x, method="DOP853", rtol=1e-11, atol=1e-13)
        self.x = found.y[:, -1]


@pytest.mark.parametrize("name", ["plain", "elastic", "sine"])
def test_response_by_an_adaptive_integrator(name: str) -> None:
    """Ideal sensor, no Coulomb friction: the clamps act, the load steps, and no matrix exponential is involved."""
    sheet = fixed_sheet(name)
    rig = replace(
        sheet.rig,
        machine=replace(sheet.rig.machine, coulomb_friction=0.0),
        train=replace(sheet.rig.train, load_coulomb_friction=0.0, efficiency=1.0),
        stage=replace(sheet.rig.stage, speed_sensor=fixed_sheet("plain").rig.stage.speed_sensor, current_limit=8.0),
    )
    duty = replace(sheet.duty, reference_at=0.002, load_at=0.04, length=0.06)
    sheet = replace(sheet, rig=rig, duty=duty)
    found = assess(sheet)
    assert found.response is not None
    assert found.current.gains is not None
    assert found.speed.gains is not None
    history = respond(
        read_bench(sheet),
        PI(kp=found.current.gains.kp, ki=found.current.gains.ki),
        PI(kp=found.speed.gains.kp, ki=found.speed.gains.ki),
        firmware=sheet.aims.firmware,
        duty=duty,
        load_torque=0.0,
        weight=sheet.aims.speed.reference_weight,
        moving=Integrated,
    )
    assert history.current_clamps > 0
    for signal in ("speed", "load_speed", "current", "voltage", "current_reference"):
        other = getattr(history, signal)
        scale = float(np.max(np.abs(other)))
        assert_quantity(
            getattr(found.response.trace, signal), other, atol=1e-7 * scale, unit="SI", why="the integrator's 1e-11"
        )
