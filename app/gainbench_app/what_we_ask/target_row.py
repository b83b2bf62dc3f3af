"""One target: its name, a slim slider, and an exact box: in one line, or half a line with the slider below."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from gainbench_app.desk import Desk
from gainbench_app.sheet_edits import value_at
from gainbench_app.what_we_ask.targets import Target
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.slim_slider import SlimSlider
from gainbench_app.widgets.value_box import CardBox

_BOX_PX = {"kp": 112, "ki": 112, "reference_weight": 52, "damping": 60, "spread": 60}
_USUAL_BOX_PX = 78
_PAIRED = {"crossover": "crossover", "bandwidth": "bandwidth", "phase_margin": "margin"}
"""Targets of the reach map stand side by side below it, by shorter names."""


class TargetRow(QWidget):
    """Slider and box of one number."""

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
        line.setSpacing(4 if target.paired else 6)
        self.name = QLabel(_PAIRED[target.key] if target.paired else target.name)
        self.name.setProperty("role", "small" if target.paired else "muted")
        self.name.setToolTip(f"{target.name}: {target.path}")
        loop = target.path.split(".")[1]
        self.box = CardBox(f"{target.name} of the {loop} loop", appearance)
        if not target.paired:
            self.box.setFixedWidth(_BOX_PX.get(target.key, _USUAL_BOX_PX))
        self.box.committed.connect(self._typed)
        self.name.setBuddy(self.box)
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
        line.addWidget(self.name)
        if not target.paired:
            line.addWidget(self.slider, 1)
        line.addWidget(self.box, 1 if target.paired else 0)
        self.reason = QLabel()
        self.reason.setProperty("role", "problem")
        self.reason.setWordWrap(True)
        self.reason.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Minimum)
        self.reason.setAlignment(Qt.AlignmentFlag.AlignLeft)
        self.reason.setVisible(False)
        outer.addLayout(line)
        if target.paired:
            outer.addWidget(self.slider)
        outer.addWidget(self.reason)
        if target.paired:
            outer.addStretch(1)

    @property
    def paired(self) -> bool:
        """Whether it is half a line."""
        return self.target.paired

    def refresh(self, target: Target, *, held: bool = False) -> None:
        """Show what the sheet holds; the target may have moved its ends. With gains held it waits."""
        self.target = target
        problem = self._desk.problem(target.path) or ""
        self.box.mark(problem)
        if self.reason.text() != problem:
            self.reason.setText(problem)
            self.reason.setVisible(bool(problem))
        waits = held and target.key != "reference_weight"
        self.box.setEnabled(not waits)
        self.slider.show_range(target.low, target.high)
        self.slider.setEnabled(self.follow() and not waits)

    def follow(self) -> bool:
        """Show the number alone, as while it is moved; True where the sheet has one."""
        path = self.target.path
        text, value = self._desk.text(path) or "", value_at(self._desk.sheet, path)
        self.box.show_text(text)
        if value is not None:
            self.slider.show_number(value, text)
        return value is not None

    def _typed(self, text: str) -> None:
        self._desk.set_values({self.target.path: text if text else None})
