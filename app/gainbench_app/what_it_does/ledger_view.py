"""The phase ledger as bars that add up to half a turn."""

from __future__ import annotations

import math
import re
from collections.abc import Sequence
from dataclasses import dataclass, replace

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QPainter, QPen
from PySide6.QtWidgets import QWidget

from gainbench.assess import Assessment
from gainbench.assessed import LoopName
from gainbench.findings.ledger import cost_of, costliest_in
from gainbench.ledger import PhaseLedger, phase_ledger
from gainbench_app.what_it_does.captioned import CAPTION_PX, LEFT_PX, CaptionedFigure
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.figure import Axes, paint_hatched
from gainbench_app.widgets.scales import Range, frequency_text

LEFT_OVER = "left over"
_NAMES = {
    "plant": "plant",
    "pi": "PI",
    "update-delay": "update delay",
    "current-filter": "current filter",
    "hold": "hold",
    "closed-current-loop": "closed current loop",
    "feedforward": "feedforward",
    "speed-delay": "speed delay",
    "speed-window": "speed window",
    "speed-filter": "speed filter",
    "speed-hold": "speed hold",
}
_LEAST_DEG = 0.05
_NAME_PX, _VALUE_PX, _BOTTOM_PX = 128.0, 58.0, 52.0
_ROW_PX, _LEAST_ROW_PX, _BAR = 27.0, 15.0, 0.62
_LEFT = int(Qt.AlignmentFlag.AlignVCenter)
_RIGHT = int(Qt.AlignmentFlag.AlignVCenter | Qt.AlignmentFlag.AlignRight)
_WRAPPED = int(Qt.AlignmentFlag.AlignTop | Qt.TextFlag.TextWordWrap)
_DEGREES = re.compile(r"(\d) deg\b")


@dataclass(frozen=True, slots=True, kw_only=True)
class LedgerRow:
    """One bar."""

    name: str
    start: float
    """[deg]."""
    stop: float
    """[deg]; before ``start`` where it gives phase back."""
    what: str
    kind: str
    """``plant``, ``taken``, ``given`` or ``left``."""

    @property
    def degrees(self) -> float:
        """What is taken [deg]."""
        return self.stop - self.start


@dataclass(frozen=True, slots=True, kw_only=True)
class LedgerRows:
    """All of a ledger, for drawing."""

    loop: LoopName
    frequency_hz: float
    rows: tuple[LedgerRow, ...]
    change: str
    """What changing the costliest would give; empty where there is nothing to say."""


def ledger_rows(assessment: Assessment, loop: LoopName) -> LedgerRows | None:
    """The bars of a loop's ledger.

    Parameters
    ----------
    assessment : Assessment
        The newest.
    loop : str
        ``current`` or ``speed``.

    Returns
    -------
    LedgerRows or None
        Bars that follow each other from 0, and what is left to 180 degrees; None where there is no ledger.
    """
    ledger = phase_ledger(assessment, loop)
    if ledger is None:
        return None
    rows = []
    at = 0.0
    for one in ledger.entries:
        taken = -one.degrees
        kind = "plant" if one.name == "plant" else "given" if taken < 0.0 else "taken"
        if abs(taken) >= _LEAST_DEG:
            rows.append(LedgerRow(name=_NAMES[one.name], start=at, stop=at + taken, what=one.what, kind=kind))
        at += taken
    turns = 360.0 * round((at + ledger.margin - 180.0) / 360.0)
    left = LedgerRow(
        name=LEFT_OVER, start=at, stop=180.0 + turns, what="the phase margin: what is left to half a turn", kind="left"
    )
    return LedgerRows(
        loop=loop,
        frequency_hz=ledger.frequency / math.tau,
        rows=(*rows, left),
        change=_change(assessment, ledger),
    )


def _change(assessment: Assessment, ledger: PhaseLedger) -> str:
    cost = costliest_in(ledger, assessment)
    if cost is None or not cost.advice:
        # The integral part has what the margin leaves it; what else takes most can be changed.
        others = replace(ledger, entries=tuple(one for one in ledger.entries if one.name != "pi"))
        cost = cost_of(others, assessment.sheet.rig.stage)
    if cost is None or not cost.advice:
        return ""
    words = _DEGREES.sub("\\1°", cost.advice)
    return f"{words[0].upper()}{words[1:]}."


class LedgerView(CaptionedFigure):
    """The ledger of one loop."""

    def __init__(self, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(appearance, parent)
        self.setAccessibleName("phase ledger")
        self._shown: LedgerRows | None = None

    @property
    def shown(self) -> LedgerRows | None:
        """What is drawn."""
        return self._shown

    def show_ledger(self, rows: LedgerRows | None) -> None:
        """Draw another ledger; None where there is none."""
        if rows == self._shown:
            return
        self._shown = rows
        words = "no crossover, no ledger"
        if rows is not None:
            parts = ", ".join(f"{row.name} {_degrees(row.degrees)}" for row in rows.rows)
            words = f"{rows.loop} loop at {frequency_text(rows.frequency_hz)}: {parts}. {rows.change}"
        self.setAccessibleDescription(words)
        self.update()

    def panels(self) -> list[Axes]:
        """The room of the bars, in degrees across and rows down."""
        rows = self._shown.rows if self._shown is not None else ()
        high = max([180.0, *(max(row.start, row.stop) for row in rows)])
        low = min([0.0, *(min(row.start, row.stop) for row in rows)])
        high, low = 90.0 * math.ceil(high / 90.0 - 1e-9), 90.0 * math.floor(low / 90.0 + 1e-9)
        height = self._row_px(len(rows)) * max(1, len(rows))
        width = max(40.0, self.width() - LEFT_PX - _NAME_PX - _VALUE_PX - 16.0)
        box = QRectF(LEFT_PX + _NAME_PX, CAPTION_PX + 6.0, width, height)
        return [
            Axes(
                box=box,
                x=Range(low=low, high=high, step=90.0),
                y=Range(low=0.0, high=float(max(1, len(rows))), step=1.0),
            )
        ]

    def _row_px(self, count: int) -> float:
        room = self.height() - CAPTION_PX - _BOTTOM_PX
        return max(_LEAST_ROW_PX, min(_ROW_PX, room / max(1, count)))

    def paint_axes(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Half a turn."""
        if self._shown is None:
            return
        axes = panels[0]
        x = axes.left_of(180.0)
        pen = QPen(QColor(self.theme.breaks), 1.0)
        pen.setDashPattern([3.0, 2.5])
        painter.setPen(pen)
        painter.drawLine(QPointF(x, axes.box.top() - 4.0), QPointF(x, axes.box.bottom() + 4.0))
        painter.setPen(QColor(self.theme.muted))
        painter.drawText(
            QRectF(x - 40.0, axes.box.bottom() + 3.0, 80.0, 16.0), int(Qt.AlignmentFlag.AlignCenter), "180°"
        )

    def background_key(self) -> tuple[object, ...]:
        """Without a ledger there is no half turn."""
        return (self._shown is None,)

    def paint_curves(self, painter: QPainter, panels: Sequence[Axes]) -> None:
        """Names, bars, degrees, and what could be changed."""
        shown = self._shown
        if shown is None:
            self.paint_message(painter, "no crossover, no ledger")
            return
        axes = panels[0]
        plain, bold, ink = self.small_font(), self.hand(bold=True).font, QColor(self.theme.ink)
        painter.setFont(plain)
        painter.setPen(QColor(self.theme.muted))
        painter.drawText(QPointF(LEFT_PX, 16.5), f"{shown.loop} loop at {frequency_text(shown.frequency_hz)}")
        row_px = self._row_px(len(shown.rows))
        under = self._row_under(axes, row_px)
        for index, row in enumerate(shown.rows):
            middle = axes.box.top() + (index + 0.5) * row_px
            strong = row.kind == "left" or index == under
            self._paint_bar(painter, axes, row, middle=middle, height=_BAR * row_px)
            painter.setFont(bold if strong else plain)
            painter.setPen(ink)
            painter.drawText(QRectF(LEFT_PX, middle - 9.0, _NAME_PX - 6.0, 18.0), _LEFT, row.name)
            painter.setFont(bold)
            right = QRectF(axes.box.right(), middle - 9.0, _VALUE_PX, 18.0)
            painter.drawText(right, _RIGHT, _degrees(row.degrees))
        note = shown.rows[under].what if under is not None else shown.change
        painter.setFont(plain)
        painter.setPen(QColor(self.theme.muted))
        below = QRectF(LEFT_PX, axes.box.bottom() + 18.0, self.width() - LEFT_PX - 14.0, 34.0)
        painter.drawText(below, _WRAPPED, note)

    def _paint_bar(self, painter: QPainter, axes: Axes, row: LedgerRow, *, middle: float, height: float) -> None:
        left, right = sorted((axes.left_of(row.start), axes.left_of(row.stop)))
        box = QRectF(left, middle - height / 2.0, max(right - left, 1.5), height)
        loop = self._shown.loop if self._shown is not None else "speed"
        colour = getattr(self.theme, loop)
        if row.kind == "given":
            painter.setPen(QPen(QColor(colour), 1.4))
            painter.setBrush(Qt.BrushStyle.NoBrush)
            painter.drawRect(box.adjusted(0.7, 0.7, -0.7, -0.7))
        elif row.kind == "left" and row.degrees < 0.0:
            paint_hatched(painter, box, theme=self.theme)
            painter.setPen(QPen(QColor(self.theme.breaks), 1.4))
            painter.drawRect(box.adjusted(0.7, 0.7, -0.7, -0.7))
        else:
            fill = {"plant": self.theme.mixed(colour, 0.42), "left": self.theme.holds}.get(row.kind, colour)
            painter.fillRect(box, QColor(fill))

    def _row_under(self, axes: Axes, row_px: float) -> int | None:
        """The row below the mouse."""
        at, shown = self.cursor_at, self._shown
        if at is None or shown is None:
            return None
        index = math.floor((at.y() - axes.box.top()) / row_px)
        return index if 0 <= index < len(shown.rows) else None


def _degrees(value: float) -> str:
    return f"{value + 0.0:.1f}°".replace("-", "\N{MINUS SIGN}")
