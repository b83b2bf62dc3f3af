import numpy as np

from gainbench.evidence import Log
from gainbench.model import SignalName
from gainbench_app.pages.evidence.overview import BUCKETS, envelope, overview


def test_no_peak_of_millions_of_rows_is_lost():
    count = 2_000_000
    values = np.zeros(count)
    values[1_234_567], values[77] = 5.0, -3.0
    found = envelope(np.arange(count) / 1e4, values)
    assert found.x.size == BUCKETS
    assert (found.low.min(), found.high.max()) == (-3.0, 5.0)
    assert abs(found.x[int(np.argmax(found.high))] - 123.4567) < count / 1e4 / BUCKETS
    fewer = found.reduced(300)
    assert (fewer.x.size, fewer.low.min(), fewer.high.max()) == (300, -3.0, 5.0)
    x, y = fewer.line()
    assert x.size == y.size == 600


def test_few_rows_are_kept_as_they_are():
    x = np.arange(50.0)
    found = envelope(x, x**2)
    assert np.array_equal(found.line()[1], x**2)


def test_a_log_is_looked_at_once():
    time = np.concatenate((np.arange(100) / 1e3, 1.0 + np.arange(100) / 1e3))
    log = Log(name="run.csv", time=time, signals={SignalName.SPEED: time}, remarks=("a gap",))
    found = overview(log)
    assert (found.rows, found.pieces, found.remarks) == (200, 2, ("a gap",))
    assert set(found.signals) == {SignalName.SPEED}
