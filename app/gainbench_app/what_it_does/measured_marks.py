"""How a measured curve is painted: a thin light line with beads, so that it is told from predicted and kept ones."""

from __future__ import annotations

from collections.abc import Callable
from enum import IntEnum

import numpy as np
from PySide6.QtCore import QLineF, QPointF, QSize, Qt
from PySide6.QtGui import QColor, QPainter, QPen, QPixmap
from PySide6.QtWidgets import QWidget

from gainbench_app.theme import Theme
from gainbench_app.widgets.figure import Array, polygon

BEAD_PX = 14.0
"""From bead to bead along the time axis."""
_LIGHT = 0.72
"""Share of the hue in the thin line; at least three to one on the card."""
_SIZE = 4.2
_FAINT_SIZE = 2.8


class Bead(IntEnum):
    """Forms of beads, so that the logs of one sheet are told apart."""

    ROUND = 0
    SQUARE = 1
    PLUS = 2
    CROSS = 3


def bead_of(index: int) -> Bead:
    """The bead of a sheet's log."""
    return Bead(index % len(Bead))


def paint_thread(painter: QPainter, *, across: Array, down: Array, colour: str, theme: Theme) -> None:
    """The thin line, between points that are pixels."""
    pen = QPen(QColor(theme.mixed(colour, _LIGHT)), 1.0)
    pen.setCosmetic(True)
    painter.setPen(pen)
    painter.drawPolyline(polygon(across, down))


def paint_beads(
    painter: QPainter, *, across: Array, down: Array, bead: Bead, colour: str, theme: Theme, faint: bool = False
) -> None:
    """Beads at pixels; faint ones are small and light."""
    if across.size == 0:
        return
    size = _FAINT_SIZE if faint else _SIZE
    pen = QPen(QColor(theme.mixed(colour, _LIGHT) if faint else colour), size)
    if faint or bead in (Bead.ROUND, Bead.SQUARE):
        pen.setCapStyle(Qt.PenCapStyle.RoundCap if bead is Bead.ROUND else Qt.PenCapStyle.SquareCap)
        painter.setPen(pen)
        painter.drawPoints(polygon(across, down))
        return
    pen.setWidthF(1.4)
    painter.setPen(pen)
    half = 0.5 * _SIZE + 0.8
    arms = ((half, 0.0), (0.0, half)) if bead is Bead.PLUS else ((half, half), (half, -half))
    painter.drawLines(
        [
            QLineF(x - dx, y - dy, x + dx, y + dy)
            for x, y in zip(across.tolist(), down.tolist(), strict=True)
            for dx, dy in arms
        ]
    )


def paint_sample(painter: QPainter, at: QPointF, width: float, *, bead: Bead, threaded: bool, theme: Theme) -> None:
    """A piece of a measured curve for a legend, in ink: its hue is that of each quantity."""
    middle = np.array([at.y(), at.y()])
    if threaded:
        paint_thread(painter, across=np.array([at.x(), at.x() + width]), down=middle, colour=theme.ink, theme=theme)
    beads = at.x() + width * np.array([0.25, 0.75])
    paint_beads(painter, across=beads, down=middle, bead=bead, colour=theme.ink, theme=theme)


class Layer:
    """A painting that is dear and seldom changes: on the screen it is painted once, in pictures every time."""

    def __init__(self) -> None:
        self._pixmap: QPixmap | None = None
        self._of: tuple[object, ...] = ()
        self.painted = 0
        """How often it was painted for the screen."""

    def paint(self, painter: QPainter, key: tuple[object, ...], draw: Callable[[QPainter], None]) -> None:
        """Paint what a key stands for.

        Parameters
        ----------
        painter : QPainter
            On the widget itself, or on a picture or paper.
        key : tuple
            All that the painting depends on, besides the widget's size.
        draw : callable
            Paints it.
        """
        device = painter.device()
        if not isinstance(device, QWidget):
            draw(painter)
            return
        ratio = device.devicePixelRatioF()
        key = (*key, device.width(), device.height(), ratio)
        if self._pixmap is None or key != self._of:
            self._of = key
            self._pixmap = QPixmap(QSize(round(device.width() * ratio), round(device.height() * ratio)))
            self._pixmap.setDevicePixelRatio(ratio)
            self._pixmap.fill(Qt.GlobalColor.transparent)
            with QPainter(self._pixmap) as own:
                own.setFont(painter.font())
                own.setRenderHint(QPainter.RenderHint.Antialiasing)
                draw(own)
            self.painted += 1
        painter.drawPixmap(0, 0, self._pixmap)
