"""The tick loop: the two PI controllers with their sampling, sensors and delays, around the exact plant."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.bodies import depart
from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.gliding import SIZE, fill_table, glide, strays
from gainbench.kernels.motion import FIRST, SECOND, flow_matrix, prepare_motion, read_flow
from gainbench.kernels.pi import pi_step
from gainbench.kernels.response_figures import size_figures
from gainbench.kernels.response_records import (
    BACKWARD,
    PiInputs,
    PiLaw,
    PiState,
    PlantState,
    Run,
    Sampling,
    Script,
    Tally,
)
from gainbench.kernels.returned import LOGGED, new_log, note_segment, returned_energy
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


@inlined
def plain_law(law: PiLaw) -> PiLaw:
    """The law of the backward rule, its rule known to the compiler."""
    return PiLaw(law.kp, law.ki_period, law.weight, int(np.int64(BACKWARD)), law.hold, law.relief)


@inlined
def voltage_of(held_ticks: int, newest: float, held: float, older: float) -> float:
    """The voltage that acts when an update takes ``held_ticks`` whole periods [V]."""
    return newest if held_ticks == 0 else (held if held_ticks == 1 else older)


NONE = np.int64(-1)
"""No segment."""


def tick_loop(elastic: bool, plain: bool) -> Callable[[Run, NDArray[np.float64], NDArray[np.bool_]], Tally]:
    """The tick loop for one kind of drive, of the one source below; its machine code leaves out what the kind has not.

    Parameters
    ----------
    elastic : bool
        Whether the train is.
    plain : bool
        Whether :func:`is_plain` holds of its drives.

    Returns
    -------
    callable
        As :func:`respond`.
    """

    # A written truth is a type of its own to the compiler: what is called with it would be compiled for either.
    has_shaft = np.bool_(elastic)

    @compiled
    def run_ticks(run: Run, traces: NDArray[np.float64], flags: NDArray[np.bool_]) -> Tally:
        layout, sampling, script, start = run.layout, run.sampling, run.script, run.start
        sprung = bool(has_shaft)
        filtered = layout.filtered >= 0 and not plain
        first = 0.0 if plain else sampling.held_part * sampling.period
        held_ticks = 1 if plain else sampling.held_ticks
        current_law = plain_law(run.current_law) if plain else run.current_law
        motion = prepare_motion(flow_matrix(run.plant[0], run.plant[1], layout), first, sampling.period - first)

        drag = run.drags[0]
        x = PlantState(start.current, 0.0, start.current if filtered else 0.0, 0.0, start.twist, 0.0)
        heading = depart(read_flow(motion.matrix, sprung), drag, x)
        first_table, table = np.zeros(SIZE), np.zeros(SIZE)
        log = new_log()
        first_log = new_log() if first > 0.0 else log
        stale, rests = True, False

        current_pi = PiState(start.voltage, 0.0)
        speed_pi = PiState(start.current, 0.0)
        newest = held = older = oldest = start.voltage
        measured = 0.0
        reference = 0.0
        current_reference = next_reference = start.current
        flags[:] = False

        encoder = sampling.counts_per_radian > 0.0
        counts = np.zeros(sampling.window)
        counted = 0
        per_count = 0.0
        if encoder:
            per_count = 1.0 / (sampling.counts_per_radian * sampling.window * sampling.divisor * sampling.period)

        given = 0.0
        current_clamps = voltage_clamps = 0
        tick = phase = logged = 0
        while tick < sampling.ticks:
            if phase == sampling.divisor:
                phase = 0
            if phase == 0:
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
                next_reference = asked.value
                if asked.clamped:
                    current_clamps += 1
                    for later in range(tick, min(tick + sampling.divisor, sampling.ticks)):
                        flags[CURRENT_CLAMPED, later] = True
            if phase == sampling.reference_delay:
                current_reference = next_reference
            if tick == script.load_tick:
                drag = run.drags[1]
                heading = depart(read_flow(motion.matrix, sprung), drag, x)
                stale = True
            if stale:
                rests = fill_table(table, motion, sprung, drag, heading, int(SECOND))
                if first > 0.0:
                    fill_table(first_table, motion, sprung, drag, heading, int(FIRST))
                stale = False

            # Up to the next tick at which anything but the current loop has its turn.
            phase_end = sampling.reference_delay if phase < sampling.reference_delay else sampling.divisor
            end = min(tick + phase_end - phase, tick + LOGGED - logged, sampling.ticks)
            if tick < script.load_tick:
                end = min(end, script.load_tick)
            phase -= tick
            strayed = int(NONE)
            while tick < end:
                # Known to be no negative index, so that none is looked for.
                at, place = np.uint64(tick), logged & (LOGGED - 1)
                sample = x.filtered if filtered else x.current
                # Minus zero, since to add it is nothing to the compiler.
                addend = -0.0 if plain else sampling.feedforward * measured
                room = sampling.voltage_limit if plain else voltage_room(sampling, measured, sample)
                current_pi, output = pi_step(current_law, current_pi, PiInputs(current_reference, sample, addend, room))
                oldest, older, held, newest = older, held, newest, output.value
                traces[REFERENCE, at] = reference
                traces[SPEED, at] = x.speed
                traces[CURRENT, at] = x.current
                traces[CURRENT_REFERENCE, at] = current_reference
                traces[VOLTAGE, at] = output.value
                if elastic:
                    traces[LOAD_SPEED, at] = x.load_speed
                if output.clamped:
                    voltage_clamps += 1
                    flags[VOLTAGE_CLAMPED, at] = True

                if first > 0.0:
                    voltage = voltage_of(held_ticks, held, older, oldest)
                    y = glide(first_table, elastic, not plain, x, voltage)
                    if strays(first_table, elastic, rests, x, y):
                        strayed = int(FIRST)
                        break
                    note_segment(first_log, place, elastic, x, voltage, y)
                    x = y
                voltage = voltage_of(held_ticks, newest, held, older)
                y = glide(table, elastic, not plain, x, voltage)
                if strays(table, elastic, rests, x, y):
                    strayed = int(SECOND)
                    break
                note_segment(log, place, elastic, x, voltage, y)
                x = y
                logged += 1
                tick += 1
            phase += tick

            if strayed != NONE or logged == LOGGED or tick == sampling.ticks or tick == script.load_tick:
                given += returned_energy(motion, sprung, drag, heading, int(SECOND), log, logged)
                if first > 0.0:
                    firsts = logged + (1 if strayed == SECOND else 0)
                    given += returned_energy(motion, sprung, drag, heading, int(FIRST), first_log, firsts)
                logged = 0
            if strayed != NONE:
                flow = read_flow(motion.matrix, sprung)
                if strayed == FIRST:
                    voltage = voltage_of(held_ticks, held, older, oldest)
                    heading, x, back = travel(motion, flow, drag, int(FIRST), x, voltage)
                    given += back
                voltage = voltage_of(held_ticks, newest, held, older)
                heading, x, back = travel(motion, flow, drag, int(SECOND), x, voltage)
                given += back
                stale = True
                tick += 1
                phase += 1

        for tick in range(sampling.ticks):
            traces[TIME, tick] = tick * sampling.period
        squares, peak_current = size_figures(traces[CURRENT])
        _, peak_voltage = size_figures(traces[VOLTAGE])
        return Tally(peak_current, squares, peak_voltage, current_clamps, voltage_clamps, given)

    return run_ticks


run_plain = tick_loop(False, True)
run_rigid = tick_loop(False, False)
run_elastic = tick_loop(True, False)


def is_plain(run: Run) -> bool:
    """Whether a drive is as most are: rigid, no filter, no feedforward, no d axis, one period late, backward rule."""
    sampling = run.sampling
    return (
        run.layout.filtered < 0
        and run.layout.load_speed < 0
        and sampling.held_ticks == 1
        and sampling.held_part == 0.0
        and sampling.feedforward == 0.0
        and sampling.reactance == 0.0
        and run.current_law.rule == BACKWARD
    )


def respond(run: Run, traces: NDArray[np.float64], flags: NDArray[np.bool_]) -> Tally:
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
    if run.layout.load_speed >= 0:
        return run_elastic(run, traces, flags)
    return (run_plain if is_plain(run) else run_rigid)(run, traces, flags)
