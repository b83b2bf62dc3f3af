import threading
import time

from PySide6.QtCore import QCoreApplication, QObject, QTimer, Slot
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QWidget

from gainbench_app.live import WORDS_MS, AfterFrame, FrameTimer, Readiness, WarmUp


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


class Painted(QWidget):
    def __init__(self, seen):
        super().__init__()
        self._seen = seen

    def paintEvent(self, event):  # noqa: N802
        self._seen.append("curves")


def test_words_come_after_the_frame_that_they_belong_to(qtbot):
    seen = []
    widget, words = Painted(seen), AfterFrame(lambda: seen.append("words"))
    qtbot.addWidget(widget)
    widget.show()
    qtbot.waitUntil(lambda: bool(seen))
    seen.clear()

    def frame():
        widget.update()
        words.request()
        # It takes longer than the timer of the words.
        time.sleep(0.003)

    QTimer.singleShot(0, frame)
    qtbot.waitUntil(lambda: len(seen) == 2)
    assert seen == ["curves", "words"]


def test_words_are_spared_while_frames_come_faster_and_come_once_they_rest(qtbot):
    runs = []
    words = AfterFrame(lambda: runs.append(1))
    words.request()
    qtbot.waitUntil(lambda: runs == [1])
    for _ in range(3):
        words.request()
    QCoreApplication.processEvents()
    assert runs == [1]
    qtbot.waitUntil(lambda: runs == [1, 1])
    QTest.qWait(WORDS_MS + 5)
    words.request()
    qtbot.waitUntil(lambda: runs == [1, 1, 1], timeout=WORDS_MS)
    words.request()
    words.stop()
    words.flush()
    assert runs == [1, 1, 1]


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
