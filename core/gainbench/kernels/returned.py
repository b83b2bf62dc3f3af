"""Energy given back to the stage over segments in which no body left its way, many at once.

The tick loop notes such segments in a log, and their energy is found a log at a time: where ``v i`` keeps its sign it
is the voltage times the charge of the exact step, and what is left, where the current may turn, is looked at by itself.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

from gainbench.kernels.bodies import inputs_of, resting_bodies
from gainbench.kernels.compiled import compiled, inlined
from gainbench.kernels.motion import LOAD_RESTS, MOTOR_RESTS, change, plant_rate, read_flow, read_step
from gainbench.kernels.response_records import Drag, Flow, Heading, Inputs, Motion, PlantState
from gainbench.kernels.series import build_series, series_energy, sign_kept
from gainbench.kernels.travel import travel

LOGGED = 1024
"""Segments that a log holds, a power of two."""
PITCH = LOGGED + 24
"""From row to row of a log: no multiple of 4 KiB, or all rows would take the same few lines of a processor's cache."""
CURRENT_BEFORE = 0 * PITCH
SPEED_BEFORE = 1 * PITCH
LOAD_SPEED_BEFORE = 2 * PITCH
TWIST_BEFORE = 3 * PITCH
VOLTAGE_DURING = 4 * PITCH
CURRENT_AFTER = 5 * PITCH
GIVEN = 6 * PITCH
"""Where the rows of a log begin: what a segment began with, its voltage, what it ended with, what it gave back."""
LOG_SIZE = 7 * PITCH

BRIEF = 0.3
"""A segment is brief where the plant's rate times its length is at most this: of its power series the terms behind the
eighth are below ``BRIEF^8/9! = 2e-10`` of the current's change."""
CLOSE = 1e-4
"""Share of a segment: a step of Newton's method below it leaves an error of its square in the instant of a zero, and of
its fourth power in the charge up to it, which does not change in first order with the instant."""


class Term(NamedTuple):
    """One term of the power series of what drives the current, in the share of the segment that has passed."""

    current: float
    speed: float
    load_speed: float
    twist: float


@compiled
def new_log() -> NDArray[np.float64]:
    """An empty log; a rigid train leaves the load's rows at 0."""
    log = np.empty(LOG_SIZE)
    log[LOAD_SPEED_BEFORE:VOLTAGE_DURING] = 0.0
    return log


@inlined
def state_before(log: NDArray[np.float64], place: int) -> PlantState:
    """What drives the current, when a segment of the log began; filtered current and angle stay 0."""
    return PlantState(
        log[CURRENT_BEFORE + place],
        log[SPEED_BEFORE + place],
        0.0,
        log[LOAD_SPEED_BEFORE + place],
        log[TWIST_BEFORE + place],
        0.0,
    )


@inlined
def note_segment(
    log: NDArray[np.float64], place: int, elastic: bool, x: PlantState, voltage: float, y: PlantState
) -> None:
    """Note a segment that began with x and ended with y."""
    log[CURRENT_BEFORE + place] = x.current
    log[SPEED_BEFORE + place] = x.speed
    log[VOLTAGE_DURING + place] = voltage
    log[CURRENT_AFTER + place] = y.current
    if elastic:
        log[LOAD_SPEED_BEFORE + place] = x.load_speed
        log[TWIST_BEFORE + place] = x.twist


@inlined
def next_term(flow: Flow, resting: int, term: Term, u: Inputs, share: float) -> Term:
    """The term behind ``term``: its derivative times ``share``, the segment's length over the order of the new term."""
    i, w, l, t = term.current, term.speed, term.load_speed, term.twist  # noqa: E741
    speed = flow.wi * i + flow.ww * w + flow.wl * l + flow.wt * t + flow.wd * u.motor_drag
    load_speed = flow.lw * w + flow.ll * l + flow.lt * t + flow.ld * u.load_drag
    return Term(
        share * (flow.ii * i + flow.iw * w + flow.iv * u.voltage),
        0.0 if resting & MOTOR_RESTS else share * speed,
        0.0 if resting & LOAD_RESTS else share * load_speed,
        share * (w - l),
    )


@inlined
def newton_step(terms: tuple[float, ...], s: float) -> float:
    """Value over slope of a polynomial of eighth order at ``s``."""
    a, b, c, d, e, f, g, h, k = terms
    value = a + s * (b + s * (c + s * (d + s * (e + s * (f + s * (g + s * (h + s * k)))))))
    slope = 5.0 * f + s * (6.0 * g + s * (7.0 * h + s * 8.0 * k))
    slope = b + s * (2.0 * c + s * (3.0 * d + s * (4.0 * e + s * slope)))
    return value / slope


@inlined
def turning_energy(
    flow: Flow, resting: int, x: PlantState, after: float, u: Inputs, width: float, total: float
) -> float:
    """Energy given back over a brief segment in which the current goes to ``after`` through one zero [J].

    nan where it may have none or two; ``total`` is the charge of the whole segment. By eight terms of the power series.
    """
    none = Inputs(0.0, 0.0, 0.0)
    first = next_term(flow, resting, Term(x.current, x.speed, x.load_speed, x.twist), u, width)
    second = next_term(flow, resting, first, none, width * (1 / 2))
    third = next_term(flow, resting, second, none, width * (1 / 3))
    fourth = next_term(flow, resting, third, none, width * (1 / 4))
    fifth = next_term(flow, resting, fourth, none, width * (1 / 5))
    sixth = next_term(flow, resting, fifth, none, width * (1 / 6))
    seventh = next_term(flow, resting, sixth, none, width * (1 / 7))
    a, b, c, d, e = x.current, first.current, second.current, third.current, fourth.current
    f, g, h = fifth.current, sixth.current, seventh.current
    k = (flow.ii * h + flow.iw * seventh.speed) * width * (1 / 8)
    last = b + 2.0 * c + 3.0 * d + 4.0 * e + 5.0 * f + 6.0 * g + 7.0 * h + 8.0 * k

    # From the zero of the parabola through both ends with the first slope, two steps of Newton's method.
    root = np.sqrt(b * b - 4.0 * (after - a - b) * a)
    s = -2.0 * a / (b + (root if b > 0.0 else -root))
    terms = (a, b, c, d, e, f, g, h, k)
    s -= newton_step(terms, s)
    move = newton_step(terms, s)
    s -= move
    charge = e / 5.0 + s * (f / 6.0 + s * (g / 7.0 + s * (h / 8.0 + s * k / 9.0)))
    charge = width * s * (a + s * (b / 2.0 + s * (c / 3.0 + s * (d / 4.0 + s * charge))))
    charge = total - charge if u.voltage * a > 0.0 else charge
    sure = b * last > 0.0 and a * after < 0.0 and abs(move) < CLOSE
    return float(-u.voltage * charge if sure else np.nan)


@compiled
def returned_energy(
    motion: Motion,
    elastic: bool,
    drag: Drag,
    heading: Heading,
    segment: int,
    log: NDArray[np.float64],
    count: int,
) -> float:
    """Energy given back over the first ``count`` segments of a log, all of one mode [J, without the 3/2 of pm-sine]."""
    if count == 0:
        return 0.0
    flow = read_flow(motion.matrix, elastic)
    step = read_step(motion, segment, resting_bodies(flow, heading), motion.fine)
    drags = inputs_of(drag, heading, 0.0)
    turns = 0
    for place in range(count):
        x, voltage = state_before(log, place), log[VOLTAGE_DURING + place]
        u = Inputs(voltage, drags.motor_drag, drags.load_drag)
        y = PlantState(log[CURRENT_AFTER + place], 0.0, 0.0, 0.0, 0.0, 0.0)
        kept = sign_kept(flow, x, y, voltage, step.width)
        back = -voltage * change(step.charge, elastic, x, u)
        log[GIVEN + place] = 0.0 if kept > 0 else (back if kept < 0 else np.nan)
        turns += 1 if kept == 0 else 0
    if turns > 0:
        look_closer(motion, elastic, drag, heading, segment, log, count)
    half = 1
    while half < count:
        half *= 2
    for place in range(count, half):
        log[GIVEN + place] = 0.0
    # By halves, many sums at a time.
    while half > 1:
        half //= 2
        for place in range(half):
            log[GIVEN + place] += log[GIVEN + half + place]
    return float(log[GIVEN])


@compiled
def look_closer(
    motion: Motion,
    elastic: bool,
    drag: Drag,
    heading: Heading,
    segment: int,
    log: NDArray[np.float64],
    count: int,
) -> None:
    """Replace each nan among the energies of a log."""
    flow = read_flow(motion.matrix, elastic)
    resting = resting_bodies(flow, heading)
    step = read_step(motion, segment, resting, motion.fine)
    drags = inputs_of(drag, heading, 0.0)
    places = np.empty(LOGGED + 1, dtype=np.int64)
    found = 0
    for place in range(count):
        places[found] = place
        found += 1 if np.isnan(log[GIVEN + place]) else 0
    if plant_rate(motion.matrix, False) * step.width <= BRIEF:
        near = np.empty(LOG_SIZE)
        for row in range(0, GIVEN, PITCH):
            for number in range(found):
                near[row + number] = log[row + (places[number] & (LOGGED - 1))]
        for number in range(found):
            x = state_before(near, number)
            u = Inputs(near[VOLTAGE_DURING + number], drags.motor_drag, drags.load_drag)
            total = change(step.charge, elastic, x, u)
            after = near[CURRENT_AFTER + number]
            near[GIVEN + number] = turning_energy(flow, resting, x, after, u, step.width, total)
        for number in range(found):
            log[GIVEN + places[number]] = near[GIVEN + number]
    for number in range(found):
        place = places[number]
        if np.isnan(log[GIVEN + place]):
            x, voltage = state_before(log, place), log[VOLTAGE_DURING + place]
            if motion.fine > 0:
                _, _, back = travel(motion, flow, drag, segment, x, voltage)
            else:
                build_series(motion.series, flow, resting, x, inputs_of(drag, heading, voltage), step.width)
                back = series_energy(motion.series, voltage, 1.0)
            log[GIVEN + place] = back
