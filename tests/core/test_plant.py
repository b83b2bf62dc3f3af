"""Referral to the motor shaft and the continuous plant.

Every conversion is written out beside the library's own: from flux linkage and phase quantities for the electrical
side, from energies and powers for the train. P, K and C numbers are published or derived check values; the source
stands beside each.
"""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st
from scipy.linalg import expm

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
from gainbench.plant import Plant, back_emf_candidates, current_size, refer, state_space, winding_size
from quantities import assert_quantity

ROUNDING = "a handful of operations in double precision"
PRINTED = "digits printed in the source"

PSI, PAIRS = 0.05, 4
"""Flux linkage of one phase, peak [Wb], and pole pairs of the machine of rows P1 to P3."""

STAGE = Stage(
    bus_voltage=48.0,
    current_limit=20.0,
    pwm_frequency=20e3,
    current_rate=20e3,
    speed_rate=2e3,
    speed_sensor=SpeedSensor.IDEAL,
)
BRUSHED = Machine(
    kind=MachineKind.BRUSHED_DC, resistance=0.6, inductance=0.45e-3, rotor_inertia=3.1e-5, torque_constant=0.052
)
BLOCK = replace(BRUSHED, kind=MachineKind.PM_BLOCK, pole_pairs=PAIRS, winding_values=WindingValues.LINE_TO_LINE)
SINE = Machine(
    kind=MachineKind.PM_SINE,
    resistance=0.6,
    inductance=0.45e-3,
    rotor_inertia=3.1e-5,
    torque_constant=1.5 * PAIRS * PSI,
    pole_pairs=PAIRS,
    winding_values=WindingValues.PHASE,
    current_values=CurrentValues.PEAK,
)
RIGID = Train(kind=TrainKind.RIGID, load_inertia=3.6e-4)
ELASTIC = Train(kind=TrainKind.ELASTIC, load_inertia=3.6e-4, shaft_stiffness=45.0, shaft_damping=9e-3)


def rig(machine: Machine = BRUSHED, *, train: Train = RIGID, stage: Stage = STAGE) -> Rig:
    return Rig(machine=machine, train=train, stage=stage)


def sine_by_back_emf(value: float, values: BackEmfValues) -> Machine:
    return replace(SINE, torque_constant=None, back_emf_constant=value, back_emf_values=values)


class TestElectricalSide:
    @pytest.mark.parametrize("machine", [BRUSHED, BLOCK])
    def test_brushed_and_block_have_one_constant_in_si(self, machine):
        # C1: T w = e i. Source: eurari.com DC motor guide.
        plant = refer(rig(machine))
        assert plant.torque == plant.back_emf == 0.052

    def test_amplitude_invariant_sine_torque_per_peak_and_per_rms_ampere(self):
        # P1: Kt = 1.5 p psi per peak ampere, sqrt(2) times that per rms ampere; psi = .05, p = 4: .3 and .424264.
        # Source: Harnefors & Nee, IEEE Trans. Ind. Appl. 34(1), 1998; Krishnan; Mohan (from memory).
        by_peak = refer(rig(replace(SINE, torque_constant=0.3, current_values=CurrentValues.PEAK)))
        by_rms = refer(rig(replace(SINE, torque_constant=0.424264, current_values=CurrentValues.RMS)))
        for plant in (by_peak, by_rms):
            assert_quantity(plant.torque, 1.5 * PAIRS * PSI, rtol=1.2e-6, unit="N*m/A", why=PRINTED)
            assert_quantity(plant.back_emf, PAIRS * PSI, rtol=1.2e-6, unit="V*s/rad", why=PRINTED)

    @pytest.mark.parametrize(
        ("volts_per_krpm", "values"),
        [
            # P2: psi = .05, p = 4 <-> 25.65100 V/krpm line to line rms, 36.27599 V/krpm peak.
            # Source: derived from P1 and a symmetric sinusoidal machine.
            (25.65100, BackEmfValues.LINE_TO_LINE_RMS),
            (36.27599, BackEmfValues.LINE_TO_LINE_PEAK),
        ],
    )
    def test_sine_line_to_line_back_emf_constants(self, volts_per_krpm, values):
        per_radian = volts_per_krpm / (1000.0 * math.tau / 60.0)
        plant = refer(rig(sine_by_back_emf(per_radian, values)))
        assert_quantity(plant.back_emf, PAIRS * PSI, rtol=2e-7, unit="V*s/rad", why=PRINTED)

    @pytest.mark.parametrize("values", BackEmfValues)
    def test_every_volt_of_a_sine_machine_measured_on_its_waveforms(self, values):
        # Oracle: the waveforms themselves at w = 1 rad/s over one electrical turn, phases 120 degrees apart.
        angle = np.arange(3 * 4096) * math.tau / (3 * 4096)
        phase = PAIRS * PSI * np.cos(angle)
        line = phase - PAIRS * PSI * np.cos(angle - math.tau / 3.0)
        wave = line if values.startswith("line-to-line") else phase
        stated = math.sqrt(np.mean(wave**2)) if values.endswith("rms") else float(np.max(np.abs(wave)))
        plant = refer(rig(sine_by_back_emf(stated, values)))
        why = "the largest of 12288 samples of a sine is within 1e-7 of its peak"
        assert_quantity(plant.back_emf, PAIRS * PSI, rtol=1e-7, unit="V*s/rad", why=why)

    def test_sine_torque_per_rms_ampere_is_sqrt3_times_line_to_line_rms_volts(self):
        # P3: Kt[N m/A rms] = sqrt(3) Ke[V s/rad, line to line rms]; convention-free. Source: derived, ratio of P1, P2.
        stated = 0.1
        by_volts = refer(rig(sine_by_back_emf(stated, BackEmfValues.LINE_TO_LINE_RMS)))
        torque = math.sqrt(3.0) * stated
        by_torque = refer(rig(replace(SINE, torque_constant=torque, current_values=CurrentValues.RMS)))
        assert_quantity(by_volts.torque, by_torque.torque, rtol=1e-14, unit="N*m/A", why=ROUNDING)
        assert_quantity(torque / (stated * 1000.0 * math.tau / 60.0), 0.016539867, rtol=3e-8, unit="1", why=PRINTED)

    def test_mechanical_power_equals_the_power_at_the_back_emf(self):
        # Three phases of sine current in phase with sine back EMF: 3/2 of the product of the peaks.
        for machine in (BRUSHED, BLOCK, SINE):
            plant = refer(rig(machine))
            electrical = plant.power_factor * plant.back_emf * 100.0 * 3.0
            assert_quantity(plant.torque * 3.0 * 100.0, electrical, rtol=1e-15, unit="W", why=ROUNDING)

    @pytest.mark.parametrize(
        ("machine", "size"),
        [
            # P4: star: phase is half of line to line; a delta's equivalent star gives the same halves. Source: derived.
            (replace(SINE, winding_values=WindingValues.LINE_TO_LINE), 0.5),
            (SINE, 1.0),
            # Six-step: two phases in series conduct.
            (replace(BLOCK, winding_values=WindingValues.PHASE), 2.0),
            (BLOCK, 1.0),
            (BRUSHED, 1.0),
        ],
    )
    def test_winding_values(self, machine, size):
        plant = refer(rig(machine))
        assert winding_size(machine) == size
        assert plant.resistance == 0.6 * size
        assert plant.inductance == 0.45e-3 * size

    @pytest.mark.parametrize("stray", [WindingValues.LINE_TO_LINE, WindingValues.PHASE])
    def test_what_belongs_to_another_kind_is_not_used(self, stray):
        machine = replace(
            BRUSHED,
            winding_values=stray,
            current_values=CurrentValues.RMS,
            back_emf_values=BackEmfValues.LINE_TO_LINE_RMS,
        )
        assert refer(rig(machine)) == refer(rig(BRUSHED))

    def test_the_first_constant_given_is_used_and_all_are_told(self):
        machine = replace(BRUSHED, torque_constant=0.05, back_emf_constant=0.06, speed_constant=1.0 / 0.07)
        assert list(back_emf_candidates(machine)) == ["torque_constant", "back_emf_constant", "speed_constant"]
        assert refer(rig(machine)).back_emf == 0.05
        assert refer(rig(replace(machine, torque_constant=None))).back_emf == 0.06
        only_speed = replace(machine, torque_constant=None, back_emf_constant=None)
        assert_quantity(refer(rig(only_speed)).back_emf, 0.07, rtol=1e-15, unit="V*s/rad", why=ROUNDING)

    def test_a_sine_machine_has_no_speed_constant(self):
        assert "speed_constant" not in back_emf_candidates(replace(SINE, speed_constant=10.0))

    @pytest.mark.parametrize("kind", MachineKind)
    def test_without_a_constant_there_is_no_plant(self, kind):
        machine = replace(SINE, kind=kind, torque_constant=None)
        with pytest.raises(ValueError, match="torque_constant"):
            refer(rig(machine))


class TestLimits:
    def test_voltage_of_brushed_and_block_is_the_usable_bus(self):
        for machine in (BRUSHED, BLOCK):
            assert_quantity(refer(rig(machine)).voltage_limit, 0.95 * 48.0, rtol=1e-15, unit="V", why=ROUNDING)

    def test_voltage_of_sine_is_the_linear_limit_of_the_phase_peak(self):
        # P5: Vdc/sqrt(3) = .57735 Vdc with space vectors or zero sequence. Source: textbooks (from memory).
        stage = replace(STAGE, bus_voltage=100.0, voltage_use=1.0)
        assert_quantity(refer(rig(SINE, stage=stage)).voltage_limit, 57.735, atol=5e-4, unit="V", why=PRINTED)

    @pytest.mark.parametrize(("peak", "limit"), [(None, 20.0), (15.0, 15.0), (25.0, 20.0)])
    def test_current_is_the_smaller_of_stage_and_machine(self, peak, limit):
        assert refer(rig(replace(BRUSHED, peak_current=peak))).current_limit == limit
        rms = replace(SINE, peak_current=peak, current_values=CurrentValues.RMS)
        expected = limit * math.sqrt(2.0)
        assert_quantity(refer(rig(rms)).current_limit, expected, rtol=1e-15, unit="A", why=ROUNDING)

    def test_only_a_sine_sheet_in_rms_has_another_ampere(self):
        assert current_size(replace(SINE, current_values=CurrentValues.RMS)) == math.sqrt(2.0)
        assert current_size(SINE) == current_size(BLOCK) == current_size(BRUSHED) == 1.0


class TestTrain:
    def test_reflected_inertia_of_a_gear(self):
        # K4: J/N^2, .01/50^2 = 4e-6. Source: engineersedge.com gear page.
        plant = refer(rig(train=replace(RIGID, load_inertia=0.01, ratio=50.0)))
        assert_quantity(plant.inertia - 3.1e-5, 4e-6, rtol=1e-12, unit="kg*m^2", why="a difference of sums")

    @given(
        ratio=st.floats(0.05, 200.0),
        efficiency=st.floats(0.2, 1.0),
        kind=st.sampled_from(TrainKind),
        coupling=st.floats(0.0, 1e-3),
    )
    def test_reflection_keeps_energy_and_power(self, ratio, efficiency, kind, coupling):
        train = replace(
            ELASTIC,
            kind=kind,
            ratio=ratio,
            efficiency=efficiency,
            coupling_inertia=coupling,
            load_viscous_friction=2e-3,
            load_coulomb_friction=0.04,
        )
        machine = replace(BRUSHED, viscous_friction=2e-5, coulomb_friction=0.012)
        plant = refer(rig(machine, train=train))
        w = 100.0
        at_load = w / ratio
        tight = {"rtol": 1e-13, "why": ROUNDING}
        kinetic = 0.5 * (3.1e-5 + coupling) * w**2 + 0.5 * 3.6e-4 * at_load**2
        assert_quantity(0.5 * plant.inertia * w**2, kinetic, unit="J", **tight)
        assert_quantity(plant.viscous * w**2, 2e-5 * w**2 + 2e-3 * at_load**2, unit="W", **tight)
        assert_quantity(plant.coulomb * w, 0.012 * w + 0.04 * at_load / efficiency, unit="W", **tight)
        assert_quantity(plant.braking_torque(0.3) * w * efficiency, 0.3 * at_load, unit="W", **tight)
        assert_quantity(plant.driving_torque(0.3) * w, 0.3 * at_load * efficiency, unit="W", **tight)
        if kind is TrainKind.ELASTIC:
            assert_quantity(0.5 * plant.stiffness * 0.1**2, 0.5 * 45.0 * (0.1 / ratio) ** 2, unit="J", **tight)
            assert_quantity(plant.damping * w**2, 9e-3 * at_load**2, unit="W", **tight)

    def test_a_rigid_train_is_one_body_and_ignores_the_shaft(self):
        plant = refer(rig(train=replace(ELASTIC, kind=TrainKind.RIGID)))
        assert not plant.elastic
        assert plant.load_inertia == plant.load_viscous == plant.load_coulomb == plant.stiffness == plant.damping == 0.0

    def test_an_elastic_train_keeps_each_sides_friction(self):
        machine = replace(BRUSHED, viscous_friction=2e-5, coulomb_friction=0.012)
        train = replace(ELASTIC, coupling_inertia=1e-6, load_viscous_friction=3e-3, load_coulomb_friction=0.04)
        plant = refer(rig(machine, train=train))
        assert (plant.motor_viscous, plant.motor_coulomb) == (2e-5, 0.012)
        assert (plant.load_viscous, plant.load_coulomb, plant.load_inertia) == (3e-3, 0.04, 3.6e-4)
        assert_quantity(plant.motor_inertia, 3.2e-5, rtol=1e-15, unit="kg*m^2", why=ROUNDING)

    @pytest.mark.parametrize("missing", ["shaft_stiffness", "shaft_damping"])
    def test_an_elastic_train_needs_its_shaft(self, missing):
        with pytest.raises(ValueError, match="shaft"):
            refer(rig(train=replace(ELASTIC, **{missing: None})))


def two_masses(motor: float, load: float, *, stiffness: float, damping: float = 0.0) -> Plant:
    """Two bodies, the electrical side all but cut off."""
    train = Train(kind=TrainKind.ELASTIC, load_inertia=load, shaft_stiffness=stiffness, shaft_damping=damping)
    return refer(rig(replace(BRUSHED, rotor_inertia=motor, torque_constant=1e-12), train=train))


def oscillation(values: np.ndarray) -> complex:
    """The one eigenvalue above the real axis."""
    (found,) = values[values.imag > 1e-3]
    return complex(found)


class TestElasticModes:
    def test_resonance_and_antiresonance(self):
        # K1: JM = 1e-3, JL = 2e-3, k = 100: 223.607 and 387.298 rad/s, ratio sqrt(1 + JL/JM).
        # Source: Zhang & Furusho, IEEE Trans. Ind. Electron. 47(3), 2000 (from memory).
        plant = two_masses(1e-3, 2e-3, stiffness=100.0)
        pole = oscillation(np.linalg.eigvals(state_space(plant).a))
        zero = oscillation(np.linalg.eigvals(state_space(plant, locked=True).a))
        assert_quantity(pole.imag, 387.298, atol=5e-4, unit="rad/s", why=PRINTED)
        assert_quantity(zero.imag, 223.607, atol=5e-4, unit="rad/s", why=PRINTED)
        assert_quantity(pole.imag / zero.imag, math.sqrt(3.0), rtol=1e-9, unit="1", why="two eigenvalues")

    def test_two_equal_masses_on_a_unit_spring(self):
        # K2: m1 = m2 = k = 1 has modes 0, 0, +-j sqrt(2).
        # Source: Wie & Bernstein's benchmark, American Control Conference (matrix read on a course page of NSYSU).
        found = np.linalg.eigvals(state_space(two_masses(1.0, 1.0, stiffness=1.0)).a)
        assert_quantity(oscillation(found).imag, math.sqrt(2.0), rtol=1e-12, unit="rad/s", why=ROUNDING)

    def test_damped_poles_and_zeros(self):
        # K3: k = 100, c = .01: poles -7.5 +- 387.226j, zeros -2.5 +- 223.593j. Source: derived.
        plant = two_masses(1e-3, 2e-3, stiffness=100.0, damping=0.01)
        pole = oscillation(np.linalg.eigvals(state_space(plant).a))
        zero = oscillation(np.linalg.eigvals(state_space(plant, locked=True).a))
        assert_quantity([pole.real, pole.imag], [-7.5, 387.226], atol=5e-4, unit="rad/s", why=PRINTED)
        assert_quantity([zero.real, zero.imag], [-2.5, 223.593], atol=5e-4, unit="rad/s", why=PRINTED)


PLANTS = st.builds(
    lambda machine, kind, filter_time, ratio, viscous, load_viscous: refer(
        rig(
            replace(machine, viscous_friction=viscous),
            train=replace(ELASTIC, kind=kind, ratio=ratio, load_viscous_friction=load_viscous),
            stage=replace(STAGE, current_filter=filter_time),
        )
    ),
    machine=st.sampled_from([BRUSHED, BLOCK, SINE]),
    kind=st.sampled_from(TrainKind),
    filter_time=st.sampled_from([0.0, 8e-6]),
    ratio=st.floats(0.2, 20.0),
    viscous=st.floats(0.0, 1e-3),
    load_viscous=st.floats(0.0, 1e-2),
)


class TestStateSpace:
    @given(plant=PLANTS, seed=st.integers(0, 2**32 - 1))
    def test_energy_in_is_energy_stored_and_lost(self, plant, seed):
        # d/dt of the stored energy, 3/2 of the electrical part for the q axis, against every power that crosses.
        system = state_space(plant)
        random = np.random.default_rng(seed)
        x = random.uniform(-1.0, 1.0, system.a.shape[0])
        u = random.uniform(-1.0, 1.0, 3)
        slope = system.a @ x + system.b @ u
        i, w, load = x[system.current], x[system.speed], x[system.load_speed]
        stored = [
            plant.power_factor * plant.inductance * i * slope[system.current],
            plant.motor_inertia * w * slope[system.speed],
        ]
        powers = [
            plant.power_factor * u[0] * i,
            -plant.power_factor * plant.resistance * i**2,
            -plant.motor_viscous * w**2,
            -u[1] * w,
            -u[2] * load,
        ]
        if plant.elastic:
            twist = x[system.twist]
            stored += [
                plant.load_inertia * load * slope[system.load_speed],
                plant.stiffness * twist * slope[system.twist],
            ]
            powers += [-plant.load_viscous * load**2, -plant.damping * (w - load) ** 2]
        size = max(abs(term) for term in stored + powers)
        assert_quantity(sum(stored), sum(powers), atol=1e-13 * size, unit="W", why=ROUNDING)

    @given(plant=PLANTS)
    def test_no_mode_grows(self, plant):
        # A passive plant; the free angle stands at 0, with an eigenvalue's rounding of the largest.
        found = np.linalg.eigvals(state_space(plant).a)
        assert np.max(found.real) <= 1e-11 * np.max(np.abs(found))

    @given(plant=PLANTS.filter(lambda plant: not plant.elastic))
    def test_rigid_poles_are_those_of_the_quadratic(self, plant):
        system = state_space(plant)
        electrical, friction = plant.resistance / plant.inductance, plant.viscous / plant.inertia
        coupling = plant.torque * plant.back_emf / (plant.inductance * plant.inertia)
        expected = [0.0, *np.roots([1.0, electrical + friction, electrical * friction + coupling])]
        if plant.filter_time > 0.0:
            expected.append(-1.0 / plant.filter_time)
        found = np.sort_complex(np.linalg.eigvals(system.a))
        expected = np.sort_complex(np.array(expected, dtype=complex))
        scale = float(np.max(np.abs(expected)))
        why = "eigenvalues to the size of the largest"
        assert_quantity(found.real, expected.real, atol=1e-11 * scale, unit="rad/s", why=why)
        assert_quantity(found.imag, expected.imag, atol=1e-11 * scale, unit="rad/s", why=why)

    def test_locked_rotor_current_reaches_its_share_at_one_time_constant(self):
        # C2: 63.2 % of the stall current at L/R, 99.326 % at 5 L/R (K11). Source: Bodine, Motor constants; closed form.
        plant = refer(rig(stage=replace(STAGE, current_filter=8e-6)))
        system = state_space(plant, locked=True)
        stall = 10.0 / plant.resistance
        for periods, share in ((1.0, 0.6321206), (5.0, 0.99326)):
            state = step_state(system.a, system.b[:, 0] * 10.0, periods * plant.inductance / plant.resistance)
            assert_quantity(state[system.current] / stall, share, atol=5e-6, unit="1", why=PRINTED)
            assert state[system.speed] == state[system.angle] == 0.0

    def test_unloaded_motor_reaches_its_share_of_the_no_load_speed_at_the_mechanical_time(self):
        # C2: tau_m = R J/(Kt Ke), to 63.2 % of the no-load speed. Source: Bodine, Motor constants (from memory).
        plant = refer(rig(replace(BRUSHED, inductance=1e-9), train=replace(RIGID, load_inertia=0.0)))
        system = state_space(plant)
        mechanical = 0.6 * 3.1e-5 / 0.052**2
        state = step_state(system.a, system.b[:, 0] * 10.0, mechanical)
        why = "the inductance left in shifts it by L/(R tau_m) of itself"
        assert_quantity(state[system.speed] * 0.052 / 10.0, 0.6321206, atol=1e-6, unit="1", why=why)

    def test_sampled_current_is_behind_the_filter_where_there_is_one(self):
        plain = state_space(refer(rig()))
        assert plain.sampled_current == plain.current
        filtered = state_space(refer(rig(stage=replace(STAGE, current_filter=1e-5))))
        slope = filtered.a @ unit_vector(filtered.a.shape[0], filtered.current)
        assert filtered.sampled_current != filtered.current
        assert_quantity(slope[filtered.sampled_current], 1e5, rtol=1e-15, unit="A/s", why=ROUNDING)

    @pytest.mark.parametrize("train", [RIGID, ELASTIC])
    def test_signs(self, train):
        # Positive voltage gives positive current, that accelerates forward; positive torques brake; counts then rise.
        system = state_space(refer(rig(train=train)))
        count = system.a.shape[0]
        assert system.b[system.current, 0] > 0.0
        assert system.a[system.speed, system.current] > 0.0
        assert system.a[system.current, system.speed] < 0.0
        assert system.b[system.speed, 1] < 0.0
        assert system.b[system.load_speed, 2] < 0.0
        assert np.array_equal(system.a[system.angle], unit_vector(count, system.speed))
        assert not system.a[:, system.angle].any()

    def test_a_locked_rotor_leaves_the_load_to_swing(self):
        system = state_space(refer(rig(train=ELASTIC)), locked=True)
        assert not system.a[system.speed].any()
        assert not system.a[system.angle].any()
        assert not system.b[system.speed].any()
        assert system.a[system.load_speed, system.twist] == 45.0 / 3.6e-4

    def test_arrays_are_read_only(self):
        system = state_space(refer(rig()))
        for array in (system.a, system.b):
            with pytest.raises(ValueError, match="read-only"):
                array[0, 0] = 1.0


def unit_vector(count: int, place: int) -> np.ndarray:
    return np.eye(count)[place]


def step_state(a: np.ndarray, drive: np.ndarray, time: float) -> np.ndarray:
    """State after a constant drive from rest: the exponential of the system with its input as one more state."""
    count = a.shape[0]
    joint = np.zeros((count + 1, count + 1))
    joint[:count, :count], joint[:count, count] = a, drive
    return expm(joint * time)[:count, count]
