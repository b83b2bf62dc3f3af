"""What follows from a rig without a loop: published rows end to end, closed forms, and the mix-ups it names."""

from __future__ import annotations

import math
from dataclasses import replace

import pytest
from hypothesis import assume, given
from hypothesis import strategies as st

from gainbench.derived import SLIP_WINDOW, constant_disagreements, derived_constants, voltage_ceiling
from gainbench.model import (
    BackEmfValues,
    CurrentValues,
    Machine,
    MachineKind,
    Rig,
    SpeedSensor,
    Stage,
    Train,
    TrainKind,
    WindingValues,
)
from gainbench.plant import refer
from quantities import assert_quantity

ROUNDING = "a handful of operations in double precision"
PRINTED = "digits printed in the source"
RPM = math.tau / 60.0
"""One turn per minute [rad/s]."""

STAGE = Stage(
    bus_voltage=24.0,
    current_limit=20.0,
    pwm_frequency=20e3,
    current_rate=20e3,
    speed_rate=2e3,
    speed_sensor=SpeedSensor.ENCODER,
    encoder_counts=4096,
    voltage_use=1.0,
)
BARE = Train(kind=TrainKind.RIGID, load_inertia=0.0)
CATALOGUE = Machine(
    kind=MachineKind.BRUSHED_DC,
    resistance=0.299,
    inductance=82.3e-6,
    rotor_inertia=142e-7,
    torque_constant=30.2e-3,
    speed_constant=317.0 * RPM,
    coulomb_friction=30.2e-3 * 0.137,
    rated_voltage=24.0,
)
"""Row C6: a 24 V, 40 mm, 150 W brushed motor; its no-load current of 137 mA as Coulomb friction."""

SINE = Machine(
    kind=MachineKind.PM_SINE,
    resistance=0.4,
    inductance=1.1e-3,
    rotor_inertia=9e-5,
    torque_constant=0.3,
    back_emf_constant=0.2,
    pole_pairs=4,
    winding_values=WindingValues.PHASE,
    current_values=CurrentValues.PEAK,
    back_emf_values=BackEmfValues.PHASE_PEAK,
)


def rig(machine: Machine = CATALOGUE, *, train: Train = BARE, stage: Stage = STAGE) -> Rig:
    return Rig(machine=machine, train=train, stage=stage)


class TestPublishedRows:
    @pytest.mark.parametrize(
        ("what", "published", "unit"),
        [
            # C6: source: a maker's catalogue (from memory); its own tolerance of the row is 0.5 %.
            ("no-load speed", 7580.0, "rpm"),
            ("no-load current", 0.137, "A"),
            ("stall current", 80.2, "A"),
            ("stall torque", 2.420, "N*m"),
            ("gradient", 3.14, "rpm/(mN*m)"),
            ("mechanical time", 4.67e-3, "s"),
            ("speed constant", 317.0, "rpm/V"),
        ],
    )
    def test_a_catalogue_row_agrees_with_itself(self, what, published, unit):
        constants = derived_constants(rig())
        rated = constants.at_rated_voltage
        assert rated is not None
        found = {
            "no-load speed": rated.running_speed / RPM,
            "no-load current": rated.running_current,
            "stall current": rated.stall_current,
            "stall torque": rated.stall_torque,
            "gradient": constants.speed_torque_gradient / RPM / 1e3,
            "mechanical time": constants.rotor_mechanical_time,
            "speed constant": rated.no_load_speed / 24.0 / RPM,
        }[what]
        assert_quantity(found, published, rtol=5e-3, unit=unit, why="the row's constants are rounded to three digits")

    def test_the_rows_own_constants_disagree_by_no_slip(self):
        (check,) = constant_disagreements(CATALOGUE)
        assert (check.constant, check.used, check.slip) == ("speed_constant", "torque_constant", "")
        assert_quantity(check.ratio, 1.0, rtol=5e-3, unit="1", why="the row's constants are rounded to three digits")

    def test_a_block_machines_row(self):
        # C5: 51 V/krpm, 0.49 N m/A, 2.2 N m at 4.52 A, 3.07 ohm, 6.57 mH, 1.8 kg cm^2.
        # Source: table quoted at thefreedictionary.com, "torque constant"; the numbers behind it recomputed.
        machine = Machine(
            kind=MachineKind.PM_BLOCK,
            resistance=3.07,
            inductance=6.57e-3,
            rotor_inertia=1.8e-4,
            torque_constant=0.49,
            back_emf_constant=51.0 / (1000.0 * RPM),
            pole_pairs=2,
            winding_values=WindingValues.LINE_TO_LINE,
        )
        (check,) = constant_disagreements(machine)
        assert_quantity(check.value, 0.48701, atol=5e-6, unit="V*s/rad", why=PRINTED)
        assert_quantity(check.ratio, 0.994, atol=5e-4, unit="1", why="0.6 % printed to one digit")
        assert check.slip == ""
        constants = derived_constants(rig(machine))
        assert_quantity(constants.electrical_time, 2.14e-3, atol=5e-6, unit="s", why=PRINTED)
        torque = refer(rig(machine)).torque * 4.52
        assert_quantity(torque, 2.2, rtol=7e-3, unit="N*m", why="0.7 % between the row's own numbers")


class TestClosedForms:
    def test_stall_no_load_gradient_and_times(self):
        # C3: I = U/R, T = Kt U/R, w0 = (U - R I0)/Ke, gradient R/(Kt Ke), tau_m = gradient J. Source: DC motor theory.
        train = replace(BARE, load_inertia=4e-5, ratio=2.0, coupling_inertia=3e-6)
        constants = derived_constants(rig(train=train))
        tight = {"rtol": 1e-14, "why": ROUNDING}
        gradient = 0.299 / 30.2e-3**2
        assert_quantity(constants.speed_torque_gradient, gradient, unit="rad/(s*N*m)", **tight)
        assert_quantity(constants.rotor_mechanical_time, gradient * 142e-7, unit="s", **tight)
        assert_quantity(constants.mechanical_time, gradient * (142e-7 + 3e-6 + 1e-5), unit="s", **tight)
        assert_quantity(constants.reflected_load_inertia, 1e-5, unit="kg*m^2", **tight)
        assert_quantity(constants.inertia_ratio, 1e-5 / 142e-7, unit="1", **tight)
        assert constants.electrical_time == 82.3e-6 / 0.299
        bus = constants.at_bus_voltage
        assert_quantity(bus.running_speed, (24.0 - 0.299 * 0.137) / 30.2e-3, unit="rad/s", **tight)
        assert_quantity(bus.no_load_speed, 24.0 / 30.2e-3, unit="rad/s", **tight)

    def test_resonance_and_antiresonance_at_the_motor_shaft(self):
        # K1: JM = 1e-3, JL = 2e-3, k = 100: 223.607 and 387.298 rad/s.
        # Source: Zhang & Furusho, IEEE Trans. Ind. Electron. 47(3), 2000 (from memory).
        machine = replace(CATALOGUE, rotor_inertia=1e-3)
        train = Train(
            kind=TrainKind.ELASTIC, load_inertia=2e-3 * 9.0, ratio=3.0, shaft_stiffness=100.0 * 9.0, shaft_damping=0.0
        )
        constants = derived_constants(rig(machine, train=train))
        assert_quantity(constants.antiresonance, 223.607, atol=5e-4, unit="rad/s", why=PRINTED)
        assert_quantity(constants.resonance, 387.298, atol=5e-4, unit="rad/s", why=PRINTED)

    def test_one_count_in_the_window(self):
        # K7: 60 f/(4 N) rpm for N lines: 1024 lines at 1 kHz: 14.648. Source: designworldonline.com (formula read).
        for window in (1, 4):
            stage = replace(STAGE, speed_rate=1e3, speed_window=window)
            found = derived_constants(rig(stage=stage)).count_speed
            assert found is not None
            assert_quantity(found * window / RPM, 14.648, atol=5e-4, unit="rpm", why=PRINTED)

    def test_delay_of_computation_and_half_a_hold(self):
        # D4: one period of computation and half a hold are 1.5 Ts. Source: identity.
        assert_quantity(derived_constants(rig()).current_loop_delay, 75e-6, rtol=1e-15, unit="s", why=ROUNDING)

    def test_what_there_is_none_of_is_none(self):
        constants = derived_constants(
            rig(replace(CATALOGUE, rated_voltage=None), stage=replace(STAGE, speed_sensor=SpeedSensor.IDEAL))
        )
        assert constants.at_rated_voltage is None
        assert constants.antiresonance is None
        assert constants.resonance is None
        assert constants.count_speed is None

    def test_a_rated_voltage_of_a_sine_machine_is_line_to_line_rms(self):
        constants = derived_constants(rig(replace(SINE, rated_voltage=230.0)))
        assert constants.at_rated_voltage is not None
        peak = 230.0 * math.sqrt(2.0) / math.sqrt(3.0)
        assert_quantity(constants.at_rated_voltage.voltage, peak, rtol=1e-14, unit="V", why=ROUNDING)


class TestVoltageCeiling:
    @given(
        machine=st.sampled_from([CATALOGUE, SINE]),
        voltage=st.floats(1.0, 400.0),
        viscous=st.floats(0.0, 1e-3),
        coulomb=st.floats(0.0, 0.2),
    )
    def test_torque_and_voltage_balance_at_the_running_speed(self, machine, voltage, viscous, coulomb):
        plant = refer(rig(replace(machine, viscous_friction=viscous, coulomb_friction=coulomb)))
        found = voltage_ceiling(plant, voltage)
        assume(found.running_speed > 0.0)
        torque = plant.torque * found.running_current
        friction = plant.coulomb + plant.viscous * found.running_speed
        assert_quantity(torque, friction, rtol=1e-12, atol=1e-18, unit="N*m", why=ROUNDING)
        along = plant.resistance * found.running_current + plant.back_emf * found.running_speed
        across = 0.0
        if machine.kind is MachineKind.PM_SINE:
            across = plant.pole_pairs * found.running_speed * plant.inductance * found.running_current
        assert_quantity(math.hypot(along, across), voltage, rtol=1e-12, unit="V", why="found to the last digits")
        assert found.running_speed <= found.no_load_speed * (1.0 + 1e-15)

    def test_friction_that_is_not_overcome_leaves_it_at_stall(self):
        plant = refer(rig(replace(CATALOGUE, coulomb_friction=3.0)))
        found = voltage_ceiling(plant, 24.0)
        assert found.running_speed == 0.0
        assert found.running_current == found.stall_current


class TestDisagreements:
    @pytest.mark.parametrize(
        ("told", "words"),
        [
            (CurrentValues.RMS, "peak against rms"),
            (CurrentValues.PEAK, ""),
        ],
    )
    def test_an_ampere_taken_for_the_other(self, told, words):
        machine = replace(SINE, torque_constant=0.3, current_values=told)
        (check,) = constant_disagreements(machine)
        assert check.slip == words

    @pytest.mark.parametrize(
        ("told", "words"),
        [
            (BackEmfValues.PHASE_PEAK, ""),
            (BackEmfValues.PHASE_RMS, "peak against rms"),
            (BackEmfValues.LINE_TO_LINE_PEAK, "line-to-line against phase"),
            (BackEmfValues.LINE_TO_LINE_RMS, "peak against rms one way and line-to-line against phase the other"),
        ],
    )
    def test_a_volt_taken_for_another(self, told, words):
        (check,) = constant_disagreements(replace(SINE, back_emf_values=told))
        assert check.slip == words

    def test_a_torque_constant_that_is_the_flux_times_the_pole_pairs(self):
        (check,) = constant_disagreements(replace(SINE, torque_constant=0.2))
        assert check.slip == "1.5 of the amplitude-invariant q axis"

    def test_radians_taken_for_turns_per_minute(self):
        machine = replace(CATALOGUE, speed_constant=317.0)
        (check,) = constant_disagreements(machine)
        assert check.slip == "rad/s against rpm"
        assert_quantity(1.0 / check.ratio, 317.0 * 30.2e-3, rtol=1e-14, unit="1", why=ROUNDING)

    def test_a_phase_taken_for_the_pair_of_a_block_machine(self):
        machine = replace(
            CATALOGUE, kind=MachineKind.PM_BLOCK, speed_constant=None, back_emf_constant=2.0 * 30.2e-3, pole_pairs=2
        )
        (check,) = constant_disagreements(machine)
        assert check.slip == "line-to-line against phase"

    @pytest.mark.parametrize("factor", [1.2, 3.1, 0.86])
    def test_a_ratio_that_no_convention_explains_names_none(self, factor):
        machine = replace(CATALOGUE, speed_constant=None, back_emf_constant=30.2e-3 * factor)
        (check,) = constant_disagreements(machine)
        assert_quantity(check.ratio, factor, rtol=1e-14, unit="1", why=ROUNDING)
        assert check.slip == ""

    @given(off=st.floats(0.0, 3.0 * SLIP_WINDOW), up=st.booleans())
    def test_the_window_around_agreement_and_around_a_slip(self, off, up):
        assume(abs(off - SLIP_WINDOW) > 1e-9)
        factor = (1.0 + off) if up else 1.0 / (1.0 + off)
        near_one = replace(SINE, back_emf_constant=0.2 * factor)
        (check,) = constant_disagreements(near_one)
        assert check.slip == ""
        near_two = replace(CATALOGUE, speed_constant=None, back_emf_constant=30.2e-3 * factor * RPM)
        (check,) = constant_disagreements(near_two)
        assert (check.slip == "rad/s against rpm") is (off < SLIP_WINDOW)

    def test_one_constant_has_nothing_to_disagree_with(self):
        assert constant_disagreements(replace(CATALOGUE, speed_constant=None)) == ()
        assert constant_disagreements(replace(CATALOGUE, speed_constant=None, torque_constant=None)) == ()
