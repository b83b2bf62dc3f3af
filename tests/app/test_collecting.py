import gc
import weakref

import pytest

from gainbench_app.collecting import CollectorHold


@pytest.fixture(autouse=True)
def collector():
    assert gc.isenabled()
    yield
    gc.enable()


def test_the_collector_comes_back_with_the_last_hold():
    first, second = CollectorHold(), CollectorHold()
    first.take()
    second.take()
    assert not gc.isenabled()
    first.release()
    assert not gc.isenabled()
    second.release()
    assert gc.isenabled()


class Knot:
    """Refers to itself: only the collector takes it away."""

    def __init__(self):
        self.own = self


def test_what_piled_up_goes_with_the_hold():
    hold = CollectorHold()
    hold.take()
    left = weakref.ref(Knot())
    assert left() is not None
    hold.release()
    assert left() is None


def test_taking_or_releasing_twice_is_once():
    first, second = CollectorHold(), CollectorHold()
    first.take()
    first.take()
    second.release()
    assert not gc.isenabled()
    first.release()
    first.release()
    assert gc.isenabled()
