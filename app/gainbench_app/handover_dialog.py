"""The dialog before gains leave the tool: where to, and what to mind."""

from __future__ import annotations

from dataclasses import dataclass
from html import escape
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QDialog,
    QDialogButtonBox,
    QFileDialog,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QTextBrowser,
    QVBoxLayout,
    QWidget,
)

from gainbench.handover import BUS_CONDITION, CAUTIONS, ESTIMATE, NOT_MODELLED, SIGN_CONVENTION
from gainbench_app.theme import MARGIN_PX, strong


@dataclass(frozen=True, slots=True, kw_only=True)
class HandoverRequest:
    """What is about to be handed over."""

    title: str
    folder: Path
    """Suggested."""
    prefix: str
    """Suggested, from the title."""
    remarks: tuple[str, ...] = ()
    """What to know about this handover: breaking findings, unsaved work."""


@dataclass(frozen=True, slots=True, kw_only=True)
class HandoverChoice:
    """What the user decided."""

    folder: Path
    prefix: str | None
    """None for the suggested one."""


class HandoverDialog(QDialog):
    """Asks for a folder, and shows the cautions."""

    def __init__(self, request: HandoverRequest, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._request = request
        self.setWindowTitle("Handover")
        self.resize(640, 620)
        layout = QVBoxLayout(self)
        layout.setContentsMargins(MARGIN_PX + 2, MARGIN_PX, MARGIN_PX + 2, MARGIN_PX)
        layout.setSpacing(10)
        head = QLabel(f"Hand over {request.title}")
        head.setProperty("role", "large")
        head.setTextFormat(Qt.TextFormat.PlainText)
        layout.addWidget(head)
        for remark in request.remarks:
            line = QLabel(remark)
            line.setProperty("role", "problem")
            line.setTextFormat(Qt.TextFormat.PlainText)
            line.setWordWrap(True)
            layout.addWidget(line)
        form = QFormLayout()
        form.setHorizontalSpacing(12)
        self.folder = QLineEdit(str(request.folder))
        self.folder.setAccessibleName("folder of the firmware files")
        browse = QPushButton("Choose...")
        browse.clicked.connect(self._browse)
        where = QHBoxLayout()
        where.addWidget(self.folder, 1)
        where.addWidget(browse)
        form.addRow("into the folder", where)
        self.prefix = QLineEdit()
        self.prefix.setPlaceholderText(request.prefix)
        self.prefix.setAccessibleName("prefix of the macros")
        form.addRow("prefix of the macros", self.prefix)
        layout.addLayout(form)
        self.cautions = QTextBrowser()
        self.cautions.setAccessibleName("cautions")
        self.cautions.setHtml(_cautions())
        layout.addWidget(self.cautions, 1)
        buttons = QDialogButtonBox()
        self.write = buttons.addButton("Write the header", QDialogButtonBox.ButtonRole.AcceptRole)
        buttons.addButton("Cancel", QDialogButtonBox.ButtonRole.RejectRole)
        buttons.accepted.connect(self.accept)
        buttons.rejected.connect(self.reject)
        layout.addWidget(buttons)

    def choice(self) -> HandoverChoice:
        """What was decided."""
        return HandoverChoice(folder=Path(self.folder.text().strip()), prefix=self.prefix.text().strip() or None)

    def _browse(self) -> None:
        found = QFileDialog.getExistingDirectory(self, "Folder of the firmware files", self.folder.text())
        if found:
            self.folder.setText(found)


def _cautions() -> str:
    items = "".join(f"<li style='margin-bottom:5px'>{escape(one)}</li>" for one in CAUTIONS)
    return (
        f"<p>{strong('Before the first run')}</p><ul style='margin-left:-18px'>{items}</ul>"
        f"<p>{strong('Signs.')} {escape(SIGN_CONVENTION)}</p><p>{strong('Bus.')} {escape(BUS_CONDITION)}</p>"
        f"<p>{strong('Not modelled:')} {escape(', '.join(NOT_MODELLED))}.</p><p>{escape(ESTIMATE)}</p>"
    )
