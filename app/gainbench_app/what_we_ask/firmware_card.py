"""The arithmetic of the firmware, and the form its gains are written in."""

from __future__ import annotations

from html import escape

from PySide6.QtWidgets import QWidget

from gainbench_app.desk import Desk
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.entry_row import Entry, EntryRow

_SWITCH = (("false", "no"), ("true", "yes"))
_PATH = "aims.firmware"
ENTRIES = (
    Entry(
        path=f"{_PATH}.integrator",
        name="integrator",
        words=(("backward", "backward"), ("forward", "forward"), ("trapezoid", "trapezoid")),
        default="backward",
    ),
    Entry(
        path=f"{_PATH}.windup",
        name="windup",
        words=(("hold", "hold"), ("back-calculation", "back-calculation")),
        default="hold",
    ),
    Entry(path=f"{_PATH}.back_emf_feedforward", name="back-EMF feedforward", words=_SWITCH, default="false"),
    Entry(
        path=f"{_PATH}.gain_form",
        name="gains as",
        words=(("kp-ki", "Kp and Ki"), ("kp-ti", "Kp and Ti"), ("kp-wi", "Kp and Ki/Kp")),
        default="kp-ki",
    ),
    Entry(path=f"{_PATH}.ki_includes_period", name="Ki times the period", words=_SWITCH, default="false"),
    Entry(path=f"{_PATH}.speed_unit", name="unit of speed", default="rad/s"),
    Entry(
        path=f"{_PATH}.speed_output",
        name="speed PI puts out",
        words=(("A", "A"), ("N*m", "N*m")),
        default="A",
    ),
)


class FirmwareCard(Card):
    """The entries of [aims.firmware]; it starts folded to one line."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__("Firmware", appearance, parent=parent)
        self._desk = desk
        self._shown: tuple[object, ...] = ()
        self._entry_rows = {entry.path: EntryRow(entry, appearance, box_width=140) for entry in ENTRIES}
        for row in self._entry_rows.values():
            row.tolerance.setVisible(False)
            row.edited.connect(lambda path, text: desk.set_values({path: text}))
            self.rows.addWidget(row)
        self.head.setChecked(False)
        desk.changed.connect(self.refresh)
        self.refresh()

    def row(self, key: str) -> EntryRow:
        """The row of an entry, ``integrator``."""
        return self._entry_rows[f"{_PATH}.{key}"]

    def refresh(self) -> None:
        """Show what the sheet holds; no slider moves anything of it."""
        state = self._desk.state
        present = (state.document, state.wrong, state.problems)
        if len(present) == len(self._shown) and all(a is b for a, b in zip(present, self._shown, strict=True)):
            return
        self._shown = present
        for path, row in self._entry_rows.items():
            row.show_entry(self._desk.text(path), self._desk.problem(path), None)
            if self._desk.problem(path) is not None:
                self.head.setChecked(True)
        firmware = self._desk.sheet.aims.firmware
        words = [f"{firmware.integrator.value} sum", f"windup by {firmware.windup.value}"]
        if firmware.back_emf_feedforward:
            words.append("back-EMF fed forward")
        words.append(f"speed in {escape(firmware.speed_unit)}")
        self.show_follows(" · ".join(words))
