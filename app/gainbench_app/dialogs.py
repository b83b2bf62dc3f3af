"""Everything the window asks or tells in a dialog: the one place to put something else in a test."""

from __future__ import annotations

from enum import StrEnum
from pathlib import Path

from PySide6.QtWidgets import QFileDialog, QMessageBox, QWidget

from gainbench.sheetfile import SUFFIX
from gainbench_app.handover_dialog import HandoverChoice, HandoverDialog, HandoverRequest

_FILTER = f"bench sheets (*{SUFFIX} *.toml);;all files (*)"


class Unsaved(StrEnum):
    """What becomes of unsaved work."""

    SAVE = "save"
    DISCARD = "discard"
    CANCEL = "cancel"


class Dialogs:
    """Dialogs over a window."""

    def sheet_to_open(self, parent: QWidget) -> Path | None:
        """Which sheet to open; None where none was chosen."""
        name, _ = QFileDialog.getOpenFileName(parent, "Open a bench sheet", "", _FILTER)
        return Path(name) if name else None

    def sheet_to_save(self, parent: QWidget, suggestion: Path) -> Path | None:
        """Where to save the sheet; None where no name was given."""
        name, _ = QFileDialog.getSaveFileName(parent, "Save the bench sheet as", str(suggestion), _FILTER)
        if not name:
            return None
        path = Path(name)
        return path if path.suffix else path.with_name(path.name + SUFFIX)

    def unsaved(self, parent: QWidget, title: str) -> Unsaved:
        """What becomes of unsaved work when the sheet is left."""
        box = QMessageBox(QMessageBox.Icon.NoIcon, "Unsaved work", f"{title} has changes that are not saved.")
        box.setParent(parent, box.windowFlags())
        box.setInformativeText("Save them before the sheet is closed?")
        save = box.addButton("Save", QMessageBox.ButtonRole.AcceptRole)
        discard = box.addButton("Discard changes", QMessageBox.ButtonRole.DestructiveRole)
        box.addButton("Keep working", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(save)
        box.exec()
        if box.clickedButton() is save:
            return Unsaved.SAVE
        return Unsaved.DISCARD if box.clickedButton() is discard else Unsaved.CANCEL

    def handover(self, parent: QWidget, request: HandoverRequest) -> HandoverChoice | None:
        """Where the firmware files go, after the cautions were shown; None where nothing is to be written."""
        dialog = HandoverDialog(request, parent)
        return dialog.choice() if dialog.exec() else None

    def replace_file(self, parent: QWidget, path: Path) -> bool:
        """Whether a file that is there may be replaced."""
        answer = QMessageBox.question(parent, "Replace the file", f"{path.name} is there already. Replace it?")
        return answer == QMessageBox.StandardButton.Yes

    def tell(self, parent: QWidget, title: str, message: str) -> None:
        """Say something that must be read."""
        box = QMessageBox(QMessageBox.Icon.NoIcon, title, message, QMessageBox.StandardButton.Ok)
        box.setParent(parent, box.windowFlags())
        box.exec()
