"""The one path from a bench sheet to all that follows from it: window, commands, reports and tests share it."""

from __future__ import annotations

from dataclasses import dataclass

from gainbench.findings import Case, judge
from gainbench.kernels.code_cache import code_cache
from gainbench.margins import locked_step, read_loop
from gainbench.model import (
    Aims,
    DesignMethod,
    Duty,
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
)
from gainbench.plant import Plant, refer
from gainbench.results import Finding, LockedStep, LoopAssessment, Response
from gainbench.sampling import Loop, current_loop, hardware, speed_loop
from gainbench.simulate import simulate, start_breaks, warm_up_response
from gainbench.tuning import Design, design_current, design_speed

_SLOWEST = ("loop_figures", "response")
"""The kernels that take longest to compile, and are compiled last."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Assessment:
    """All that follows from one sheet."""

    sheet: Sheet
    plant: Plant
    current: LoopAssessment
    speed: LoopAssessment
    locked_step: LockedStep | None
    """None without a stable current loop."""
    response: Response | None
    """None without two stable loops, or where the start is over a limit."""
    findings: tuple[Finding, ...]


def assess(sheet: Sheet, *, simulated: bool = True) -> Assessment:
    """Assess a sheet: plant, gains, margins of the sampled loops, response of the duty, findings.

    A pure function: the same sheet gives an equal assessment, and nothing is remembered between calls.

    Parameters
    ----------
    sheet : Sheet
        As it was read, or made of the model's classes.
    simulated : bool
        False leaves out what is simulated, the locked step and the response, and the findings that rest on them.

    Returns
    -------
    Assessment
        SI; targets that cannot be met, unstable loops and limits are findings, never errors.
    """
    plant, stage, firmware = refer(sheet.rig), sheet.rig.stage, sheet.aims.firmware
    own = hardware(plant, stage)
    inner = current_loop(own, firmware)
    current = _loop_assessment(design_current(sheet.aims.current, plant, stage=stage, loop=inner), inner)
    outer = None
    if current.gains is not None:
        outer = speed_loop(own, plant, stage=stage, firmware=firmware, current=current.gains)
    speed = _loop_assessment(
        design_speed(sheet.aims.speed, plant, stage=stage, loop=outer, current=current.figures), outer
    )
    start_problem = start_breaks(plant, sheet.rig.train.load_torque)
    locked = response = None
    if simulated and current.gains is not None and _stable(current):
        locked = locked_step(own, plant, gains=current.gains, rule=inner.rule)
        if speed.gains is not None and _stable(speed) and start_problem is None:
            response = simulate(
                plant,
                stage,
                firmware,
                sheet.duty,
                load_torque=sheet.rig.train.load_torque,
                reference_weight=sheet.aims.speed.reference_weight,
                current=current.gains,
                speed=speed.gains,
            )
    findings = judge(
        Case(
            sheet=sheet,
            plant=plant,
            current=current,
            speed=speed,
            locked_step=locked,
            response=response,
            start_problem=start_problem,
        )
    )
    return Assessment(
        sheet=sheet,
        plant=plant,
        current=current,
        speed=speed,
        locked_step=locked,
        response=response,
        findings=findings,
    )


def _loop_assessment(design: Design, loop: Loop | None) -> LoopAssessment:
    if design.gains is None or loop is None:
        return LoopAssessment(
            gains=design.gains,
            figures=None,
            curve=None,
            refusal=design.refusal,
            asked_crossover=design.asked_crossover,
        )
    reading = read_loop(loop, design.gains, stable=design.stable)
    return LoopAssessment(
        gains=design.gains,
        figures=reading.figures,
        curve=reading.curve,
        asked_crossover=design.asked_crossover,
    )


def _stable(loop: LoopAssessment) -> bool:
    return loop.figures is not None and loop.figures.stable


def is_compiled() -> bool:
    """Whether the machine code of the kernels is on disk, so that the first assessment takes no minute.

    Returns
    -------
    bool
    """
    return all(code_cache(name).is_dir() for name in _SLOWEST)


def warm_up(*, simulated: bool = True) -> None:
    """Compile, or load from the disk cache, the kernels of :func:`assess` and of the words of its findings.

    Takes seconds once per machine and parts of a second afterwards; a window calls it off its own thread. Until then
    the first call of :func:`assess` pays.

    Parameters
    ----------
    simulated : bool
        False compiles only what ``assess(sheet, simulated=False)`` calls.
    """
    for method in (DesignMethod.CROSSOVER_MARGIN, DesignMethod.BANDWIDTH_MARGIN):
        # Findings are worded when they are read, and those of thin margins look for what costs most.
        "".join(one.text for one in assess(_small_sheet(method), simulated=simulated).findings)
    if simulated:
        warm_up_response()


def _small_sheet(method: DesignMethod) -> Sheet:
    """A small drive of no particular kind with thin margins, by one method for its current loop."""
    return Sheet(
        title="",
        rig=Rig(
            machine=Machine(
                kind=MachineKind.BRUSHED_DC,
                resistance=1.0,
                inductance=1e-3,
                rotor_inertia=1e-4,
                torque_constant=0.1,
                coulomb_friction=1e-3,
            ),
            train=Train(kind=TrainKind.RIGID, load_inertia=1e-4),
            stage=Stage(
                bus_voltage=24.0,
                current_limit=5.0,
                pwm_frequency=1e4,
                current_rate=1e4,
                speed_rate=1e3,
                speed_sensor=SpeedSensor.ENCODER,
                encoder_counts=1000,
            ),
        ),
        aims=Aims(
            current=LoopAims(method=method, crossover=3000.0, bandwidth=5000.0, phase_margin=0.7),
            speed=SpeedAims(method=DesignMethod.CROSSOVER_MARGIN, crossover=100.0, phase_margin=0.7),
        ),
        duty=Duty(reference_speed=10.0, length=0.02),
    )
