"""Figures of loops whose figures are known in closed form or found by brute force."""

from __future__ import annotations

import math

import numpy as np
import pytest

from gainbench.kernels.frequency import hessenberg, loop_at, workspace
from gainbench.kernels.loop_curve import trace_loop
from gainbench.kernels.loop_figures import (
    ACROSS,
    CLOSED,
    SENSITIVITY,
    SIZE,
    first_fall,
    loop_numbers,
    measure,
    numbers_of,
    root,
    summit,
)
from gainbench.kernels.loop_grid import Grid, half_turns, loop_grid
from gainbench.kernels.loop_records import SampledPlant
from quantities import assert_quantity

GRID = loop_grid(1.0, 1, peaks=np.empty(0), spreads=np.empty(0))
ROUNDING = "roots refined to rounding"


def figures_of(plant, kp, ki_period, grid):
    reduced = hessenberg(plant)
    w, loop = trace_loop(reduced, kp, ki_period, 0, Grid(grid.w, half_turns(grid.w, plant.period)))
    return numbers_of(reduced, kp, ki_period, 0, w, loop), w, loop


def integrator(gain_period: float, *, period: float = 1.0, shift: int = 1) -> SampledPlant:
    """K h/(z - 1) behind ``shift`` periods of delay."""
    nothing = np.zeros(1)
    return SampledPlant(
        np.zeros((1, 1)), np.ones(1), np.array([gain_period]), nothing, nothing,
        0.0, 0.0, 0.0, period, shift, 1, 1.0, 1.0,
    )  # fmt: skip


@pytest.mark.parametrize("kh", [0.1, 0.25, 1.0 / 3.0, 0.5, 0.9])
def test_d5_integrator_with_a_sample_of_delay(kh):
    # D5: w_c h = 2 asin(K h/2), PM = 90 deg - 3 asin(K h/2) exactly; on the axis at z = exp(j pi/3), so GM = 1/(K h).
    # Derived identity, it needs no source.
    numbers, _, _ = figures_of(integrator(kh), 1.0, 0.0, GRID)
    half = math.asin(kh / 2.0)
    assert_quantity(numbers.crossover, 2.0 * half, rtol=1e-12, unit="rad", why=ROUNDING)
    assert_quantity(numbers.phase_margin, math.pi / 2.0 - 3.0 * half, rtol=1e-12, unit="rad", why=ROUNDING)
    assert_quantity(
        numbers.delay_margin, (math.pi / 2.0 - 3.0 * half) / (2.0 * half), rtol=1e-12, unit="s", why=ROUNDING
    )
    assert_quantity(numbers.gain_margin, 1.0 / kh, rtol=1e-12, unit="1", why=ROUNDING)
    assert math.isnan(numbers.gain_reduction)


def test_d6_a_third_has_a_margin_of_61_degrees_and_a_gain_margin_of_three():
    # D6: K h = 1/3: PM 61.218 deg, GM 3.000. Derived.
    numbers, _, _ = figures_of(integrator(1.0 / 3.0), 1.0, 0.0, GRID)
    assert_quantity(math.degrees(numbers.phase_margin), 61.218, atol=5e-4, unit="deg", why="digits printed")
    assert_quantity(numbers.gain_margin, 3.0, rtol=1e-12, unit="1", why=ROUNDING)


@pytest.mark.parametrize("kh", [0.15, 0.5])
def test_peak_and_bandwidth_by_brute_force(kh):
    numbers, w, loop = figures_of(integrator(kh), 1.0, 0.0, GRID)
    dense = np.linspace(1e-6, math.pi, 400_001)
    z = np.exp(1j * dense)
    expected = kh / (z * (z - 1.0))
    assert_quantity(
        numbers.peak_sensitivity,
        np.max(1.0 / np.abs(1.0 + expected)),
        rtol=1e-9,
        unit="1",
        why="8e-6 rad steps at a summit",
    )
    closed = np.abs(expected / (1.0 + expected))
    above = np.flatnonzero((closed[:-1] >= math.sqrt(0.5)) & (closed[1:] < math.sqrt(0.5)))
    assert_quantity(numbers.bandwidth, dense[above[0]], atol=1e-5, unit="rad", why="step of the dense grid")
    assert w[-1] == math.pi
    assert_quantity(loop[-1].real, kh / 2.0, rtol=1e-12, unit="1", why=ROUNDING)


def test_r5_margins_are_bounded_by_the_peak_of_the_sensitivity():
    # R5: GM >= Ms/(Ms - 1), PM >= 2 asin(1/(2 Ms)). Astrom & Hagglund, Advanced PID Control, 2006 (from memory).
    for kh in (0.1, 0.3, 0.5, 0.7):
        numbers, _, _ = figures_of(integrator(kh), 1.0, 0.0, GRID)
        peak = numbers.peak_sensitivity
        assert numbers.gain_margin >= peak / (peak - 1.0) * (1.0 - 1e-12)
        assert numbers.phase_margin >= 2.0 * math.asin(0.5 / peak) - 1e-12


def test_r5_printed_pairs():
    # R5, the same source: Ms 1.2 -> 6.00, 49.2 deg; 1.4 -> 3.50, 41.8; 1.6 -> 2.67, 36.4; 1.7 -> 2.43, 34.2;
    # 2.0 -> 2.00, 28.96.
    table = {1.2: (6.00, 49.2), 1.4: (3.50, 41.8), 1.6: (2.67, 36.4), 1.7: (2.43, 34.2), 2.0: (2.00, 28.96)}
    for peak, (gain, margin) in table.items():
        assert_quantity(peak / (peak - 1.0), gain, atol=5e-3, unit="1", why="digits printed")
        assert_quantity(math.degrees(2.0 * math.asin(0.5 / peak)), margin, atol=0.05, unit="deg", why="digits printed")


def test_the_nyquist_frequency_counts_as_on_the_axis():
    # K h/(z - 1) without delay: L(-1) = -K h/2, its only point on the negative axis, so the gain margin is 2/(K h).
    numbers, _, _ = figures_of(integrator(0.5, shift=0), 1.0, 0.0, GRID)
    assert_quantity(numbers.gain_margin, 4.0, rtol=1e-12, unit="1", why=ROUNDING)


def test_gain_reduction_of_a_conditionally_stable_loop():
    # A triple integrator meets the axis where the lead of its two zeros has made up for 90 degrees.
    period = 1e-3
    m = np.diag([1.0, 1.0], 1)
    b = np.array([0.0, 0.0, 1.0])
    nothing = np.zeros(3)
    # c (z - 1)^-1...: 1/d^3, with (1 + a d)^2 in front: c = [1, 2a, a^2].
    a = 20.0
    plant = SampledPlant(m, np.array([1.0, 2.0 * a, a * a]), b, nothing, nothing, 0.0, 0.0, 0.0, period, 0, 1, 1.0, 1.0)
    gain = 1e-3
    numbers, _, _ = figures_of(plant, gain, 0.0, loop_grid(period, 1, peaks=np.empty(0), spreads=np.empty(0)))
    w = np.geomspace(1e-3, math.pi / period, 2_000_001)
    d = np.exp(1j * w * period) - 1.0
    loop = gain * (1.0 + a * d) ** 2 / d**3
    turns = np.flatnonzero((np.sign(loop.imag[:-1]) != np.sign(loop.imag[1:])) & (loop.real[:-1] < 0.0))
    factors = [-1.0 / loop.real[k] for k in turns] + [-1.0 / loop.real[-1]]
    assert_quantity(
        numbers.gain_reduction, max(f for f in factors if f < 1.0), rtol=1e-4, unit="1", why="steps of the dense grid"
    )
    assert_quantity(
        numbers.gain_margin, min(f for f in factors if f > 1.0), rtol=1e-4, unit="1", why="steps of the dense grid"
    )


def test_a_loop_below_one_has_no_crossover_and_no_bandwidth():
    nothing = np.zeros(1)
    plant = SampledPlant(
        np.array([[-0.5]]), np.ones(1), np.array([0.1]), nothing, nothing, 0.0, 0.0, 0.0, 1.0, 1, 1, 1.0, 1.0
    )
    numbers, _, _ = figures_of(plant, 1.0, 0.0, GRID)
    assert math.isnan(numbers.crossover)
    assert math.isnan(numbers.phase_margin)
    assert math.isnan(numbers.bandwidth)


def test_a_peak_through_one_between_two_points_is_found():
    # A resonance whose summit reaches 1.001 and whose width is far below the grid's step there.
    turn, decay = 0.41 * math.pi, 1e-4
    z = math.exp(-decay) * np.array([[math.cos(turn), -math.sin(turn)], [math.sin(turn), math.cos(turn)]])
    nothing = np.zeros(2)
    plant = SampledPlant(
        z - np.eye(2), np.array([1.0, 0.0]), np.array([0.0, 2.002 * decay]), nothing, nothing,
        0.0, 0.0, 0.0, 1.0, 0, 1, 1.0, 1.0,
    )  # fmt: skip
    numbers, _, _ = figures_of(plant, 1.0, 0.0, loop_grid(1.0, 1, peaks=np.array([turn]), spreads=np.array([decay])))
    assert_quantity(numbers.crossover, turn, rtol=1e-4, unit="rad", why="within the peak's width")


def test_measures_vanish_where_they_should():
    assert measure(SIZE, 0.6 + 0.8j) == pytest.approx(0.0, abs=1e-15)
    assert measure(ACROSS, -3.0 + 0j) == 0.0
    assert measure(SENSITIVITY, -1.0 + 0j) == 0.0
    s = math.sqrt(0.5)
    assert measure(CLOSED, complex(s / (1.0 - s), 0.0)) == pytest.approx(0.0, abs=1e-14)
    assert math.isnan(first_fall(np.array([[1.0, 2.0], [1.0, 1.0]])))
    assert first_fall(np.array([[1.0, 2.0, 3.0], [1.0, -1.0, -1.0]])) == 2.0


def test_root_and_summit_of_a_bracket():
    plant = hessenberg(integrator(0.5))
    work = workspace(plant)
    low, high = 0.1, 2.0
    ends = [measure(SIZE, loop_at(plant, 1.0, 0.0, 0, w, work)) for w in (low, high)]
    found = root(plant, 1.0, 0.0, 0, SIZE, low, high, ends[0], ends[1], work)
    assert_quantity(found, 2.0 * math.asin(0.25), rtol=1e-13, unit="rad", why=ROUNDING)
    place, value = summit(plant, 1.0, 0.0, 0, SENSITIVITY, 1.0, 0.1, 3.0, work)
    assert_quantity(
        value, measure(SENSITIVITY, loop_at(plant, 1.0, 0.0, 0, place, work)), rtol=1e-12, unit="1", why=ROUNDING
    )


def test_a_summit_within_a_wide_bracket_and_at_its_edge():
    # Where |1 + L| of an integrator with a sample of delay is least, against a dense grid around that place.
    plant = hessenberg(integrator(0.5))
    work = workspace(plant)

    def value_at(w):
        return measure(SENSITIVITY, loop_at(plant, 1.0, 0.0, 0, w, work))

    place, value = summit(plant, 1.0, 0.0, 0, SENSITIVITY, 1.0, 1e-3, 3.0, work)
    assert 0.1 < place < 2.9
    around = place * (1.0 + np.linspace(-1e-3, 1e-3, 401))
    assert value >= max(value_at(w) for w in around) - 1e-14
    # A bracket whose largest value is at its edge gives that edge.
    edge, _ = summit(plant, 1.0, 0.0, 0, SENSITIVITY, 1.0, 0.2 * place, 0.5 * place, work)
    assert_quantity(edge, 0.5 * place, rtol=1e-8, unit="rad", why="width at which the search ends")


def test_figures_and_curve_in_the_units_of_results():
    plant = integrator(1.0 / 3.0, period=1e-3)
    grid = loop_grid(plant.period, 1, peaks=np.empty(0), spreads=np.empty(0))
    numbers, w, loop = figures_of(plant, 1.0, 0.0, grid)
    figures, hertz, response = loop_numbers(plant, 1.0, 0.0, 0, grid)
    expected = (
        numbers.crossover / math.tau,
        math.degrees(numbers.phase_margin),
        numbers.delay_margin,
        20.0 * math.log10(numbers.gain_margin),
        numbers.peak_sensitivity,
        numbers.bandwidth / math.tau,
    )
    assert math.isnan(figures[4])
    assert_quantity((*figures[:4], *figures[5:]), expected, rtol=1e-15, unit="of each", why="the same numbers")
    assert_quantity(hertz, w / math.tau, rtol=1e-15, unit="Hz", why="the same numbers")
    assert_quantity(np.abs(response / loop - 1.0), 0.0, atol=1e-8, unit="1", why="sine and cosine of the grid's shares")
