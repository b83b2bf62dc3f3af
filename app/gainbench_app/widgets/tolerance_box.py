"""A small box for the plus or minus of a value: quiet until it holds something or is pointed at."""

from __future__ import annotations

from PySide6.QtCore import QEvent, Qt
from PySide6.QtGui import QEnterEvent, QFocusEvent
from PySide6.QtWidgets import QWidget

from gainbench_app.widgets.value_box import ValueBox

LEAST_PX, _MOST_PX = 46, 84
_PLUS_MINUS = "\N{PLUS-MINUS SIGN}"


def bare_tolerance(text: str) -> str:
    """The tolerance as the sheet holds it: without the sign that the box shows."""
    return text.strip().removeprefix(_PLUS_MINUS).removeprefix("+-").removeprefix("+/-").strip()


class ToleranceBox(ValueBox):
    """Shows ``±10 %``; an emptied box takes the tolerance out of the sheet."""

    def __init__(self, of: str, parent: QWidget | None = None) -> None:
        super().__init__(f"tolerance of {of}", parent)
        self.setProperty("spread", True)
        self.setMinimumWidth(LEAST_PX)
        self.setFixedWidth(LEAST_PX)
        self.setAlignment(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
        self._tip("")

    def show_tolerance(self, text: str | None, problem: str) -> None:
        """Show what the sheet holds, and why it is refused."""
        shown = f"{_PLUS_MINUS}{text}" if text else ""
        self.show_text(shown)
        self.mark(problem)
        self._tip(problem)
        width = self.fontMetrics().horizontalAdvance(shown) + 10
        self.setFixedWidth(min(max(width, LEAST_PX), _MOST_PX))

    def _tip(self, problem: str) -> None:
        told = problem or "tolerance: plus or minus, in percent or in the unit of the value (10 %)"
        if self.toolTip() != told:
            self.setToolTip(told)

    def enterEvent(self, event: QEnterEvent) -> None:  # noqa: N802
        """Pointed at, it shows what it is for."""
        self.setPlaceholderText(_PLUS_MINUS)
        super().enterEvent(event)

    def leaveEvent(self, event: QEvent) -> None:  # noqa: N802
        """Quiet again, unless it is being typed into."""
        if not self.hasFocus():
            self.setPlaceholderText("")
        super().leaveEvent(event)

    def focusInEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Reached by the keyboard, it shows what it is for."""
        self.setPlaceholderText(_PLUS_MINUS)
        super().focusInEvent(event)

    def focusOutEvent(self, event: QFocusEvent) -> None:  # noqa: N802
        """Quiet again."""
        if not self.underMouse():
            self.setPlaceholderText("")
        super().focusOutEvent(event)
