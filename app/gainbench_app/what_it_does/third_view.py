"""The view beside the Bode plot, one of four to choose from; only the one that is shown is computed."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QPushButton, QStackedWidget, QVBoxLayout, QWidget

from gainbench.assess import Assessment
from gainbench.assessed import LoopName
from gainbench_app.what_it_does.captioned import CaptionedFigure
from gainbench_app.what_it_does.ledger_view import LedgerView, ledger_rows
from gainbench_app.what_it_does.locked_step_plot import LockedStepPlot
from gainbench_app.what_it_does.operating_plane import OperatingPlane
from gainbench_app.what_it_does.sensitivity import SensitivityPlot
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.choices import Choices

LEDGER, PLANE, SENSITIVITY, STEP = "phase ledger", "plane", "sensitivity", "locked step"
_TIPS = {
    LEDGER: "how many degrees each contributor takes from the phase margin",
    PLANE: "operating plane: torque over speed, with the limits and the path of the response",
    SENSITIVITY: "how much each loop amplifies what disturbs it, over frequency",
    STEP: "the current's step with the rotor locked",
}


@dataclass(frozen=True, slots=True, kw_only=True)
class ThirdSubject:
    """What the third view is of."""

    assessment: Assessment
    loop: LoopName
    """Of the ledger."""
    speed_unit: str
    speed_size: float
    """One of that unit [rad/s]."""
    prepared: bool
    """Whether everything that is drawn has its code compiled."""


class ThirdView(QFrame):
    """A frame with tabs."""

    chosen = Signal(str)

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setObjectName("card")
        self.tabs = Choices("third view", (LEDGER, PLANE, SENSITIVITY, STEP), tips=_TIPS)
        self.ledger = LedgerView(appearance)
        self.plane = OperatingPlane(appearance)
        self.sensitivity = SensitivityPlot(appearance)
        self.step = LockedStepPlot(appearance)
        self.views: dict[str, CaptionedFigure] = {
            LEDGER: self.ledger,
            PLANE: self.plane,
            SENSITIVITY: self.sensitivity,
            STEP: self.step,
        }
        self.back = QPushButton("open loops")
        self.back.setProperty("flat", True)
        self.back.setToolTip("back to the open loops")
        self.back.setVisible(False)
        self._subject: ThirdSubject | None = None
        self._stack = QStackedWidget()
        for view in self.views.values():
            self._stack.addWidget(view)
        head = QHBoxLayout()
        head.setContentsMargins(7, 5, 8, 0)
        head.addWidget(self.tabs)
        head.addStretch(1)
        head.addWidget(self.back)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(1, 4, 1, 3)
        layout.setSpacing(0)
        layout.addLayout(head)
        layout.addWidget(self._stack, 1)
        self.tabs.group.buttonClicked.connect(self._choose)

    @property
    def view(self) -> CaptionedFigure:
        """The one shown."""
        return self.views[self.tabs.word]

    def choose(self, name: str) -> None:
        """Show another view."""
        self.tabs.choose(name)
        self._choose()

    def _choose(self) -> None:
        self._stack.setCurrentWidget(self.view)
        self._fill()
        self.chosen.emit(self.tabs.word)

    def show_subject(self, subject: ThirdSubject) -> None:
        """Show the newest assessment."""
        self._subject = subject
        self._fill()

    def show_stale(self, words: str) -> None:
        """Hatch what is of the last valid sheet."""
        for view in self.views.values():
            view.show_stale(words)

    def _fill(self) -> None:
        subject = self._subject
        if subject is None or self.isHidden():
            return
        assessment = subject.assessment
        match self.tabs.word:
            case "phase ledger":
                self.ledger.show_ledger(ledger_rows(assessment, subject.loop) if subject.prepared else None)
            case "plane":
                self.plane.show_assessment(assessment, speed_unit=subject.speed_unit, speed_size=subject.speed_size)
            case "sensitivity":
                self.sensitivity.show_loops({"speed": assessment.speed, "current": assessment.current})
            case _:
                self.step.show_step(assessment.locked_step)

    def fill_again(self) -> None:
        """It has come into sight."""
        self._fill()
