"""One entry of the sheet as a row: its name, its box, its tolerance, and why it is refused where it is."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QSize, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_app.widgets.tolerance_box import LEAST_PX, ToleranceBox, bare_tolerance
from gainbench_app.widgets.value_box import ValueBox


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """One entry, in the words of people."""

    path: str
    name: str
    words: tuple[tuple[str, str], ...] = ()
    """Of a choice: the sheet's word and ours."""
    default: str = ""
    """What holds where the sheet is silent, shown grey."""
    optional: bool = True
    """Whether an empty box takes the entry out of the sheet."""
    meaning: str = ""
    """Told when it is pointed at."""
    spread: bool = False
    """Whether it can have a tolerance."""


_BESIDE_TEXT_PX = 14
"""What a box needs beside its text."""
_MOST_MORE_PX = 26
"""What a box may take from its name."""


class _Name(QLabel):
    """A name that gives way: it is cut with dots before the box is, and says itself whole when pointed at."""

    def minimumSizeHint(self) -> QSize:  # noqa: N802
        return QSize(40, super().minimumSizeHint().height())


class EntryRow(QWidget):
    """A row of a card."""

    edited = Signal(str, object)
    """Path, and the text; None where the entry is taken out."""

    def __init__(
        self, entry: Entry, appearance: Appearance, *, box_width: int = 118, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self.entry = entry
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.setSpacing(0)
        line = QHBoxLayout()
        line.setContentsMargins(0, 0, 0, 0)
        line.setSpacing(4)
        name = _Name(entry.name)
        name.setProperty("role", "muted")
        name.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Fixed)
        self._tip = "\n".join(one for one in (entry.meaning or entry.name, entry.path) if one)
        name.setToolTip(self._tip)
        line.addWidget(name, 1)
        self.box: ValueBox | ChoiceBox
        if entry.words:
            choice = ChoiceBox(entry.name, entry.words, appearance, quiet=True)
            choice.chosen.connect(lambda word: self.edited.emit(self.entry.path, word))
            self.box = choice
        else:
            box = ValueBox(entry.name)
            box.setPlaceholderText(entry.default)
            box.committed.connect(self._committed)
            self.box = box
        self._box_width = box_width
        self.box.setFixedWidth(box_width)
        self.box.setToolTip(self._tip)
        name.setBuddy(self.box)
        line.addWidget(self.box)
        self.tolerance: ToleranceBox | QLabel
        if entry.spread:
            spread = ToleranceBox(entry.name)
            spread.committed.connect(self._spread_committed)
            self.tolerance = spread
        else:
            self.tolerance = QLabel()
            self.tolerance.setFixedWidth(LEAST_PX)
        line.addWidget(self.tolerance)
        outer.addLayout(line)
        self.reason = QLabel()
        self.reason.setProperty("role", "problem")
        self.reason.setWordWrap(True)
        self.reason.setVisible(False)
        self.reason.setContentsMargins(0, 1, 0, 4)
        outer.addWidget(self.reason)

    def show_entry(
        self, text: str | None, problem: str | None, tolerance: str | None, *, tolerance_problem: str | None = None
    ) -> None:
        """Show what the sheet holds, why it is refused, and its plus or minus."""
        if isinstance(self.box, ChoiceBox):
            self.box.show_word(text if text is not None else self.entry.default or None)
        else:
            self.box.show_text(text or "")
            self._make_room(text or "")
        self.box.mark(problem or "")
        why = "; ".join(one for one in (problem, f"tolerance: {tolerance_problem}" if tolerance_problem else "") if one)
        if self.reason.text() != why:
            self.reason.setText(why)
        self.reason.setVisible(bool(why))
        if isinstance(self.tolerance, ToleranceBox):
            self.tolerance.show_tolerance(tolerance, tolerance_problem or "")

    def _make_room(self, text: str) -> None:
        """The name gives way to a value that does not fit."""
        wanted = self.box.fontMetrics().horizontalAdvance(text) + _BESIDE_TEXT_PX
        width = min(max(self._box_width, wanted), self._box_width + _MOST_MORE_PX)
        if self.box.width() != width:
            self.box.setFixedWidth(width)

    def _committed(self, text: str) -> None:
        self.edited.emit(self.entry.path, text if text else None)

    def _spread_committed(self, text: str) -> None:
        bare = bare_tolerance(text)
        self.edited.emit(f'tolerance."{self.entry.path}"', bare if bare else None)
