"""The fit of the page: begun, stopped, what came of it, and what of that goes into the sheet."""

from __future__ import annotations

from collections.abc import Collection
from dataclasses import replace

from PySide6.QtCore import QObject, Signal

from gainbench.errors import SheetError
from gainbench.evidence.accept import accept
from gainbench.evidence.estimate import EstimateName
from gainbench.model import EvidenceLog
from gainbench.sheetfile import SheetDocument
from gainbench_app.desk import Desk
from gainbench_app.pages.evidence.fit_job import FitJob
from gainbench_app.pages.evidence.fit_task import FitProgress, FitReport, FitRequest
from gainbench_app.pages.evidence.logs import Logs

_Fitted = tuple[tuple[EvidenceLog, ...], tuple[tuple[float, float] | None, ...]]


class Fitting(QObject):
    """One fit, of all logs of the sheet together."""

    changed = Signal()
    """Progress, report, or whether the report still fits the list, is other than before."""
    failed = Signal(str)

    def __init__(self, desk: Desk, logs: Logs, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._logs = logs
        self.job = FitJob(self)
        self.job.progressed.connect(self._progress)
        self.job.finished.connect(self._finish)
        self.job.failed.connect(self.failed)
        self.job.ended.connect(self._end)
        self._asked: _Fitted = ((), ())
        self.progress: FitProgress | None = None
        self.report: FitReport | None = None
        self.evidence: tuple[EvidenceLog, ...] = ()
        """What the report is of."""
        self._fitted: _Fitted = ((), ())
        desk.opened.connect(self.forget)

    @property
    def running(self) -> bool:
        """Whether a fit is under way."""
        return self.job.running

    @property
    def stale(self) -> bool:
        """Whether logs, columns, experiments or spans are other than those of the report."""
        return self.report is not None and self._fitted != self._now()

    def _now(self) -> _Fitted:
        spans = []
        for entry in self._logs.entries:
            if entry.index is not None:
                span = self._logs.span(entry)
                spans.append(None if span is None else (span.start, span.stop))
        return tuple(replace(one, note="") for one in self._desk.sheet.evidence), tuple(spans)

    def start(self) -> None:
        """Fit all logs of the sheet, each over its span."""
        sheet = self._desk.sheet
        if not sheet.evidence:
            return
        self._asked = self._now()
        files = tuple(str(one.file) for one in self._logs.entries if one.index is not None)
        self.progress = FitProgress(done=0, steps=3 * len(files) + 1, words="preparing the numerical code")
        self.job.start(FitRequest(sheet=sheet, files=files, spans=self._asked[1]))
        self.changed.emit()

    def cancel(self) -> None:
        """Stop the fit; the last report stays."""
        self.job.cancel()

    def forget(self) -> None:
        """Another sheet is open."""
        self.cancel()
        self.report = None
        self.evidence = ()
        self.changed.emit()

    def accept(self, names: Collection[EstimateName]) -> str:
        """Put estimates into the sheet, with tolerances and their source, as one step of undo; why not, or nothing."""
        if self.report is None or self.report.found is None:
            return ""
        found = self.report.found
        chosen = replace(found, estimates={name: one for name, one in found.estimates.items() if name in names})

        def change(document: SheetDocument) -> SheetDocument:
            return document.with_values(accept(document.sheet, chosen, typed=document.typed).values)

        try:
            self._desk.edit(change)
        except SheetError as error:
            return str(error)
        return ""

    def _progress(self, progress: FitProgress) -> None:
        self.progress = progress
        self.changed.emit()

    def _finish(self, report: FitReport) -> None:
        self.report = report
        self._fitted = self._asked
        self.evidence = self._asked[0]
        self.changed.emit()

    def _end(self) -> None:
        self.progress = None
        self.changed.emit()
