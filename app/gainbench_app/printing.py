"""A sheet on paper: its verdict, the plots, the tunings side by side and the findings, always in the light theme."""

from __future__ import annotations

import time
from collections.abc import Sequence
from dataclasses import dataclass

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QFont, QFontMetricsF, QPagedPaintDevice, QPainter, QPen

from gainbench.results import Finding
from gainbench_app.theme import LIGHT
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Figure
from gainbench_app.widgets.level_mark import WORDS

_POINTS_PER_INCH = 72.0
_MARGIN = 34.0
_HEAD, _BODY, _SMALL = 15, 9, 7
_WRAP = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap)


@dataclass(frozen=True, slots=True, kw_only=True)
class Page:
    """What is printed."""

    title: str
    file: str
    verdict: str
    figures: Sequence[Figure]
    heads: Sequence[str]
    rows: Sequence[Sequence[str]]
    """Of the shelf, its names first."""
    findings: Sequence[Finding]


def print_page(device: QPagedPaintDevice, page: Page) -> None:
    """Print onto as many sheets of paper as it takes.

    Parameters
    ----------
    device : QPagedPaintDevice
        A printer, or a writer of PDF files.
    page : Page
        What is printed.
    """
    with QPainter(device) as painter:
        _Print(painter, device).run(page)


class _Print:
    """Where the pen is, in points from the top."""

    def __init__(self, painter: QPainter, device: QPagedPaintDevice) -> None:
        self._painter = painter
        self._device = device
        scale = device.logicalDpiX() / _POINTS_PER_INCH
        painter.scale(scale, scale)
        self._width = device.width() / scale - 2.0 * _MARGIN
        self._height = device.height() / scale - 2.0 * _MARGIN
        self._y = 0.0
        painter.translate(_MARGIN, _MARGIN)

    def run(self, page: Page) -> None:
        """All of it, from top to bottom."""
        self._words(page.title, size=_HEAD, bold=True)
        when = time.strftime("%Y-%m-%d %H:%M")
        self._words(f"{page.verdict}. {page.file}, {when}", size=_BODY, colour=LIGHT.muted)
        self._y += 8.0
        for figure in page.figures:
            self._figure(figure)
        self._table(page.heads, page.rows)
        self._y += 8.0
        for finding in page.findings:
            self._words(f"{WORDS[finding.level]}: {finding.text}", size=_BODY)
            self._y += 2.0

    def _room(self, height: float) -> None:
        """Another sheet of paper where there is no room for so much."""
        if self._y > 0.0 and self._y + height > self._height:
            self._device.newPage()
            self._y = 0.0

    def _font(self, size: int, *, bold: bool = False) -> QFont:
        font = QFont(self._painter.font())
        # In units of the scaled painter, which are points on every device.
        font.setPixelSize(size)
        font.setBold(bold)
        return font

    def _words(self, text: str, *, size: int, bold: bool = False, colour: str = LIGHT.ink) -> None:
        self._painter.setFont(self._font(size, bold=bold))
        self._painter.setPen(QColor(colour))
        box = self._painter.boundingRect(QRectF(0.0, self._y, self._width, 1e4), _WRAP, text)
        self._room(box.height())
        self._painter.drawText(QRectF(0.0, self._y, self._width, box.height() + 2.0), _WRAP, text)
        self._y += box.height() + 3.0

    def _figure(self, figure: Figure) -> None:
        scale = self._width / max(1, figure.width())
        height = figure.height() * scale
        self._room(height)
        self._painter.save()
        self._painter.translate(0.0, self._y)
        self._painter.scale(scale, scale)
        shown = figure.appearance
        figure.appearance = Appearance(LIGHT)
        try:
            figure.paint_whole(self._painter)
        finally:
            figure.appearance = shown
        self._painter.restore()
        self._y += height + 8.0

    def _table(self, heads: Sequence[str], rows: Sequence[Sequence[str]]) -> None:
        if not rows:
            return
        line = _SMALL + 6.0
        self._room(2.0 * line)
        first = 0.16 * self._width
        other = (self._width - first) / max(1, len(heads))
        for number, cells in enumerate([["", *heads], *rows]):
            tall = 2.0 * line if number == 0 else line
            self._room(tall)
            self._painter.setFont(self._font(_SMALL, bold=number == 1))
            self._painter.setPen(QColor(LIGHT.muted if number == 0 else LIGHT.ink))
            for column, cell in enumerate(cells):
                left = 0.0 if column == 0 else first + (column - 1) * other
                width = (first if column == 0 else other) - 4.0
                side = Qt.AlignmentFlag.AlignLeft if column == 0 else Qt.AlignmentFlag.AlignRight
                flags = int(side | Qt.AlignmentFlag.AlignVCenter | Qt.TextFlag.TextWordWrap)
                words = cell if number == 0 else _fitted(self._painter, cell, width)
                self._painter.drawText(QRectF(left, self._y, width, tall), flags, words)
            self._y += tall
            self._painter.setPen(QPen(QColor(LIGHT.rule), 0.5))
            self._painter.drawLine(0, round(self._y), round(self._width), round(self._y))


def _fitted(painter: QPainter, text: str, width: float) -> str:
    return QFontMetricsF(painter.font()).elidedText(text, Qt.TextElideMode.ElideRight, width)
