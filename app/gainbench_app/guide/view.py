"""One page of the guide at a time, with links between pages, a way back, and a search in the page."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QUrl, Signal
from PySide6.QtGui import QColor, QFont, QTextCharFormat, QTextCursor
from PySide6.QtWidgets import QFrame, QTextBrowser, QTextEdit, QWidget

from gainbench_app.guide.look import dress, heading_blocks
from gainbench_app.guide.pages import has_place, page_text, slug, title
from gainbench_app.theme import BODY_PX, sized
from gainbench_app.widgets.appearance import Appearance

_RIM_PX = 22
_MOST_PLACES = 200


@dataclass(slots=True, kw_only=True)
class _Place:
    """Where the reader was."""

    page: str
    section: str
    scrolled: int = 0


class GuideView(QTextBrowser):
    """Shows pages; the owner gives it names of them."""

    page_shown = Signal(str)
    """The name of the page that is shown now."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._appearance = appearance
        self._places: list[_Place] = []
        self._at = -1
        self._found: list[QTextCursor] = []
        self._current = -1
        self._sought = ""
        self.setOpenLinks(False)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setAccessibleName("page of the guide")
        self.document().setDocumentMargin(_RIM_PX)
        self.document().setUndoRedoEnabled(False)
        self.anchorClicked.connect(self._follow)
        appearance.changed.connect(self._dress_again)

    # Pages

    @property
    def page(self) -> str:
        """Name of the page that is shown; empty before the first."""
        return self._places[self._at].page if self._places else ""

    @property
    def can_go_back(self) -> bool:
        """Whether another place was shown before."""
        return self._at > 0

    @property
    def can_go_forward(self) -> bool:
        """Whether the way back was taken."""
        return self._at + 1 < len(self._places)

    def open(self, page: str, section: str = "") -> None:
        """Show a page at one of its sections, by default at its top.

        Parameters
        ----------
        page : str
            Name of a page.
        section : str
            What a link calls the heading.

        Raises
        ------
        KeyError
            If there is no such page or section.
        """
        if not has_place(page, section):
            raise KeyError(f"{page}#{section}")
        here = self._places[self._at] if self._places else None
        if here is None or (here.page, here.section) != (page, section):
            self._leave()
            del self._places[self._at + 1 :]
            self._places.append(_Place(page=page, section=section))
            del self._places[:-_MOST_PLACES]
            self._at = len(self._places) - 1
        self._show(page)
        self._scroll_to(section)
        self.page_shown.emit(page)

    def go_back(self) -> None:
        """Show the place before, where it was left."""
        self._go(-1)

    def go_forward(self) -> None:
        """Take the way back again."""
        self._go(1)

    def _go(self, by: int) -> None:
        if not 0 <= self._at + by < len(self._places):
            return
        self._leave()
        self._at += by
        place = self._places[self._at]
        self._show(place.page)
        self.verticalScrollBar().setValue(place.scrolled)
        self.page_shown.emit(place.page)

    def _leave(self) -> None:
        if self._places:
            self._places[self._at].scrolled = self.verticalScrollBar().value()

    def _follow(self, url: QUrl) -> None:
        page, section = url.path().removesuffix(".md"), url.fragment()
        if has_place(page or self.page, section):
            self.open(page or self.page, section)

    def _show(self, page: str) -> None:
        self.setMarkdown(page_text(page))
        self.setAccessibleDescription(title(page))
        self._dress()
        self.search(self._sought)

    def _dress(self) -> None:
        hand = sized(QFont(self.font()), BODY_PX)
        self.document().setDefaultFont(hand)
        dress(self.document(), self._appearance.theme, font=hand)
        self.moveCursor(QTextCursor.MoveOperation.Start)

    def _dress_again(self) -> None:
        """Another theme: the same place in other colours."""
        if self.page:
            scrolled = self.verticalScrollBar().value()
            self._show(self.page)
            self.verticalScrollBar().setValue(scrolled)

    def _scroll_to(self, section: str) -> None:
        block = next((one for one in heading_blocks(self.document()) if slug(one.text()) == section), None)
        if block is None:
            self.verticalScrollBar().setValue(0)
            return
        self.setTextCursor(QTextCursor(block))
        top = self.document().documentLayout().blockBoundingRect(block).top()
        self.verticalScrollBar().setValue(round(top) - _RIM_PX // 2)

    @property
    def section_in_sight(self) -> str:
        """What a link calls the last heading at or above the upper rim."""
        layout, upper = self.document().documentLayout(), self.verticalScrollBar().value() + _RIM_PX
        above = [one for one in heading_blocks(self.document()) if layout.blockBoundingRect(one).top() <= upper]
        return slug(above[-1].text()) if above else ""

    # Search

    @property
    def found(self) -> int:
        """How often the sought words are on the page."""
        return len(self._found)

    @property
    def current(self) -> int:
        """Which of them was gone to last, from 1; 0 for none."""
        return self._current + 1

    def search(self, words: str) -> None:
        """Mark words wherever they are on the page, whatever their capitals; none are sought with an empty text."""
        self._sought, self._found, self._current = words, [], -1
        document, cursor = self.document(), QTextCursor(self.document())
        while words:
            cursor = document.find(words, cursor)
            if cursor.isNull():
                break
            self._found.append(cursor)
        self._mark()

    def go_to_next(self, *, backward: bool = False) -> None:
        """Go to the next of the sought words, around the end."""
        if not self._found:
            return
        if self._current < 0:
            self._current = -1 if not backward else 0
        self._current = (self._current + (-1 if backward else 1)) % len(self._found)
        cursor = QTextCursor(self._found[self._current])
        cursor.setPosition(cursor.selectionStart())
        self.setTextCursor(cursor)
        self.ensureCursorVisible()
        self._mark()

    def _mark(self) -> None:
        theme = self._appearance.theme
        marks = []
        for number, cursor in enumerate(self._found):
            mark = QTextEdit.ExtraSelection()
            form = QTextCharFormat()
            here = number == self._current
            form.setBackground(QColor(theme.ink if here else theme.mixed(theme.thin, 0.28)))
            form.setForeground(QColor(theme.card if here else theme.ink))
            mark.cursor, mark.format = cursor, form
            marks.append(mark)
        self.setExtraSelections(marks)
