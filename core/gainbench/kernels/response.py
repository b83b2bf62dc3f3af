"""The tick loop: the two PI controllers with their sampling, sensors and delays, around the exact plant."""

from __future__ import annotations

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.bodies import depart, eventless, inputs_of, resting_bodies
from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.motion import (
    FIRST,
    SECOND,
    change,
    flow_matrix,
    prepare_motion,
    read_flow,
    read_segments,
    stride,
)
from gainbench.kernels.pi import pi_step
from gainbench.kernels.response_records import (
    Drag,
    Flow,
    Heading,
    Motion,
    PiInputs,
    PiState,
    PlantState,
    Run,
    Sampling,
    Script,
    Step,
    Tally,
)
from gainbench.kernels.series import build_series, charge_to_zero, series_energy, sign_kept
from gainbench.kernels.travel import travel

REFERENCE = 0
SPEED = 1
CURRENT = 2
CURRENT_REFERENCE = 3
VOLTAGE = 4
TIME = 5
LOAD_SPEED = 6
"""Rows of the traces; the last is there only with an elastic train."""

CURRENT_CLAMPED = 0
VOLTAGE_CLAMPED = 1
"""Rows of the flags."""


@inlined
def reference_at(script: Script, tick: int, time: float) -> float:
    """The speed reference that a speed tick reads [rad/s]."""
    if tick < script.reference_tick:
        return 0.0
    if tick >= script.stop_tick:
        size = 0.0
        if script.stop_ramp > 0.0:
            size = max(0.0, script.stop_size - script.stop_ramp * max(0.0, time - script.stop_at))
    else:
        size = abs(script.reference)
        if script.ramp > 0.0:
            size = min(size, script.ramp * max(0.0, time - script.reference_at))
    return size if script.reference >= 0.0 else -size


@inlined
def voltage_room(sampling: Sampling, speed: float, current: float) -> float:
    """What the clamp leaves to the voltage: on the q axis what the d axis leaves of it [V]."""
    if sampling.reactance == 0.0:
        return sampling.voltage_limit
    across = sampling.reactance * speed * current
    square = sampling.voltage_limit * sampling.voltage_limit - across * across
    return float(np.sqrt(square)) if square > 0.0 else 0.0


SURE = 0
TURNS = 1
UNSURE = 2


@inlined
def glide(
    step: Step, flow: Flow, drag: Drag, heading: Heading, x: PlantState, voltage: float
) -> tuple[int, PlantState, float]:
    """Take one step in one mode: what came of it, the state after it, the energy given back [J].

    SURE: nothing happened. TURNS: no body left the mode, but the current may have changed its sign, so that the energy
    is to be found otherwise. UNSURE: a body may have left the mode.
    """
    u = inputs_of(drag, heading, voltage)
    y = stride(step, flow, x, u)
    if not eventless(flow, drag, heading, x, y, u, step.width):
        return UNSURE, y, 0.0
    kept = sign_kept(flow, x, y, voltage, step.width)
    if kept > 0:
        return SURE, y, 0.0
    return (SURE if kept < 0 else TURNS), y, -voltage * change(step.charge, flow.elastic, x, u)


@inlined
def turning_energy(
    motion: Motion, step: Step, flow: Flow, drag: Drag, heading: Heading, x: PlantState, y: PlantState, voltage: float
) -> float:
    """Energy given back over a step in one mode, from x to y, in which the current changes its sign [J]."""
    u = inputs_of(drag, heading, voltage)
    build_series(motion.series, flow, resting_bodies(flow, heading), x, u, step.width)
    pushed = flow.iv * voltage
    slope = flow.ii * x.current + flow.iw * x.speed + pushed
    slope_after = flow.ii * y.current + flow.iw * y.speed + pushed
    if x.current * y.current < 0.0 and slope * slope_after > 0.0:
        charge = charge_to_zero(motion.series, y.current)
        if voltage * x.current > 0.0:
            charge = change(step.charge, flow.elastic, x, u) - charge
        return -voltage * charge
    return series_energy(motion.series, voltage, 1.0)


@compiled
def respond(
    run: Run,
    traces: NDArray[np.float64],
    flags: NDArray[np.bool_],
) -> Tally:
    """Run the duty tick by tick.

    At a speed tick the speed is measured and the speed PI gives a new current reference, which acts
    ``reference_delay`` ticks later. At every tick the current is sampled and the current PI gives a new voltage, which
    acts ``held_ticks + held_part`` periods later. Between, the plant moves exactly.

    Parameters
    ----------
    run : Run
        Plant, sampling, controllers, duty and start.
    traces : ndarray, shape (6 or 7, ticks)
        Filled, by the rows named above.
    flags : ndarray, shape (2, ticks)
        Filled: whether each clamp acted.

    Returns
    -------
    Tally
        Sums and peaks of the whole duty.
    """
    layout, sampling, script, start = run.layout, run.sampling, run.script, run.start
    first = sampling.held_part * sampling.period
    matrix = flow_matrix(run.plant[0], run.plant[1], layout)
    flow = read_flow(matrix, layout.load_speed >= 0)
    motion = prepare_motion(matrix, first, sampling.period - first)
    filtered = layout.filtered >= 0

    drag = run.drags[0]
    x = PlantState(start.current, 0.0, start.current if filtered else 0.0, 0.0, start.twist, 0.0)
    heading = depart(flow, drag, x)
    resting = resting_bodies(flow, heading)
    steps = read_segments(motion, resting)
    fresh = True

    current_pi = PiState(start.voltage, 0.0)
    speed_pi = PiState(start.current, 0.0)
    newest = held = older = oldest = start.voltage
    measured = 0.0
    reference = 0.0
    current_reference = next_reference = start.current
    current_clamped = False

    encoder = sampling.counts_per_radian > 0.0
    counts = np.zeros(sampling.window)
    counted = 0
    per_count = 0.0
    if encoder:
        per_count = 1.0 / (sampling.counts_per_radian * sampling.window * sampling.divisor * sampling.period)

    peak_current = squares = peak_voltage = given = 0.0
    current_clamps = voltage_clamps = 0
    to_speed_tick = 0
    for tick in range(sampling.ticks):
        if to_speed_tick == 0:
            to_speed_tick = sampling.divisor
            if encoder:
                count = np.floor(x.angle * sampling.counts_per_radian + 0.5)
                raw = (count - counts[counted]) * per_count
                counts[counted] = count
                counted += 1
                if counted == sampling.window:
                    counted = 0
            else:
                raw = x.speed
            measured += sampling.filter_gain * (raw - measured)
            reference = reference_at(script, tick, tick * sampling.period)
            speed_pi, asked = pi_step(
                run.speed_law, speed_pi, PiInputs(reference, measured, 0.0, sampling.current_limit)
            )
            next_reference, current_clamped = asked.value, asked.clamped
            if current_clamped:
                current_clamps += 1
        if sampling.divisor - to_speed_tick == sampling.reference_delay:
            current_reference = next_reference
        to_speed_tick -= 1

        sample = x.filtered if filtered else x.current
        room = voltage_room(sampling, measured, sample)
        current_pi, output = pi_step(
            run.current_law, current_pi, PiInputs(current_reference, sample, sampling.feedforward * measured, room)
        )
        oldest, older, held, newest = older, held, newest, output.value
        if output.clamped:
            voltage_clamps += 1

        traces[REFERENCE, tick] = reference
        traces[SPEED, tick] = x.speed
        traces[CURRENT, tick] = x.current
        traces[CURRENT_REFERENCE, tick] = current_reference
        traces[VOLTAGE, tick] = output.value
        traces[TIME, tick] = tick * sampling.period
        if flow.elastic:
            traces[LOAD_SPEED, tick] = x.load_speed
        flags[CURRENT_CLAMPED, tick] = current_clamped
        flags[VOLTAGE_CLAMPED, tick] = output.clamped
        peak_current = max(peak_current, abs(x.current))
        peak_voltage = max(peak_voltage, abs(output.value))
        squares += x.current * x.current

        if tick == script.load_tick:
            drag = run.drags[1]
            fresh = True
        if first > 0.0:
            voltage = held if sampling.held_ticks == 0 else (older if sampling.held_ticks == 1 else oldest)
            came, y, back = glide(steps.first, flow, drag, heading, x, voltage)
            if came == SURE and not fresh:
                x = y
            elif came == TURNS and not fresh and motion.fine == 0:
                back = turning_energy(motion, steps.first, flow, drag, heading, x, y, voltage)
                x = y
            else:
                heading, x, back = travel(motion, flow, drag, int(FIRST), x, voltage)
                fresh = False
                if resting != resting_bodies(flow, heading):
                    resting = resting_bodies(flow, heading)
                    steps = read_segments(motion, resting)
            given += back
        voltage = newest if sampling.held_ticks == 0 else (held if sampling.held_ticks == 1 else older)
        came, y, back = glide(steps.second, flow, drag, heading, x, voltage)
        if came == SURE and not fresh:
            x = y
        elif came == TURNS and not fresh and motion.fine == 0:
            back = turning_energy(motion, steps.second, flow, drag, heading, x, y, voltage)
            x = y
        else:
            heading, x, back = travel(motion, flow, drag, int(SECOND), x, voltage)
            fresh = False
            if resting != resting_bodies(flow, heading):
                resting = resting_bodies(flow, heading)
                steps = read_segments(motion, resting)
        given += back
    return Tally(peak_current, squares, peak_voltage, current_clamps, voltage_clamps, given)
