"""Sampling and lifting, against the same law stepped tick by tick in plain numpy."""

from __future__ import annotations

import numpy as np
import pytest
from scipy.linalg import expm
from scipy.signal import cont2discrete

from gainbench.kernels.lifting import (
    BACKWARD,
    FORWARD,
    TRAPEZOID,
    closed_loop,
    closed_tick,
    held_step,
    lifted_loop,
    tick_step,
)
from gainbench.kernels.loop_records import SampledPlant
from quantities import assert_quantity

ROUNDING = "rounding of a few products"
R, L, KE, J, B = 0.6, 0.45e-3, 0.052, 7.1e-5, 2e-5
TS = 50e-6
A = np.array([[-R / L, -KE / L, 0.0], [KE / J, -B / J, 0.0], [0.0, 1.0, 0.0]])
BV = np.array([1.0 / L, 0.0, 0.0])
KP, KI_T = 2.66, 0.234


def parts_of(tick):
    """exp - I, column of the older voltage, of the newer one."""
    return tick[:, :3], tick[:, 3], tick[:, 4]


def speed_plant(*, held, part, rule, back_emf, divisor, delay, window, gain):
    """What the library's sampling makes of the kernels, for this plant."""
    tick = tick_step(A, BV, TS, part)
    rows, *still = lifted_loop(tick, 0, held, part > 0.0, KP, KI_T, rule, back_emf, delay, divisor)
    n = rows.shape[1]
    d0, d1, dw = still if window else (0.0, 0.0, 0.0)
    tw = divisor * TS
    return SampledPlant(
        rows[:n], rows[n + 3] if window else np.eye(n)[1], rows[n], rows[n + 1], rows[n + 2], d0, d1, dw,
        tw, 1 if window else 0, max(window, 1), 1.0 / (window * tw) if window else 1.0, gain,
    )  # fmt: skip


def test_one_held_step_is_the_zero_order_hold_of_scipy():
    step, column = held_step(A, BV, TS)
    ad, bd, *_ = cont2discrete((A, BV[:, None], np.eye(3), np.zeros((3, 1))), TS, method="zoh")
    assert_quantity(step + np.eye(3), ad, atol=1e-13, unit="1", why=ROUNDING)
    assert_quantity(column, bd[:, 0], rtol=1e-10, atol=1e-18, unit="per volt", why=ROUNDING)


def test_d1_a_sampled_lag_matches_the_table():
    # D1: a/(s + a) -> (1 - e)/(z - e), e = exp(-a h). Astrom & Wittenmark, Computer-Controlled Systems, Table 2.1
    # (from memory).
    a, h = 2.0, 0.3
    step, column = held_step(np.array([[-a]]), np.array([a]), h)
    assert_quantity(step[0, 0] + 1.0, np.exp(-a * h), rtol=1e-14, unit="1", why=ROUNDING)
    assert_quantity(column[0], 1.0 - np.exp(-a * h), rtol=1e-14, unit="1", why=ROUNDING)


@pytest.mark.parametrize("part", [0.0, 0.3, 0.999])
def test_a_split_period_is_two_held_steps(part):
    step, older, newer = parts_of(tick_step(A, BV, TS, part))
    x = np.array([1.0, -2.0, 3.0])
    old, new = 5.0, -7.0

    def held(x, v, width):
        joint = expm(np.block([[A * width, (BV * width)[:, None]], [np.zeros((1, 4))]]))
        return joint[:3, :3] @ x + joint[:3, 3] * v

    expected = held(held(x, old, part * TS), new, (1.0 - part) * TS)
    assert_quantity(x + step @ x + older * old + newer * new, expected, rtol=1e-11, unit="1", why=ROUNDING)


def integrated(rule, s, error, before):
    """Integral after the tick and the integral in the output."""
    after = s + KI_T * (0.5 * (error + before) if rule == TRAPEZOID else error)
    return after, s if rule == FORWARD else after


def run_current(rule, held, part, references, speeds, back_emf):
    """Tick-by-tick plain law; returns the plant's state after every tick, shape (n + 1, 3)."""
    step, older, newer = parts_of(tick_step(A, BV, TS, part))
    x, s, before = np.zeros(3), 0.0, 0.0
    sent = [0.0] * 6
    out = [x]
    for r, w in zip(references, speeds, strict=True):
        error = r - x[0]
        s, shown = integrated(rule, s, error, before)
        before = error
        sent.insert(0, KP * error + shown + back_emf * w)
        x = x + step @ x + newer * sent[held] + older * sent[held + 1]
        out.append(x)
    return np.array(out)


DELAYS = ((0, 0.0), (0, 0.4), (1, 0.0), (1, 0.5), (2, 0.0))
CASES = [(rule, held, part) for rule in (BACKWARD, FORWARD, TRAPEZOID) for held, part in DELAYS]


@pytest.mark.parametrize(("rule", "held", "part"), CASES)
def test_the_closed_tick_is_the_law_of_one_tick(rule, held, part):
    rng = np.random.default_rng(1)
    r, w = rng.standard_normal(12), rng.standard_normal(12)
    d = closed_tick(tick_step(A, BV, TS, part), 0, held, part > 0.0, KP, KI_T, rule, KE)
    size = d.shape[0] - 2
    x = np.zeros(size)
    mine = [x[:3]]
    for one, speed in zip(r, w, strict=True):
        x = x + d[:size] @ np.concatenate((x, [one, speed]))
        mine.append(x[:3])
    assert_quantity(
        mine, run_current(rule, held, part, r, w, KE), rtol=1e-10, atol=1e-12, unit="A, rad/s, rad", why=ROUNDING
    )


@pytest.mark.parametrize(("rule", "held", "part"), CASES)
@pytest.mark.parametrize("delay", [0, 3])
@pytest.mark.parametrize("window", [0, 1, 3])
def test_the_lifted_loop_is_the_fast_loop_seen_at_speed_ticks(rule, held, part, delay, window):
    n_fast, periods = 5, 9
    rng = np.random.default_rng(2)
    asked = rng.standard_normal(periods)
    plant = speed_plant(
        held=held, part=part, rule=rule, back_emf=0.0, divisor=n_fast, delay=delay, window=window, gain=0.6
    )
    in_force = [asked[max((k - delay) // n_fast, -1)] if k >= delay else 0.0 for k in range(n_fast * periods)]
    fast = run_current(rule, held, part, in_force, np.zeros(n_fast * periods), 0.0)[::n_fast]
    x, older = np.zeros(plant.m.shape[0]), 0.0
    raw = []
    y = measured = 0.0
    angle = fast[:, 2]
    for n in range(periods):
        now = float(plant.c @ x)
        seen = [now, *reversed(raw)][plant.shift : plant.shift + plant.window]
        y += plant.filter_gain * (plant.scale * sum(seen) - y)
        expected = fast[n, 1] if window == 0 else (angle[n] - angle[max(n - window, 0)]) / (window * n_fast * TS)
        measured += 0.6 * (expected - measured)
        assert_quantity(y, measured, rtol=1e-9, atol=1e-12, unit="rad/s", why=ROUNDING)
        raw.append(now + plant.d0 * asked[n] + plant.d1 * older)
        x = x + plant.m @ x + plant.b0 * asked[n] + plant.b1 * older
        older = asked[n]


def test_a_stretch_of_no_time_changes_nothing():
    step, column = held_step(A, BV, 0.0)
    assert not step.any()
    assert not column.any()


def test_a_delay_of_no_tick_leaves_no_share_of_the_older_reference():
    plant = speed_plant(held=1, part=0.0, rule=BACKWARD, back_emf=0.0, divisor=10, delay=0, window=1, gain=1.0)
    assert_quantity(plant.b1, np.zeros(plant.m.shape[0]), atol=1e-15, unit="1", why="difference of equal columns")


@pytest.mark.parametrize("rule", [BACKWARD, FORWARD, TRAPEZOID])
@pytest.mark.parametrize(("delay", "window", "gain"), [(0, 0, 1.0), (2, 1, 1.0), (0, 3, 0.4)])
@pytest.mark.parametrize("back_emf", [0.0, KE])
def test_the_closed_speed_loop_is_its_parts_closed(rule, delay, window, gain, back_emf):
    kp, ki_t = 0.4, 0.03
    plant = speed_plant(
        held=1, part=0.2, rule=BACKWARD, back_emf=back_emf, divisor=6, delay=delay, window=window, gain=gain
    )
    matrix = closed_loop(plant, kp, ki_t, rule)
    size = matrix.shape[0]
    n = plant.m.shape[0]
    # Older reference, integrator and the raw values under way, and what filter and trapezoid keep.
    assert size == n + 2 + plant.window + plant.shift - 1 + int(gain != 1.0) + int(rule == TRAPEZOID)
    rng = np.random.default_rng(4)
    start = rng.standard_normal(n)
    state = np.zeros(size)
    state[:n] = start
    x, older, raw, y, s, before = start.copy(), 0.0, [0.0] * 6, 0.0, 0.0, 0.0
    for _ in range(14):
        now = float(plant.c @ x)
        seen = [now, *raw][plant.shift : plant.shift + plant.window]
        y += gain * (plant.scale * sum(seen) - y)
        error = -y
        after = s + ki_t * (0.5 * (error + before) if rule == TRAPEZOID else error)
        r = kp * error + (s if rule == FORWARD else after)
        s, before = after, error
        raw.insert(0, now + plant.d0 * r + plant.d1 * older + plant.dw * y)
        x = x + plant.m @ x + plant.b0 * r + plant.b1 * older + plant.bw * y
        older = r
        state = state + matrix @ state
        assert_quantity(state[:n], x, rtol=1e-9, atol=1e-10, unit="states of the plant", why=ROUNDING)
