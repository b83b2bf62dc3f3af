"""Pictures of plots: on the clipboard, as PNG or SVG, and on paper.

A plot is painted anew for a picture, so that an SVG holds lines and words, not the pixels of the screen.
"""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QBuffer, QByteArray, QIODevice, QPoint, QRect, QRectF, QSize, Qt
from PySide6.QtGui import QColor, QGuiApplication, QImage, QImageWriter, QPainter

from gainbench.errors import SheetError
from gainbench.sheetfile import replace_file
from gainbench_app.widgets.figure import Figure

PIXELS_PER_POINT = 2.0
"""A picture of pixels has twice the screen's."""


def picture(figures: list[Figure], *, pixels_per_point: float = PIXELS_PER_POINT) -> QImage:
    """Plots as pixels, where they are to each other."""
    width, height = _size(figures)
    image = QImage(QSize(round(width * pixels_per_point), round(height * pixels_per_point)), QImage.Format.Format_RGB32)
    image.setDevicePixelRatio(pixels_per_point)
    image.fill(QColor(figures[0].theme.card))
    with QPainter(image) as painter:
        _paint_all(painter, figures)
    return image


def drawing(figures: list[Figure], *, title: str) -> bytes:
    """Plots as SVG, where they are to each other."""
    from PySide6.QtSvg import QSvgGenerator

    width, height = _size(figures)
    content = QByteArray()
    buffer = QBuffer(content)
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    generator = QSvgGenerator()
    generator.setOutputDevice(buffer)
    generator.setSize(QSize(width, height))
    generator.setViewBox(QRectF(0.0, 0.0, width, height))
    generator.setTitle(title)
    with QPainter(generator) as painter:
        _paint_all(painter, figures)
    buffer.close()
    return bytes(content.data())


def copy_picture(figures: list[Figure]) -> None:
    """Put a picture of plots on the clipboard; without a plot it stays as it is."""
    if not figures:
        return
    QGuiApplication.clipboard().setImage(picture(figures))


def save_picture(figures: list[Figure], path: Path, *, title: str) -> None:
    """Save a picture of plots, as SVG where the file's name ends so, else as PNG.

    Raises
    ------
    SheetError
        If it cannot be written, or the name has another ending.
    """
    ending = path.suffix.lower()
    if ending == ".svg":
        content = drawing(figures, title=title)
    elif ending == ".png":
        data = QByteArray()
        buffer = QBuffer(data)
        buffer.open(QIODevice.OpenModeFlag.WriteOnly)
        QImageWriter(buffer, QByteArray(b"png")).write(picture(figures))
        buffer.close()
        content = bytes(data.data())
    else:
        raise SheetError(f"{path.name}: a picture is saved as .png or .svg; name it so (for example step.svg)")
    replace_file(path, content)


def _places(figures: list[Figure]) -> list[QRect]:
    """Where the plots are to each other in their window, from the corner of all of them."""
    found = [QRect(one.mapTo(one.window(), QPoint(0, 0)), one.size()) for one in figures]
    left, top = min(one.left() for one in found), min(one.top() for one in found)
    return [one.translated(-left, -top) for one in found]


def _size(figures: list[Figure]) -> tuple[int, int]:
    places = _places(figures)
    return max(one.right() for one in places) + 1, max(one.bottom() for one in places) + 1


def _paint_all(painter: QPainter, figures: list[Figure]) -> None:
    for figure, place in zip(figures, _places(figures), strict=True):
        painter.save()
        painter.translate(place.topLeft())
        painter.setClipRect(QRectF(0.0, 0.0, figure.width(), figure.height()), Qt.ClipOperation.IntersectClip)
        figure.paint_whole(painter)
        painter.restore()
