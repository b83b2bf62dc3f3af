"""The fit that is under way: it is started, it tells how far it is, and it can be stopped."""

from __future__ import annotations

import pickle
import sys

from PySide6.QtCore import QObject, QProcess, Signal

from gainbench_app.pages.evidence import fit_child
from gainbench_app.pages.evidence.fit_child import LENGTH_BYTES
from gainbench_app.pages.evidence.fit_task import FitProgress, FitReport, FitRequest

_PATIENCE_MS = 3000


class FitJob(QObject):
    """Runs one fit at a time, in a process of its own."""

    progressed = Signal(object)
    """A FitProgress."""
    finished = Signal(object)
    """A FitReport."""
    failed = Signal(str)
    ended = Signal()
    """After any end, a stop by hand as well."""

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._process: QProcess | None = None
        self._received = b""
        self._report: FitReport | None = None

    @property
    def running(self) -> bool:
        """Whether a fit is under way."""
        return self._process is not None

    def start(self, request: FitRequest) -> None:
        """Begin a fit; one that is under way is stopped."""
        self.cancel()
        self._received, self._report = b"", None
        process = QProcess(self)
        self._process = process
        process.setProgram(sys.executable)
        process.setArguments(["-P", "-m", fit_child.__name__])
        process.readyReadStandardOutput.connect(self._read)
        process.finished.connect(self._end)
        process.errorOccurred.connect(self._not_started)
        process.start()
        process.write(pickle.dumps(request, protocol=pickle.HIGHEST_PROTOCOL))
        process.closeWriteChannel()

    def cancel(self) -> None:
        """Stop the fit that is under way, at once."""
        process = self._take()
        if process is not None:
            process.kill()
            process.waitForFinished(_PATIENCE_MS)
            process.deleteLater()
            self.ended.emit()

    def _take(self) -> QProcess | None:
        """From now on nothing is heard of the process."""
        process, self._process = self._process, None
        if process is not None:
            process.readyReadStandardOutput.disconnect(self._read)
            process.finished.disconnect(self._end)
            process.errorOccurred.disconnect(self._not_started)
        return process

    def _read(self) -> None:
        if self._process is None:
            return
        self._received += bytes(self._process.readAllStandardOutput().data())
        while len(self._received) >= LENGTH_BYTES:
            end = LENGTH_BYTES + int.from_bytes(self._received[:LENGTH_BYTES], "big")
            if len(self._received) < end:
                return
            body, self._received = self._received[LENGTH_BYTES:end], self._received[end:]
            message = pickle.loads(body)
            if isinstance(message, FitProgress):
                self.progressed.emit(message)
            elif isinstance(message, FitReport):
                self._report = message

    def _not_started(self, error: QProcess.ProcessError) -> None:
        if error is QProcess.ProcessError.FailedToStart:
            process = self._take()
            if process is not None:
                why = process.errorString()
                process.deleteLater()
                self.ended.emit()
                self.failed.emit(f"the fit could not be started: {why}")

    def _end(self) -> None:
        self._read()
        process = self._take()
        if process is None:
            return
        told = bytes(process.readAllStandardError().data()).decode("utf-8", errors="replace").strip()
        process.deleteLater()
        self.ended.emit()
        if self._report is not None:
            self.finished.emit(self._report)
        else:
            last = told.splitlines()[-1] if told else "it ended without a word; there may be too little memory"
            self.failed.emit(f"the fit failed: {last}")
