from itertools import pairwise

import numpy as np
import pytest

from gainbench.kernels.columns import FIRST, HIGH, LAST, LOW, MEAN, TURNS, band_edges, column_figures
from gainbench.kernels.drawn_columns import drawn_columns


def plain_ripple(figures, least):
    """The same by whole arrays, as it is said."""
    spans = figures[HIGH] - figures[LOW]
    turns = figures[TURNS] * (spans > least)
    ripple = np.convolve(turns, np.ones(25), mode="same") >= 4.5
    for wanted, longest in ((False, 24), (True, 10)):
        edges = np.flatnonzero(np.diff(ripple.astype(np.int8))) + 1
        for start, stop in pairwise(edges.tolist()):
            if bool(ripple[start]) is wanted and stop - start < longest:
                ripple[start:stop] = not wanted
    if turns.any():
        ripple &= spans <= 4.0 * np.median(spans[turns > 0])
    return ripple


def bursts(seed, count=9000):
    """A slow movement with saws that come and go, some of them short, and spikes."""
    random = np.random.default_rng(seed)
    saw = (np.arange(count) % 7) / 7.0
    gates = np.repeat(random.random(count // 90 + 1) < 0.5, 90)[:count]
    values = np.sin(np.arange(count) / 900.0) + saw * gates * random.uniform(0.2, 2.0)
    values[random.integers(0, count, 4)] += 20.0
    return values


@pytest.mark.parametrize("seed", range(12))
def test_lines_and_bands_are_those_of_whole_arrays(seed):
    count, per = 9000 + 37 * seed, 15
    values = bursts(seed, count)
    figures = column_figures(values, per)
    ticks, line, centres, edges, ripple = drawn_columns(values, per, 0.1)
    np.testing.assert_array_equal(ripple, plain_ripple(figures, 0.1))
    assert 0 < ripple.sum() < ripple.size
    starts = np.arange(len(ripple)) * per
    np.testing.assert_array_equal(centres, np.minimum(starts + per // 2, count - 1))
    assert (np.diff(ticks) >= 0).all()
    extremes = np.minimum(starts + figures[[FIRST, LAST]].astype(int), count - 1)[:, ~ripple]
    known = dict(zip(ticks.tolist(), line.tolist(), strict=True))
    assert set(extremes[0].tolist()) <= set(known)
    plain = ~np.isin(ticks, centres[ripple])
    np.testing.assert_array_equal(line[plain], values[ticks[plain]])
    # What is left out lies on the way from one point to the next.
    np.testing.assert_allclose(
        np.interp(extremes[1], ticks[plain], line[plain]), values[extremes[1]], atol=0.02 * np.ptp(values), rtol=0
    )
    at_ripple = np.array([known[tick] for tick in centres[ripple].tolist()])
    weights = np.ones(5)
    share = np.convolve(ripple.astype(float), weights, mode="same")
    mean = np.convolve(np.where(ripple, figures[MEAN], 0.0), weights, mode="same")[ripple] / share[ripple]
    np.testing.assert_allclose(at_ripple, mean, rtol=0, atol=1e-12)
    about = figures[MEAN].copy()
    about[ripple] = at_ripple
    np.testing.assert_allclose(edges[:, ripple], band_edges(figures, about, 2)[:, ripple], rtol=0, atol=1e-12)


def test_a_curve_that_goes_on_has_one_point_a_column_and_keeps_its_peaks():
    values = np.sin(np.arange(6000) / 700.0)
    ticks, line, *_, ripple = drawn_columns(values, 10, 1e-3)
    assert not ripple.any()
    assert len(ticks) < 620
    assert line.max() == values.max()
    assert line.min() == values.min()
    np.testing.assert_allclose(np.interp(np.arange(6000), ticks, line), values, rtol=0, atol=1e-4)


def test_ripple_below_the_least_is_a_line():
    values = np.tile([0.0, 0.05], 3000)
    assert drawn_columns(values, 10, 0.01)[4].all()
    assert not drawn_columns(values, 10, 0.1)[4].any()
