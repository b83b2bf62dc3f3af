"""Both loops, the findings, and the firmware."""

from __future__ import annotations

from PySide6.QtWidgets import QVBoxLayout, QWidget

from gainbench_app.desk import Desk
from gainbench_app.what_we_ask.findings import FindingsCard
from gainbench_app.what_we_ask.firmware_card import FirmwareCard
from gainbench_app.what_we_ask.loop_card import LoopCard
from gainbench_app.widgets.appearance import Appearance


class WhatWeAsk(QWidget):
    """The right column."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.speed = LoopCard("speed", desk, appearance)
        self.current = LoopCard("current", desk, appearance)
        self.findings = FindingsCard(desk, appearance)
        self.firmware = FirmwareCard(desk, appearance)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(8)
        for card in (self.speed, self.current, self.findings, self.firmware):
            layout.addWidget(card)
        layout.addStretch(1)
