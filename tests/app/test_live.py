import threading

from PySide6.QtCore import QObject, Slot

from gainbench_app.live import FrameTimer, Readiness, WarmUp


def test_many_requests_make_one_run(qtbot):
    runs = []
    timer = FrameTimer(lambda: runs.append(1))
    for _ in range(50):
        timer.request()
    qtbot.waitUntil(lambda: runs == [1])
    timer.request()
    qtbot.waitUntil(lambda: runs == [1, 1])


def test_a_flush_runs_at_once_and_only_what_was_asked_for(qapp):
    runs = []
    timer = FrameTimer(lambda: runs.append(1))
    timer.flush()
    assert runs == []
    timer.request()
    timer.flush()
    timer.flush()
    assert runs == [1]


class Listener(QObject):
    def __init__(self):
        super().__init__()
        self.heard = []

    @Slot(Readiness)
    def hear(self, readiness):
        self.heard.append((readiness, threading.current_thread() is threading.main_thread()))

    @Slot(str)
    def hear_failure(self, message):
        self.heard.append((message, threading.current_thread() is threading.main_thread()))


def test_the_loops_come_first_and_are_heard_in_the_windows_thread(qtbot):
    gate, began = threading.Event(), threading.Event()
    listener = Listener()
    warming = WarmUp(lambda: None, lambda: (began.set(), gate.wait(10.0)))
    warming.reached.connect(listener.hear)
    warming.start()
    assert began.wait(10.0)
    qtbot.waitUntil(lambda: listener.heard == [(Readiness.LOOPS, True)])
    gate.set()
    qtbot.waitUntil(lambda: listener.heard == [(Readiness.LOOPS, True), (Readiness.ALL, True)])
    assert warming.wait(10_000)


def test_a_failure_is_heard(qtbot):
    def fails():
        raise OSError("no compiler")

    listener = Listener()
    warming = WarmUp(fails, lambda: None)
    warming.reached.connect(listener.hear)
    warming.failed.connect(listener.hear_failure)
    warming.start()
    qtbot.waitUntil(lambda: listener.heard == [("OSError: no compiler", True)])
    assert warming.wait(10_000)


def test_an_interruption_ends_it_between_the_steps(qtbot):
    gate, ran = threading.Event(), []
    warming = WarmUp(lambda: gate.wait(10.0), lambda: ran.append(1))
    warming.start()
    warming.requestInterruption()
    gate.set()
    assert warming.wait(10_000)
    assert ran == []
