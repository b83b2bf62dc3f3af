"""A bench on which nothing is thin, and a way to change one thing on it."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from typing import Any, ClassVar

import numpy as np
import pytest

from gainbench.findings import Case, judge
from gainbench.model import (
    Aims,
    CurrentValues,
    DesignMethod,
    Duty,
    Firmware,
    LoopAims,
    Machine,
    MachineKind,
    Rig,
    Sheet,
    SpeedAims,
    SpeedSensor,
    Stage,
    Train,
    TrainKind,
    WindingValues,
)
from gainbench.plant import refer
from gainbench.results import (
    Finding,
    Gains,
    LockedStep,
    LoopAssessment,
    LoopCurve,
    LoopFigures,
    Response,
    ResponseFigures,
    Trace,
)

RPM = np.pi / 30.0
Changes = Mapping[str, Any] | None

MACHINE = Machine(
    kind=MachineKind.BRUSHED_DC,
    resistance=0.6,
    inductance=0.45e-3,
    torque_constant=0.052,
    rotor_inertia=31e-6,
    viscous_friction=20e-6,
    coulomb_friction=12e-3,
    rated_voltage=48.0,
    rated_current=6.5,
    peak_current=20.0,
    max_speed=6000.0 * RPM,
)
TRAIN = Train(kind=TrainKind.RIGID, load_inertia=3.6e-4, ratio=3.0)
STAGE = Stage(
    bus_voltage=48.0,
    current_limit=20.0,
    pwm_frequency=20e3,
    current_rate=20e3,
    speed_rate=2e3,
    speed_sensor=SpeedSensor.ENCODER,
    encoder_counts=65536,
)
DUTY = Duty(reference_speed=1500.0 * RPM, reference_at=0.02, load_step=0.06, load_at=0.25, length=0.45)
CURRENT_AIMS = LoopAims(
    method=DesignMethod.CROSSOVER_MARGIN, crossover=2.0 * np.pi * 1000.0, phase_margin=np.radians(60.0)
)
SPEED_AIMS = SpeedAims(
    method=DesignMethod.CROSSOVER_MARGIN, crossover=2.0 * np.pi * 60.0, phase_margin=np.radians(60.0)
)
CURRENT_FIGURES = LoopFigures(
    stable=True,
    crossover_hz=1000.0,
    phase_margin_deg=60.0,
    delay_margin_s=167e-6,
    gain_margin_db=10.1,
    peak_sensitivity=1.56,
    bandwidth_hz=1600.0,
)
SPEED_FIGURES = LoopFigures(
    stable=True,
    crossover_hz=60.0,
    phase_margin_deg=60.0,
    delay_margin_s=2.78e-3,
    gain_margin_db=17.2,
    peak_sensitivity=1.24,
    bandwidth_hz=100.0,
)
RESPONSE_FIGURES = ResponseFigures(
    overshoot_percent=3.4,
    rise_time_s=9e-3,
    settling_time_s=23e-3,
    load_dip_rad_s=0.7,
    recovery_time_s=0.0,
    peak_current_a=18.0,
    rms_current_a=2.5,
    peak_voltage_v=30.0,
    current_limited_s=0.0,
    voltage_limited_s=0.0,
    returned_energy_j=0.0,
)
LOCKED_STEP = LockedStep(
    rise_s=0.2e-3, overshoot_percent=12.0, time=np.array([0.0, 1e-3]), current=np.array([0.0, 1.0])
)


def curve(
    crossover_hz: float, *, delay: float, nyquist: float, bumps: tuple[tuple[float, float], ...] = ()
) -> LoopCurve:
    """An integrator with a delay, lifted by a factor around each of some frequencies."""
    frequency = np.geomspace(crossover_hz / 100.0, nyquist, 801)
    loop = crossover_hz / (1j * frequency) * np.exp(-2j * np.pi * frequency * delay)
    for centre, factor in bumps:
        loop = loop * (1.0 + (factor - 1.0) * np.exp(-((np.log(frequency / centre) / 0.05) ** 2)))
    return LoopCurve(frequency_hz=frequency, open_loop=loop)


def trace(duty: Duty, stage: Stage) -> Trace:
    """A speed that is its reference at once, without current or clamp."""
    time = np.arange(round(duty.length * stage.current_rate)) / stage.current_rate
    reference = np.where(time >= duty.reference_at - 1e-12, duty.reference_speed, 0.0)
    if duty.stop_at is not None:
        reference = np.where(time >= duty.stop_at - 1e-12, 0.0, reference)
    still = np.zeros_like(time)
    never = np.zeros(time.shape, dtype=np.bool_)
    return Trace(
        time=time,
        reference=reference,
        speed=reference,
        load_speed=reference,
        current=still,
        current_reference=still,
        voltage=still,
        current_clamped=never,
        voltage_clamped=never,
    )


class Bench:
    """Cases that differ from the quiet one in what a test names."""

    rpm = RPM
    pm_sine: ClassVar[Changes] = {
        "kind": MachineKind.PM_SINE,
        "pole_pairs": 4,
        "winding_values": WindingValues.PHASE,
        "current_values": CurrentValues.RMS,
    }
    pm_block: ClassVar[Changes] = {
        "kind": MachineKind.PM_BLOCK,
        "pole_pairs": 4,
        "winding_values": WindingValues.LINE_TO_LINE,
    }
    elastic: ClassVar[Changes] = {"kind": TrainKind.ELASTIC, "shaft_stiffness": 960.0, "shaft_damping": 0.1}
    unstable = LoopFigures(stable=False)
    curve = staticmethod(curve)

    def case(
        self,
        *,
        machine: Changes = None,
        train: Changes = None,
        stage: Changes = None,
        duty: Changes = None,
        firmware: Changes = None,
        current_aims: Changes = None,
        speed_aims: Changes = None,
        current: Changes = None,
        speed: Changes = None,
        current_loop: Changes = None,
        speed_loop: Changes = None,
        response: Changes = None,
        traces: Changes = None,
        locked: Changes = None,
        without_response: bool = False,
        start_problem: str | None = None,
    ) -> Case:
        """The quiet case with fields changed: ``current`` and ``speed`` are the loops' figures."""
        rig = Rig(
            machine=replace(MACHINE, **(machine or {})),
            train=replace(TRAIN, **(train or {})),
            stage=replace(STAGE, **(stage or {})),
        )
        run = replace(DUTY, **(duty or {}))
        sheet = Sheet(
            title="Quiet bench",
            rig=rig,
            aims=Aims(
                current=replace(CURRENT_AIMS, **(current_aims or {})),
                speed=replace(SPEED_AIMS, **(speed_aims or {})),
                firmware=replace(Firmware(), **(firmware or {})),
            ),
            duty=run,
        )
        inner = LoopAssessment(
            gains=Gains(kp=2.66, ki=4681.0),
            figures=replace(CURRENT_FIGURES, **(current or {})),
            curve=curve(1000.0, delay=75e-6, nyquist=10e3),
            asked_crossover=2.0 * np.pi * 1000.0,
        )
        outer = LoopAssessment(
            gains=Gains(kp=0.481, ki=57.6),
            figures=replace(SPEED_FIGURES, **(speed or {})),
            curve=curve(60.0, delay=1e-3, nyquist=1e3),
            asked_crossover=2.0 * np.pi * 60.0,
        )
        return Case(
            sheet=sheet,
            plant=refer(rig),
            current=replace(inner, **(current_loop or {})),
            speed=replace(outer, **(speed_loop or {})),
            locked_step=replace(LOCKED_STEP, **(locked or {})),
            response=None
            if without_response
            else Response(
                trace=replace(trace(run, rig.stage), **(traces or {})),
                figures=replace(RESPONSE_FIGURES, **(response or {})),
            ),
            start_problem=start_problem,
        )

    def judged(self, **changes: Any) -> dict[str, Finding]:
        """What is found on the changed bench, by code."""
        found = judge(self.case(**changes))
        assert len({one.code for one in found}) == len(found)
        return {one.code: one for one in found}

    def one(self, code: str, **changes: Any) -> Finding:
        """The finding of that code, whole: a number, a reason, and something to try unless it holds."""
        found = self.judged(**changes)
        assert code in found, sorted(found)
        finding = found[code]
        assert re.fullmatch(r"[a-z]+(-[a-z]+)*", finding.code)
        assert finding.title
        assert finding.reason
        assert finding.advice or finding.level == "holds"
        for part in (finding.title, finding.reason, finding.advice):
            assert not part.endswith((".", " "))
            assert "  " not in part
        return finding

    def only(self, code: str, **changes: Any) -> Finding:
        """The same, where nothing else is found beside what holds."""
        finding = self.one(code, **changes)
        rest = {one.code for one in self.judged(**changes).values() if one.level != "holds"}
        assert rest == {code}
        return finding

    def silent(self, code: str, **changes: Any) -> None:
        """That finding is not there, and the judgement is."""
        found = self.judged(**changes)
        assert found
        assert code not in found


@pytest.fixture(scope="session")
def bench() -> Bench:
    """The quiet bench; it keeps nothing between tests."""
    return Bench()
