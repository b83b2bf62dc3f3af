import numpy as np
import pytest

from gainbench.kernels.columns import FIRST, HIGH, LAST, LOW, MEAN, TURNS, band_edges, column_figures


def plain_figures(values, per):
    """The same, column by column, as it is said."""
    whole = -(-len(values) // per)
    padded = np.concatenate((values, np.full(whole * per - len(values), values[-1]))).reshape(whole, per)
    change = np.diff(padded, axis=1)
    turns = ((change[:, 1:] > 0) & (change[:, :-1] < 0)) | ((change[:, 1:] < 0) & (change[:, :-1] > 0))
    places = np.stack((padded.argmin(axis=1), padded.argmax(axis=1)))
    return np.stack(
        (
            padded.min(axis=1),
            padded.max(axis=1),
            padded.mean(axis=1),
            places.min(axis=0),
            places.max(axis=0),
            turns.sum(axis=1),
        )
    )


@pytest.mark.parametrize(("count", "per"), [(1000, 10), (1003, 10), (7, 10), (64, 3), (500, 6)])
def test_figures_are_those_of_each_column(count, per):
    values = np.random.default_rng(count).standard_normal(count).round(1)
    found, plain = column_figures(values, per), plain_figures(values, per)
    np.testing.assert_allclose(found[MEAN], plain[MEAN], rtol=0, atol=1e-13)
    for row in (LOW, HIGH, FIRST, LAST, TURNS):
        np.testing.assert_array_equal(found[row], plain[row])


def test_the_edges_of_a_band_hold_all_of_it_and_follow_a_slope():
    time = np.arange(6000.0)
    slope = 0.01 * time
    values = slope + np.where(np.arange(6000) % 2 == 0, 1.0, -1.0)
    figures = column_figures(values, 10)
    low, high = band_edges(figures, figures[MEAN], 2)
    assert (low <= figures[LOW]).all()
    assert (high >= figures[HIGH]).all()
    # About the mean the ripple is 1 high wherever it is, and the slope within a column adds less than 0.1.
    middle = slice(5, -5)
    np.testing.assert_allclose((high - figures[MEAN])[middle], 1.0, atol=0.1)
    np.testing.assert_allclose((figures[MEAN] - low)[middle], 1.0, atol=0.1)


def test_one_large_column_widens_its_neighbours():
    values = np.tile([1.0, -1.0], 500)
    values[505] = 5.0
    figures = column_figures(values, 10)
    _, high = band_edges(figures, np.zeros(100), 2)
    assert high[50] == 5.0
    assert (high[[48, 49, 51, 52]] > 3.0).all()
    assert high[47] == high[53] == 1.0
