"""Both loops, the findings, and the firmware."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QVBoxLayout, QWidget

from gainbench_app.desk import Desk
from gainbench_app.what_we_ask.findings import FindingsCard
from gainbench_app.what_we_ask.firmware_card import FirmwareCard
from gainbench_app.what_we_ask.loop_card import LoopCard
from gainbench_app.what_we_ask.reach_view import KeptPoints
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.revealing import reveal


class WhatWeAsk(QWidget):
    """The right column."""

    pointed_at = Signal(str)
    """An entry of another column that a finding leads to."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        kept = KeptPoints()
        self.speed = LoopCard("speed", desk, appearance, kept)
        self.current = LoopCard("current", desk, appearance, kept)
        self.findings = FindingsCard(desk, appearance)
        self.firmware = FirmwareCard(desk, appearance)
        self.findings.followed.connect(self.point_at)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(6)
        for card in (self.speed, self.current, self.findings, self.firmware):
            layout.addWidget(card)
        layout.addStretch(1)
        # A finding that comes makes the column longer at once and leaves what stands above it alone: else all cards are
        # squeezed and painted, and painted once more when the column has grown.
        layout.setSizeConstraint(QVBoxLayout.SizeConstraint.SetMinimumSize)
        self.setAttribute(Qt.WidgetAttribute.WA_StaticContents)

    def point_at(self, path: str) -> None:
        """Bring an entry to the eye and the keyboard; one of another column is told."""
        table, _, rest = path.partition(".")
        if table != "aims":
            self.pointed_at.emit(path)
            return
        part, _, key = rest.partition(".")
        if part == "firmware":
            self.firmware.head.setChecked(True)
            reveal(self.firmware.row(key).box)
            return
        card = self.current if part == "current" else self.speed
        card.head.setChecked(True)
        if key in {"crossover", "bandwidth", "phase_margin"} and card.map.view is not None and card.map.view.asked:
            reveal(card.map)
        else:
            reveal(card.row(key).box if key in card.target_keys else card.method)
