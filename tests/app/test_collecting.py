import gc

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


def test_taking_or_releasing_twice_is_once():
    first, second = CollectorHold(), CollectorHold()
    first.take()
    first.take()
    second.release()
    assert not gc.isenabled()
    first.release()
    first.release()
    assert gc.isenabled()
