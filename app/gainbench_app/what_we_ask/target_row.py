"""One target: its name, an exact box, and a slim slider below."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from gainbench_app.desk import Desk
from gainbench_app.sheet_edits import value_at
from gainbench_app.what_we_ask.targets import Target
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.slim_slider import SlimSlider
from gainbench_app.widgets.value_box import ValueBox


class TargetRow(QWidget):
    """Box and slider of one number."""

    def __init__(
        self, target: Target, desk: Desk, appearance: Appearance, *, colour: str, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self.target = target
        self._desk = desk
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(0)
        line = QHBoxLayout()
        line.setSpacing(8)
        name = QLabel(target.name)
        name.setProperty("role", "muted")
        name.setToolTip(target.path)
        loop = target.path.split(".")[1]
        self.box = ValueBox(f"{target.name} of the {loop} loop")
        self.box.setFixedWidth(116)
        self.box.committed.connect(self._typed)
        name.setBuddy(self.box)
        line.addWidget(name, 1)
        line.addWidget(self.box)
        self.slider = SlimSlider(
            f"{target.name} of the {loop} loop",
            appearance,
            colour=colour,
            low=target.low,
            high=target.high,
            logarithmic=target.logarithmic,
        )
        self.slider.grabbed.connect(lambda: desk.begin_gesture(target.path))
        self.slider.moved.connect(lambda value: desk.move(target.path, value))
        self.slider.dropped.connect(desk.end_gesture)
        self.slider.taken_back.connect(desk.cancel_gesture)
        self.reason = QLabel()
        self.reason.setProperty("role", "problem")
        self.reason.setWordWrap(True)
        self.reason.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Minimum)
        self.reason.setAlignment(Qt.AlignmentFlag.AlignLeft)
        self.reason.setVisible(False)
        outer.addLayout(line)
        outer.addWidget(self.slider)
        outer.addWidget(self.reason)

    def refresh(self, target: Target) -> None:
        """Show what the sheet holds; the target may have moved its ends."""
        self.target = target
        path = target.path
        text, problem = self._desk.text(path) or "", self._desk.problem(path) or ""
        self.box.show_text(text)
        self.box.mark(problem)
        if self.reason.text() != problem:
            self.reason.setText(problem)
            self.reason.setVisible(bool(problem))
        value = value_at(self._desk.sheet, path)
        self.slider.show_range(target.low, target.high)
        self.slider.setEnabled(value is not None)
        if value is not None:
            self.slider.show_number(value, text)

    def _typed(self, text: str) -> None:
        self._desk.set_values({self.target.path: text if text else None})
