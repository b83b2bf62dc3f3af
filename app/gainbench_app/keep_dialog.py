"""The dialog that names a tuning before it goes on the shelf."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtWidgets import QDialog, QDialogButtonBox, QFormLayout, QLineEdit, QVBoxLayout, QWidget

from gainbench_app.theme import MARGIN_PX


@dataclass(frozen=True, slots=True, kw_only=True)
class NamedTuning:
    """What a tuning is called on the shelf."""

    name: str
    note: str = ""


class KeepDialog(QDialog):
    """Asks for a name and a note."""

    def __init__(self, suggestion: str, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle("Keep this tuning")
        self.setMinimumWidth(380)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(MARGIN_PX + 2, MARGIN_PX, MARGIN_PX + 2, MARGIN_PX)
        layout.setSpacing(14)
        form = QFormLayout()
        form.setHorizontalSpacing(12)
        self.name = QLineEdit(suggestion)
        self.name.setAccessibleName("name of the tuning")
        self.name.selectAll()
        self.note = QLineEdit()
        self.note.setPlaceholderText("none")
        self.note.setAccessibleName("note to the tuning")
        form.addRow("name", self.name)
        form.addRow("note", self.note)
        layout.addLayout(form)
        buttons = QDialogButtonBox()
        self.keep = buttons.addButton("Keep", QDialogButtonBox.ButtonRole.AcceptRole)
        buttons.addButton("Cancel", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        self.name.textChanged.connect(lambda text: self.keep.setEnabled(bool(text.strip())))
        layout.addWidget(buttons)

    def named(self) -> NamedTuning:
        """What was typed."""
        return NamedTuning(name=self.name.text().strip(), note=self.note.text().strip())
