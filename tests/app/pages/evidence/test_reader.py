"""Work off the window's thread, held by locks and not by sleeps."""

import threading

import pytest

from gainbench.errors import LogError
from gainbench_app.pages.evidence.reader import Reader

PATIENCE_S = 20.0


@pytest.fixture
def reader(qapp):
    found = Reader()
    yield found
    found.close()


def test_what_is_found_arrives_in_the_windows_thread(qtbot, reader):
    heard = []
    reader.found.connect(lambda key, found: heard.append((key, found, threading.current_thread())))
    ran = []

    def work():
        ran.append(threading.current_thread())
        return 7

    with qtbot.waitSignal(reader.found):
        reader.ask("a", work)
        reader.ask("a", work)
        assert reader.busy
    assert heard == [("a", 7, threading.main_thread())]
    assert len(ran) == 1
    assert ran[0] is not threading.main_thread()
    assert not reader.busy


def failing(error):
    raise error


@pytest.mark.parametrize(
    ("error", "words"),
    [(LogError("x.csv: empty"), "x.csv: empty"), (MemoryError(), "memory"), (KeyError("q"), "KeyError")],
)
def test_what_goes_wrong_is_found_as_an_error(qtbot, reader, error, words):
    with qtbot.waitSignal(reader.found) as caught:
        reader.ask("a", lambda: failing(error))
    assert isinstance(caught.args[1], LogError)
    assert words in str(caught.args[1])
    assert not reader.busy


def test_what_is_dropped_is_not_heard_of(qtbot, reader):
    begun, may_end = threading.Event(), threading.Event()
    heard, ran = [], []
    reader.found.connect(lambda key, found: heard.append(key))

    def slow():
        begun.set()
        may_end.wait(PATIENCE_S)

    reader.ask("a", slow)
    assert begun.wait(PATIENCE_S)
    reader.ask("b", lambda: ran.append("b"))
    reader.drop()
    assert not reader.busy
    may_end.set()
    with qtbot.waitSignal(reader.found):
        reader.ask("c", lambda: None)
    assert heard == ["c"]
    assert ran == []
