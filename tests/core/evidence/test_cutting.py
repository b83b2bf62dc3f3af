import numpy as np
import pytest

from gainbench.errors import LogError
from gainbench.evidence.cutting import cut_log
from gainbench.evidence.log import Log
from gainbench.model import SignalName

TIME = np.arange(11) / 10.0
LOG = Log(name="run.csv", time=TIME, signals={SignalName.CURRENT: TIME**2}, remarks=("a gap",))


def test_both_ends_are_kept_and_time_begins_anew():
    part = cut_log(LOG, start=0.2, stop=0.5)
    assert part.time == pytest.approx([0.0, 0.1, 0.2, 0.3], abs=1e-12)
    assert np.array_equal(part.signals[SignalName.CURRENT], TIME[2:6] ** 2)
    assert part.remarks == ("a gap", "only 0.2 s to 0.5 s of it was used: 4 of 11 rows")


def test_all_of_it_is_the_log_itself():
    assert cut_log(LOG, start=-1.0, stop=7.0) is LOG


@pytest.mark.parametrize(
    ("start", "stop", "why"),
    [
        (0.31, 0.45, "1 samples lie between 0.31 s and 0.45 s"),
        (3.0, 4.0, "0 samples lie between 3 s and 4 s"),
        (0.5, 0.2, "a span begins before it ends"),
        (float("nan"), 1.0, "a span begins before it ends"),
    ],
)
def test_what_leaves_nothing_is_refused(start, stop, why):
    with pytest.raises(LogError) as refused:
        cut_log(LOG, start=start, stop=stop)
    assert str(refused.value).startswith("run.csv: ")
    assert why in str(refused.value)
