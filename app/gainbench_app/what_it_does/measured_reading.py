"""When logs are read: off the window's thread, where the evidence or a file has changed and where the hand rests."""

from __future__ import annotations

from concurrent.futures import Future, ThreadPoolExecutor

from PySide6.QtCore import QObject, Qt, QTimer, Signal
from PySide6.QtGui import QGuiApplication

from gainbench_app.collecting import CollectorHold
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness
from gainbench_app.what_it_does.measured_logs import LogReader, Measurements, Request, laid_over, waiting

REST_MS = 300
"""After the last change of the sheet its prediction is held against the logs again."""
_ASK_MS = 25


class MeasuredReading(QObject):
    """What the logs of the open sheet tell, always of its newest evidence.

    One reading runs at a time; of those that come up meanwhile only the newest is run. The result is asked after by a
    timer of the window's thread: a thread that told it might tell it to a window that has gone.
    """

    changed = Signal()
    """``found`` is new."""

    def __init__(self, desk: Desk, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._reader = LogReader()
        self._pool = ThreadPoolExecutor(max_workers=1, thread_name_prefix="logs")
        """Its thread begins with the first log; the interpreter waits for it at its end."""
        self._found = Measurements()
        self._asked: Request | None = None
        self._running: Future[Measurements] | None = None
        self._again = False
        self._collector = CollectorHold()
        self.destroyed.connect(self._collector.release)
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(REST_MS)
        self._rest.timeout.connect(self._read)
        self._asking = QTimer(self)
        self._asking.setInterval(_ASK_MS)
        self._asking.timeout.connect(self._ask)
        desk.changed.connect(self._follow)
        desk.opened.connect(self._follow)
        desk.words_due.connect(self._follow)
        application = QGuiApplication.instance()
        if isinstance(application, QGuiApplication):
            application.applicationStateChanged.connect(self._come_back)
        self._follow()

    @property
    def found(self) -> Measurements:
        """What is known now."""
        return self._found

    @property
    def busy(self) -> bool:
        """Whether a reading runs or is due."""
        return self._running is not None or self._rest.isActive()

    def _follow(self) -> None:
        """Called with every move of a slider: it compares, and leaves the rest to a timer."""
        sheet, asked = self._desk.sheet, self._asked
        before = asked.sheet.evidence if asked is not None else ()
        if not sheet.evidence and not before:
            return
        if (
            asked is None
            or asked.path != self._desk.path
            or (sheet.evidence is not before and sheet.evidence != before)
        ):
            self._found = waiting(sheet)
            self._read()
            self.changed.emit()
        elif laid_over(sheet) and self._request() != asked:
            self._rest.start()

    def _come_back(self, state: Qt.ApplicationState) -> None:
        """The user may have recorded a log anew."""
        if state == Qt.ApplicationState.ApplicationActive and laid_over(self._desk.sheet):
            self._read()

    def _request(self) -> Request:
        return Request(
            sheet=self._desk.state.assessed_sheet,
            path=self._desk.path,
            predicted=self._desk.readiness is Readiness.ALL,
        )

    def _read(self) -> None:
        self._rest.stop()
        self._asked = self._request()
        if self._running is not None:
            self._again = True
        elif self._asked.entries:
            self._collector.take()
            self._running = self._pool.submit(self._reader.read, self._asked)
            self._asking.start()

    def _ask(self) -> None:
        running = self._running
        if running is None or not running.done():
            return
        self._running = None
        self._asking.stop()
        self._collector.release()
        if self._again:
            self._again = False
            self._read()
            if self._asked is not None and self._asked.entries:
                return
        asked = self._asked
        self._found = running.result() if asked is not None and asked.entries else Measurements()
        self.changed.emit()
