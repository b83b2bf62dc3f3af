"""The card with the signals of the chosen log, and the boxes of the span that counts."""

from __future__ import annotations

from PySide6.QtWidgets import QLabel, QPushButton

from gainbench.errors import UnitError
from gainbench.units import Dimension, parse
from gainbench_app.pages.evidence.logs import LogEntry, Logs
from gainbench_app.pages.evidence.signal_plots import SignalPlots
from gainbench_app.what_it_does.spans import Span
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.value_box import ValueBox

_KEPT = (
    "A span holds until the sheet is closed; the sheet has no place for it, so that gainbench identify takes the whole"
    " log."
)


class SignalsCard(Card):
    """Signals and span."""

    def __init__(self, logs: Logs, appearance: Appearance) -> None:
        super().__init__("Signals", appearance, foldable=False)
        self._logs = logs
        self._entry: LogEntry | None = None
        self._of: tuple[object, ...] = ()
        self.start = self._box("start of the span")
        self.stop = self._box("end of the span")
        self.whole = QPushButton("whole log")
        self.whole.setProperty("flat", True)
        self.whole.setToolTip("take all of the log; a double click on the plots does the same")
        self.whole.setAccessibleName("span: take the whole log")
        self.whole.clicked.connect(lambda: self._choose(None))
        for widget in (_small("span from"), self.start, _small("to"), self.stop, self.whole):
            self.head_line.addWidget(widget)
        self.plots = SignalPlots(appearance)
        self.plots.span_moved.connect(self._show_boxes)
        self.plots.span_chosen.connect(lambda start, stop: self._choose(Span(start=start, stop=stop)))
        self.rows.addWidget(self.plots)
        self.problem = QLabel()
        self.problem.setProperty("role", "problem")
        self.problem.setWordWrap(True)
        self.problem.setVisible(False)
        self.rows.addWidget(self.problem)
        self.remarks = QLabel()
        self.remarks.setProperty("role", "small")
        self.remarks.setWordWrap(True)
        self.rows.addWidget(self.remarks)

    def _box(self, name: str) -> ValueBox:
        box = ValueBox(name)
        box.setFixedWidth(84)
        box.committed.connect(lambda _: self._typed())
        return box

    def show_entry(self, entry: LogEntry | None) -> None:
        """Show another log, another mapping or another span."""
        self._entry = entry
        found = self._logs.overview(entry) if entry is not None else None
        self.setVisible(found is not None)
        if entry is None or found is None:
            self._of = ()
            return
        if (found, entry.columns) != self._of:
            self._of = (found, entry.columns)
            self.plots.show_log(found, entry.columns)
            self.remarks.setText(". ".join((*found.remarks, _KEPT)))
        span = self._logs.span(entry)
        self.plots.show_span(span)
        shown = self.plots.span
        self._show_boxes(shown.start, shown.stop)
        self.whole.setEnabled(span is not None)
        self._say("")

    def _show_boxes(self, start: float, stop: float) -> None:
        self.start.show_text(_seconds(start))
        self.stop.show_text(_seconds(stop))

    def _choose(self, span: Span | None) -> None:
        if self._entry is not None:
            self._logs.choose_span(self._entry, span)

    def _typed(self) -> None:
        """Take what is typed, or say what is wrong with it."""
        found = self._logs.overview(self._entry) if self._entry is not None else None
        if found is None:
            return
        ends = []
        for box in (self.start, self.stop):
            text = box.text().strip()
            try:
                ends.append(parse(f"{text} s" if text[-1:].isdigit() else text, Dimension.TIME))
            except UnitError as error:
                self._say(f"{box.accessibleName()}: {error.reason}, for example 1.5 s", box)
                return
        start, stop = max(0.0, ends[0]), min(found.length, ends[1])
        if not start < stop:
            box = self.start if ends[0] >= found.length else self.stop
            self._say(f"a span begins before it ends, and within the log, 0 to {_seconds(found.length)}", box)
            return
        self._choose(Span(start=start, stop=stop))

    def _say(self, problem: str, box: ValueBox | None = None) -> None:
        self.problem.setText(problem)
        self.problem.setVisible(bool(problem))
        for one in (self.start, self.stop):
            one.mark(problem if one is box else "")


def _small(words: str) -> QLabel:
    label = QLabel(words)
    label.setProperty("role", "small")
    return label


def _seconds(value: float) -> str:
    return f"{value:.6g} s"
