"""Constants, mechanics and conventions of motors against outside values, each with its source in ``published``."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from numpy.typing import NDArray
from scipy.linalg import expm

from gainbench.derived import constant_disagreements, derived_constants, voltage_ceiling
from gainbench.model import (
    BackEmfValues,
    CurrentValues,
    Machine,
    MachineKind,
    Rig,
    SpeedSensor,
    Train,
    TrainKind,
    WindingValues,
)
from gainbench.plant import refer, state_space
from gainbench.sheetfile import parse_sheet
from gainbench.transfer import transfer_functions
from lab import PLAIN_STAGE, brushed, rig_of
from published import PUBLISHED
from quantities import assert_quantity

DIGITS = "the digits of the row"
CLOSED = "closed form"
RPM = math.tau / 60.0

# --- Motor constants -------------------------------------------------------------------------------------------------


def test_torque_and_back_emf_constant_are_one() -> None:
    """C1 (read: eurari.com, DC motor guide)."""
    plant = refer(rig_of(brushed(torque_constant=0.052)))
    assert plant.torque == plant.back_emf == 0.052


def _from_rest(a: NDArray[np.float64], b: NDArray[np.float64], t: float) -> NDArray[np.float64]:
    """The state after ``t`` under one volt."""
    n = len(a)
    joint = np.zeros((n + 1, n + 1))
    joint[:n, :n], joint[:n, n] = a, b
    return np.asarray(expm(joint * t)[:n, n])


def test_time_constants_are_where_they_are_said_to_be() -> None:
    """C2 (definitions read: Bodine, motor constants; formula from memory): 63.2 % of stall current and of speed."""
    share = 1.0 - math.exp(-1.0)
    machine = brushed(resistance=0.6, inductance=0.45e-3, rotor_inertia=3e-5, torque_constant=0.05)
    derived, plant = derived_constants(rig_of(machine)), refer(rig_of(machine))
    locked = state_space(plant, locked=True)
    current = _from_rest(locked.a[:1, :1], locked.b[:1, 0], derived.electrical_time)[0]
    assert_quantity(current * plant.resistance, share, atol=1e-12, unit="1", why=CLOSED)
    quick = refer(rig_of(replace(machine, inductance=1e-9)))
    free = state_space(quick)
    speed = _from_rest(free.a[:2, :2], free.b[:2, 0], derived.rotor_mechanical_time)[1]
    assert_quantity(speed * quick.back_emf, share, atol=1e-6, unit="1", why="the winding still takes a nanosecond")


def test_ceilings_of_a_voltage() -> None:
    """C3 (DC motor theory): I = U/R, T = Kt U/R, w0 = (U - R I0)/Ke, gradient R/(Kt Ke), tau_m = gradient J."""
    machine = brushed(resistance=0.5, rotor_inertia=2e-5, torque_constant=0.04, coulomb_friction=0.04 * 0.2)
    derived = derived_constants(rig_of(machine))
    ceiling = voltage_ceiling(refer(rig_of(machine)), 24.0)
    for got, wanted in (
        (ceiling.stall_current, 48.0),
        (ceiling.stall_torque, 1.92),
        (ceiling.running_current, 0.2),
        (ceiling.running_speed, (24.0 - 0.5 * 0.2) / 0.04),
        (derived.speed_torque_gradient, 0.5 / 0.04**2),
        (derived.rotor_mechanical_time, 0.5 / 0.04**2 * 2e-5),
    ):
        assert_quantity(got, wanted, rtol=1e-12, unit="SI", why=CLOSED)


SHEET = """
format = 1
[machine]
{machine}
[train]
kind = "rigid"
load_inertia = "0 kg*m^2"
[stage]
bus_voltage = "{volts} V"
voltage_use = "100 %"
current_limit = "30 A"
pwm_frequency = "20 kHz"
current_rate = "20 kHz"
speed_rate = "2 kHz"
speed_sensor = "ideal"
[aims.current]
method = "crossover-margin"
crossover = "1 kHz"
phase_margin = "60 deg"
[aims.speed]
method = "crossover-margin"
crossover = "60 Hz"
phase_margin = "60 deg"
[duty]
reference_speed = "1000 rpm"
length = "0.1 s"
"""


def _written(machine: str, volts: float) -> Rig:
    return parse_sheet(SHEET.format(machine=machine, volts=volts), "row.bench.toml").sheet.rig


def test_catalogue_row_of_a_brushless_motor() -> None:
    """C5: Ke and Kt of the row agree within its rounding; two phases on, so Kt = Ke and no factor of conventions."""
    rig = _written(
        'kind = "pm-block"\nresistance = "3.07 ohm"\ninductance = "6.57 mH"\nwinding_values = "line-to-line"\n'
        'pole_pairs = 4\ntorque_constant = "0.49 N*m/A"\nback_emf_constant = "51 V/krpm"\n'
        'rotor_inertia = "1.8 kg*cm^2"',
        310.0,
    )
    (check,) = constant_disagreements(rig.machine)
    assert_quantity(check.ratio, PUBLISHED["C5"]["ratio"], atol=5e-4, unit="1", why=DIGITS)
    assert check.slip == ""
    assert_quantity(derived_constants(rig).electrical_time, PUBLISHED["C5"]["tau_e"], rtol=2e-3, unit="s", why=DIGITS)
    assert_quantity(refer(rig).torque * 4.52, 2.2, rtol=0.01, unit="N*m", why=DIGITS)


def test_catalogue_row_of_a_brushed_motor() -> None:
    """C6 end to end, from the text of a sheet: within 0.5 %."""
    row = PUBLISHED["C6"]
    rig = _written(
        'kind = "brushed-dc"\nresistance = "0.299 ohm"\ninductance = "0.0823 mH"\n'
        'torque_constant = "30.2 mN*m/A"\nspeed_constant = "317 rpm/V"\nrotor_inertia = "142 g*cm^2"\n'
        'coulomb_friction = "4.1374 mN*m"\nrated_voltage = "24 V"',
        24.0,
    )
    derived, plant = derived_constants(rig), refer(rig)
    ceiling = derived.at_rated_voltage
    assert ceiling is not None
    assert ceiling == derived.at_bus_voltage
    (check,) = constant_disagreements(rig.machine)
    for got, wanted, unit in (
        (ceiling.stall_current, row["stall_current"], "A"),
        (ceiling.stall_torque, row["stall_torque"], "N*m"),
        (ceiling.running_speed / RPM, row["no_load_rpm"], "rpm"),
        (ceiling.running_current, 0.137, "A"),
        (1.0 / plant.back_emf / RPM, row["speed_constant_rpm"], "rpm/V"),
        (derived.speed_torque_gradient / RPM / 1000.0, row["gradient_rpm_per_mnm"], "rpm/mNm"),
        (derived.rotor_mechanical_time, row["tau_m"], "s"),
        (check.ratio, 1.0, "1"),
    ):
        assert_quantity(got, wanted, rtol=0.005, unit=unit, why="the row agrees with itself that well")


# --- Mechanics and encoder -------------------------------------------------------------------------------------------


def _two_bodies(motor: float, load: float, stiffness: float, *, damping: float = 0.0) -> Rig:
    train = Train(kind=TrainKind.ELASTIC, load_inertia=load, shaft_stiffness=stiffness, shaft_damping=damping)
    return rig_of(brushed(rotor_inertia=motor, torque_constant=1e-9), train)


def test_resonance_and_antiresonance() -> None:
    """K1, and K2 (read: Wie & Bernstein's benchmark): two unit masses on a unit spring turn at sqrt(2)."""
    derived = derived_constants(_two_bodies(1e-3, 2e-3, 100.0))
    row = PUBLISHED["K1"]
    assert_quantity(derived.antiresonance, row["antiresonance"], rtol=1e-5, unit="rad/s", why=DIGITS)
    assert_quantity(derived.resonance, row["resonance"], rtol=1e-5, unit="rad/s", why=DIGITS)
    assert_quantity(derived.resonance / derived.antiresonance, math.sqrt(3.0), rtol=1e-12, unit="1", why=CLOSED)
    assert_quantity(
        derived_constants(_two_bodies(1.0, 1.0, 1.0)).resonance, math.sqrt(2.0), rtol=1e-12, unit="rad/s", why=CLOSED
    )


def test_damped_shaft() -> None:
    """K3."""
    rig = _two_bodies(1e-3, 2e-3, 100.0, damping=0.01)
    row = PUBLISHED["K3"]
    poles = np.linalg.eigvals(state_space(refer(rig)).a)
    (pole,) = [pole for pole in poles if pole.imag > 1.0]
    assert_quantity([pole.real, pole.imag], [row["pole_real"], row["pole_imag"]], atol=1e-3, unit="1/s", why=DIGITS)
    (zero,) = [zero for zero in transfer_functions(rig).speed_by_voltage.zeros() if zero.imag > 1.0]
    assert_quantity([zero.real, zero.imag], [row["zero_real"], row["zero_imag"]], atol=1e-3, unit="1/s", why=DIGITS)


def test_reflected_inertia() -> None:
    """K4: 0.01 kg m^2 behind 50 to 1."""
    rig = rig_of(brushed(), Train(kind=TrainKind.RIGID, load_inertia=0.01, ratio=50.0))
    derived = derived_constants(rig)
    assert_quantity(derived.reflected_load_inertia, PUBLISHED["K4"]["reflected"], rtol=1e-12, unit="kg*m^2", why=CLOSED)


@pytest.mark.parametrize(
    ("lines", "rate", "name"), [(1000, 1e3, "lines_1000"), (1024, 1e3, "lines_1024"), (2500, 2e3, "lines_2500")]
)
def test_one_count(lines: int, rate: float, name: str) -> None:
    """K7: 60 f/(4 N) rpm."""
    stage = replace(PLAIN_STAGE, speed_rate=rate, speed_sensor=SpeedSensor.ENCODER, encoder_counts=4 * lines)
    count = derived_constants(rig_of(brushed(), stage=stage)).count_speed
    assert count is not None
    assert_quantity(count / RPM, PUBLISHED["K7"][name], rtol=1e-4, unit="rpm", why=DIGITS)


# --- Conventions of field-oriented machines --------------------------------------------------------------------------


def _sine(**constants: float) -> Machine:
    return Machine(
        kind=MachineKind.PM_SINE,
        resistance=3.0,
        inductance=8e-3,
        rotor_inertia=1e-4,
        pole_pairs=4,
        winding_values=WindingValues.LINE_TO_LINE,
        current_values=CurrentValues.RMS,
        back_emf_values=BackEmfValues.LINE_TO_LINE_RMS,
        torque_constant=constants.get("torque_constant"),
        back_emf_constant=constants.get("back_emf_constant"),
    )


FLUX, PAIRS = 0.05, 4


def test_torque_per_peak_and_per_rms_ampere() -> None:
    """P1: 1.5 p psi per ampere peak, sqrt(2) of it per ampere rms."""
    plant = refer(rig_of(_sine(torque_constant=PUBLISHED["P1"]["per_rms"])))
    assert_quantity(plant.torque, PUBLISHED["P1"]["per_peak"], rtol=2e-6, unit="N*m/A", why=DIGITS)
    assert_quantity(plant.back_emf, PAIRS * FLUX, rtol=2e-6, unit="V*s/rad", why=DIGITS)
    peak = refer(rig_of(replace(_sine(torque_constant=PUBLISHED["P1"]["per_peak"]), current_values=CurrentValues.PEAK)))
    assert_quantity(peak.back_emf, PAIRS * FLUX, rtol=1e-12, unit="V*s/rad", why=CLOSED)


def test_line_to_line_volts_per_thousand_turns() -> None:
    """P2: rms and peak between the lines against the flux."""
    krpm, row = 1000.0 * RPM, PUBLISHED["P2"]
    rms = refer(rig_of(_sine(back_emf_constant=row["rms_v_per_krpm"] / krpm)))
    machine = _sine(back_emf_constant=row["peak_v_per_krpm"] / krpm)
    peak = refer(rig_of(replace(machine, back_emf_values=BackEmfValues.LINE_TO_LINE_PEAK)))
    for plant in (rms, peak):
        assert_quantity(plant.back_emf, PAIRS * FLUX, rtol=1e-6, unit="V*s/rad", why=DIGITS)


def test_torque_per_rms_ampere_from_rms_volts() -> None:
    """P3: Kt per rms ampere is sqrt(3) Ke between lines, or 0.01654 of the volts per thousand turns."""
    machine = _sine(torque_constant=PUBLISHED["P3"]["ratio"] * 32.0, back_emf_constant=32.0 / (1000.0 * RPM))
    (check,) = constant_disagreements(machine)
    assert_quantity(check.ratio, 1.0, rtol=1e-7, unit="1", why=DIGITS)


def test_phase_values_of_a_star() -> None:
    """P4 (identity): half of what is measured between two lines."""
    plant = refer(rig_of(_sine(torque_constant=0.4)))
    assert plant.resistance == 1.5
    assert plant.inductance == 4e-3


def test_voltage_of_the_modulation() -> None:
    """P5: Vdc/sqrt(3) for the phase peak."""
    plant = refer(rig_of(_sine(torque_constant=0.4)))
    assert_quantity(plant.voltage_limit / 100.0, PUBLISHED["P5"]["phase_peak"], atol=5e-6, unit="1", why=DIGITS)
