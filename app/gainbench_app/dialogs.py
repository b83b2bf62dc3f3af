"""Everything the window asks or tells in a dialog: the one place to put something else in a test."""

from __future__ import annotations

from collections.abc import Mapping
from enum import StrEnum
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QDialog, QFileDialog, QInputDialog, QMessageBox, QWidget

from gainbench.sheetfile import SUFFIX, EntryValue
from gainbench_app.desk import Desk
from gainbench_app.guide.pages import GUIDE
from gainbench_app.handover_dialog import HandoverChoice, HandoverDialog, HandoverRequest
from gainbench_app.keep_dialog import KeepDialog, NamedTuning
from gainbench_app.paste_dialog import PasteDialog

if TYPE_CHECKING:
    from PySide6.QtPrintSupport import QPrinter

_FILTER = f"bench sheets (*{SUFFIX} *.toml);;all files (*)"
_LOGS = "logs (*.csv *.tsv *.txt *.dat *.asc *.mat *.parquet);;all files (*)"
_PICTURES = "pixels (*.png);;lines and words (*.svg)"


class Unsaved(StrEnum):
    """What becomes of unsaved work."""

    SAVE = "save"
    DISCARD = "discard"
    CANCEL = "cancel"


class Recovery(StrEnum):
    """What becomes of work that a crash left behind."""

    RESTORE = "restore"
    DISCARD = "discard"
    LATER = "later"


class Dialogs:
    """Dialogs over a window."""

    def sheet_to_open(self, parent: QWidget) -> Path | None:
        """Which sheet to open; None where none was chosen."""
        name, _ = QFileDialog.getOpenFileName(parent, "Open a bench sheet", "", _FILTER)
        return Path(name) if name else None

    def log_to_open(self, parent: QWidget) -> Path | None:
        """Which log to add; None where none was chosen."""
        name, _ = QFileDialog.getOpenFileName(parent, "Add a log", "", _LOGS)
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
        box.setProperty(GUIDE, "the-sheet")
        box.setInformativeText("Save them before the sheet is closed?")
        save = box.addButton("Save", QMessageBox.ButtonRole.AcceptRole)
        discard = box.addButton("Discard changes", QMessageBox.ButtonRole.DestructiveRole)
        box.addButton("Keep working", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(save)
        _answered(box)
        if box.clickedButton() is save:
            return Unsaved.SAVE
        return Unsaved.DISCARD if box.clickedButton() is discard else Unsaved.CANCEL

    def handover(self, parent: QWidget, request: HandoverRequest) -> HandoverChoice | None:
        """Where the firmware files go, after the cautions were shown; None where nothing is to be written."""
        dialog = HandoverDialog(request, parent)
        return dialog.choice() if _answered(dialog) else None

    def replace_file(self, parent: QWidget, path: Path) -> bool:
        """Whether a file that is there may be replaced."""
        box = QMessageBox(
            QMessageBox.Icon.Question,
            "Replace the file",
            f"{path.name} is there already. Replace it?",
            QMessageBox.StandardButton.Yes | QMessageBox.StandardButton.No,
        )
        box.setParent(parent, box.windowFlags())
        box.setProperty(GUIDE, "handover")
        return _answered(box) == QMessageBox.StandardButton.Yes

    def name_of_tuning(self, parent: QWidget, suggestion: str) -> NamedTuning | None:
        """What a tuning is called on the shelf; None where it is not to be kept."""
        dialog = KeepDialog(suggestion, parent)
        return dialog.named() if _answered(dialog) else None

    def note(self, parent: QWidget, name: str, note: str) -> str | None:
        """The note of a kept tuning; None where it stays."""
        box = QInputDialog(parent)
        box.setOption(QInputDialog.InputDialogOption.UsePlainTextEditForTextInput)
        box.setWindowTitle("Note")
        box.setLabelText(f"note to {name}")
        box.setTextValue(note)
        box.setProperty(GUIDE, "shelf#use")
        return box.textValue() if _answered(box) else None

    def recover(self, parent: QWidget, name: str, when: str) -> Recovery:
        """What becomes of a sheet that was not saved when the program ended."""
        box = QMessageBox(
            QMessageBox.Icon.NoIcon, "Unsaved work", f"{name} was not saved when Gainbench ended ({when})."
        )
        box.setParent(parent, box.windowFlags())
        box.setProperty(GUIDE, "the-sheet")
        box.setInformativeText("Restore it?")
        restore = box.addButton("Restore", QMessageBox.ButtonRole.AcceptRole)
        discard = box.addButton("Discard it", QMessageBox.ButtonRole.DestructiveRole)
        box.addButton("Ask again next time", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(restore)
        _answered(box)
        if box.clickedButton() is restore:
            return Recovery.RESTORE
        return Recovery.DISCARD if box.clickedButton() is discard else Recovery.LATER

    def restart_now(self, parent: QWidget, message: str) -> bool:
        """Whether the program starts again at once."""
        box = QMessageBox(QMessageBox.Icon.NoIcon, "Size", message)
        box.setParent(parent, box.windowFlags())
        box.setInformativeText("Start again now?")
        now = box.addButton("Restart now", QMessageBox.ButtonRole.AcceptRole)
        later = box.addButton("Later", QMessageBox.ButtonRole.RejectRole)
        box.setDefaultButton(now)
        box.setEscapeButton(later)
        _answered(box)
        return box.clickedButton() is now

    def picture_to_save(self, parent: QWidget, suggestion: str) -> Path | None:
        """Where to save a picture; None where no name was given."""
        name, _ = QFileDialog.getSaveFileName(parent, "Save the picture as", suggestion, _PICTURES)
        if not name:
            return None
        path = Path(name)
        return path if path.suffix else path.with_suffix(".png")

    def printer(self, parent: QWidget) -> QPrinter | None:
        """What to print on; None where nothing is to be printed."""
        from PySide6.QtPrintSupport import QPrintDialog, QPrinter

        printer = QPrinter(QPrinter.PrinterMode.HighResolution)
        return printer if QPrintDialog(printer, parent).exec() else None

    def rows_to_set(self, parent: QWidget, desk: Desk) -> Mapping[str, EntryValue]:
        """What pasted rows of a data sheet are to set; nothing where it is not confirmed."""
        dialog = PasteDialog(desk, QGuiApplication.clipboard().text(), parent)
        return dialog.values() if _answered(dialog) else {}

    def show(self, dialog: QDialog) -> None:
        """Show something to read."""
        _answered(dialog)

    def tell(self, parent: QWidget, title: str, message: str) -> None:
        """Say something that must be read."""
        box = QMessageBox(QMessageBox.Icon.NoIcon, title, message, QMessageBox.StandardButton.Ok)
        box.setParent(parent, box.windowFlags())
        _answered(box)


def _answered(dialog: QDialog) -> int:
    """Show a dialog until it is answered; it goes once its answer was read."""
    answer = dialog.exec()
    dialog.deleteLater()
    return answer
