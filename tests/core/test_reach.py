"""The reach map, against asking each target by itself: positive gains for it, stable by the closed loop's poles."""

from __future__ import annotations

import math
from dataclasses import replace

import numpy as np
import pytest

from gainbench.assess import assess
from gainbench.assessed import assessed_loop
from gainbench.model import Firmware, IntegratorRule
from gainbench.plant import refer
from gainbench.reach import COLUMNS, ReachMap, reach_areas, reach_map
from gainbench.results import Gains
from gainbench.sampling import current_loop, hardware, speed_loop
from gainbench.tuning.exact import gains_for, holds, largest_margin
from quantities import assert_quantity
from rigs import fixed_sheet, random_sheets

EDGE = 1e-6
"""Targets closer to an edge than this are left out: a pole within 1e-9 of the circle counts as stable [rad]."""


def loops_of(sheet):
    assessment = assess(sheet, simulated=False)
    found = (assessed_loop(assessment, name) for name in ("current", "speed"))
    return [loop for loop in found if loop is not None]


def wrong(loop, reach, *, targets, seed):
    """Targets at which map and brute force differ."""
    rng = np.random.default_rng(seed)
    found = []
    for _ in range(targets):
        row = int(rng.integers(reach.crossover.size))
        crossover, margin = float(reach.crossover[row]), float(rng.uniform(0.0, math.pi / 2.0))
        ends = np.concatenate((reach.low[row], reach.high[row]))
        if np.any(np.abs(ends - margin) < EDGE):
            continue
        inside = bool(np.any((reach.low[row] < margin) & (margin < reach.high[row])))
        if inside != holds(loop, gains_for(loop, crossover, margin=margin)):
            found.append((crossover, margin))
    return found


@pytest.mark.parametrize("seed", [11, 12, 13])
def test_every_target_is_met_exactly_where_the_map_says(seed):
    for k, sheet in enumerate(random_sheets(seed, 12)):
        for loop in loops_of(sheet):
            assert not wrong(loop, reach_map(loop), targets=60, seed=k)


@pytest.mark.parametrize(
    ("seed", "place", "which"),
    [
        (102, 22, 1),  # one step between frequencies takes the edge past the whole span of margins
        (103, 86, 0),  # a free train: far below, the edge's real part is rounding
    ],
)
def test_drives_on_which_counting_is_delicate(seed, place, which):
    loop = loops_of(random_sheets(seed, place + 1)[place])[which]
    reach = reach_map(loop)
    assert not wrong(loop, reach, targets=400, seed=place)
    # A part of the range alone is the same map.
    part = reach_map(loop, lowest=0.2 * float(reach.crossover[-1]))
    assert not wrong(loop, part, targets=400, seed=place)


@pytest.mark.parametrize("damping", [1.0, 0.05, 1e-3])
@pytest.mark.parametrize("rule", list(IntegratorRule))
def test_gaps_of_an_elastic_train_are_on_the_map(rule, damping):
    sheet = fixed_sheet("elastic")
    train = replace(sheet.rig.train, shaft_damping=damping * sheet.rig.train.shaft_damping)
    rig = replace(sheet.rig, train=train, stage=replace(sheet.rig.stage, speed_window=1))
    aims = replace(sheet.aims, firmware=Firmware(integrator=rule))
    _, loop = loops_of(replace(sheet, rig=rig, aims=aims))
    reach = reach_map(loop)
    assert not wrong(loop, reach, targets=300, seed=1)
    met = ~np.isnan(reach.low[:, 0])
    # Crossovers that cannot be met at all lie between some that can.
    assert np.count_nonzero(np.diff(met.astype(int)) == 1) >= 1
    assert len(reach_areas(reach)) >= 2


def test_a_crossover_may_have_two_stretches_of_margins():
    found = [
        (loop, reach)
        for sheet in random_sheets(1, 40)
        if sheet.rig.train.shaft_stiffness is not None
        for loop in loops_of(sheet)[1:]
        if (reach := reach_map(loop)).low.shape[1] > 1
    ]
    assert found
    for loop, reach in found:
        row = int(np.flatnonzero(~np.isnan(reach.low[:, 1]))[0])
        assert reach.high[row, 0] < reach.low[row, 1]
        between = 0.5 * float(reach.high[row, 0] + reach.low[row, 1])
        for margin, met in (
            (0.5 * float(reach.low[row, 0] + reach.high[row, 0]), True),
            (between, False),
            (0.5 * float(reach.low[row, 1] + reach.high[row, 1]), True),
        ):
            assert holds(loop, gains_for(loop, float(reach.crossover[row]), margin=margin)) is met


@pytest.mark.parametrize("window", [8, 100, 300])
def test_a_long_speed_window(window):
    sheet = fixed_sheet("elastic")
    stage = replace(sheet.rig.stage, speed_window=window)
    _, loop = loops_of(replace(sheet, rig=replace(sheet.rig, stage=stage)))
    assert not wrong(loop, reach_map(loop), targets=80, seed=window)


@pytest.mark.parametrize("name", ["plain", "elastic", "sine"])
def test_the_top_of_the_map_is_the_largest_margin(name):
    for loop in loops_of(fixed_sheet(name)):
        reach = reach_map(loop, columns=24)
        for row in range(0, reach.crossover.size, 5):
            wanted = largest_margin(loop, float(reach.crossover[row]))
            found = float(reach.largest_margin[row])
            if wanted is None:
                # The search there goes in steps of half a degree and may step over what is narrower.
                assert math.isnan(found) or found - float(reach.low[row, 0]) < math.radians(0.5)
            else:
                assert_quantity(found, wanted, atol=1e-6, unit="rad", why="the search ends at 1e-7 of the margin")


def test_the_range_is_the_one_asked_for():
    loop = loops_of(fixed_sheet("plain"))[1]
    nyquist = math.pi / loop.plant.period
    reach = reach_map(loop, lowest=20.0, highest=900.0, columns=30)
    assert (reach.crossover[0], reach.crossover[-1]) == (20.0, 900.0)
    assert np.all(np.diff(reach.crossover) > 0.0)
    whole = reach_map(loop)
    assert whole.crossover.size >= COLUMNS
    assert 0.99 * nyquist < whole.crossover[-1] < nyquist
    assert reach_map(loop, highest=10.0 * nyquist).crossover[-1] < nyquist
    assert not reach.low.flags.writeable
    for lowest, highest, columns in ((0.0, 10.0, 9), (20.0, 10.0, 9), (10.0, 20.0, 1), (2.0 * nyquist, None, 9)):
        with pytest.raises(ValueError, match="a map from"):
            reach_map(loop, lowest=lowest, highest=highest, columns=columns)


def test_more_crossovers_stand_where_the_map_ends():
    loop = loops_of(fixed_sheet("plain"))[1]
    reach = reach_map(loop, columns=30)
    last = int(np.flatnonzero(~np.isnan(reach.largest_margin))[-1])
    step = (reach.crossover[-1] / reach.crossover[0]) ** (1.0 / 29.0)
    assert reach.crossover[last + 1] / reach.crossover[last] < step**0.3


def test_nothing_is_met_around_an_unstable_current_loop():
    sheet = fixed_sheet("plain")
    plant = refer(sheet.rig)
    own = hardware(plant, sheet.rig.stage)
    loop = speed_loop(own, plant, stage=sheet.rig.stage, firmware=Firmware(), current=Gains(kp=40.0, ki=2500.0))
    reach = reach_map(loop)
    assert np.isnan(reach.low).all()
    assert np.isnan(reach.largest_margin).all()
    assert reach_areas(reach) == ()


def shape(*rows):
    """A map of margins at crossovers 1, 2, 3, ...: each row a list of stretches."""
    width = max(len(row) for row in rows)
    ends = np.full((len(rows), width, 2), np.nan)
    for k, row in enumerate(rows):
        for j, stretch in enumerate(row):
            ends[k, j] = stretch
    return ReachMap(crossover=np.arange(1.0, len(rows) + 1.0), low=ends[:, :, 0], high=ends[:, :, 1])


def as_points(area):
    return list(zip(area.crossover.tolist(), area.low.tolist(), area.high.tolist(), strict=True))


def test_a_stretch_that_parts_goes_on_in_its_larger_part():
    areas = reach_areas(shape([(0.0, 1.0)], [(0.0, 0.3), (0.4, 0.95)], [(0.1, 0.2), (0.5, 0.9)]))
    assert sorted(as_points(area) for area in areas) == [
        [(1.0, 0.0, 0.3), (2.0, 0.0, 0.3), (3.0, 0.1, 0.2)],
        [(1.0, 0.0, 1.0), (2.0, 0.4, 0.95), (3.0, 0.5, 0.9)],
    ]


def test_stretches_that_become_one_leave_no_gap():
    areas = reach_areas(shape([(0.1, 0.2), (0.5, 0.9)], [(0.0, 1.0)], [], [(0.3, 0.4)]))
    assert sorted(as_points(area) for area in areas) == [
        [(1.0, 0.1, 0.2), (2.0, 0.1, 0.2)],
        [(1.0, 0.5, 0.9), (2.0, 0.0, 1.0)],
        [(4.0, 0.3, 0.4)],
    ]


def test_areas_cover_the_map():
    for sheet in (fixed_sheet("elastic"), *random_sheets(1, 12)):
        for loop in loops_of(sheet):
            reach = reach_map(loop)
            areas = reach_areas(reach)
            covered = {point for area in areas for point in as_points(area)}
            rows, columns = np.nonzero(~np.isnan(reach.low))
            wanted = zip(
                reach.crossover[rows].tolist(),
                reach.low[rows, columns].tolist(),
                reach.high[rows, columns].tolist(),
                strict=True,
            )
            assert set(wanted) <= covered
            for area in areas:
                assert np.all(np.diff(area.crossover) > 0.0)
                assert np.all(area.low < area.high)
                assert np.all(np.minimum(area.high[1:], area.high[:-1]) > np.maximum(area.low[1:], area.low[:-1]))


def test_a_free_current_loop_without_filter_has_one_area():
    sheet = fixed_sheet("plain")
    reach = reach_map(current_loop(hardware(refer(sheet.rig), sheet.rig.stage), Firmware()))
    (area,) = reach_areas(reach)
    # A sixth of the rate is the highest crossover of an integrator with one period of delay (D5, derived identity).
    assert_quantity(area.crossover[-1] / math.tau, 1e4 / 6.0, rtol=0.03, unit="Hz", why="between two crossovers; R, J")
