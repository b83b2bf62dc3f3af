"""Where words find room beside curves: a panel with its curves, and what is taken of it already."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from PySide6.QtCore import QRectF

Array = NDArray[np.float64]

ENOUGH_PX = 12.0
"""Words this far from a curve are far enough."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Spot:
    """A place for words."""

    x: float
    """Their left [px]."""
    y: float
    """Their middle [px]."""
    room: float
    """How far curves stay [px], as far as it matters; -1 where it is taken or beyond the panel."""


class WordGround:
    """One panel. Plain numbers: a handful of places is tried in less time than one array is made."""

    def __init__(self, box: QRectF, curves: Sequence[tuple[Array, Array]]) -> None:
        self._left, self._top = box.left(), box.top()
        self._right, self._bottom = box.right(), box.bottom()
        columns = np.arange(np.floor(box.left()), np.ceil(box.right()) + 1.0)
        self._first = int(columns[0])
        # By pixel columns, up to where a curve ends.
        self._heights = [
            np.interp(columns[: max(0, int(across[-1]) - self._first + 1)], across, down).tolist()
            for across, down in curves
            if across.size
        ]
        self._taken: list[tuple[float, float, float, float]] = []

    def take(self, box: QRectF) -> None:
        """Words shall not stand there."""
        self._taken.append((box.left(), box.top(), box.right(), box.bottom()))

    def best(self, places: Iterable[tuple[float, float]], *, width: float, height: float) -> Spot:
        """The first place with room enough, else the first of those with most.

        Parameters
        ----------
        places : iterable of (float, float)
            Left and middle of the words [px], the best one first; not empty.
        width, height : float
            Of the words [px].

        Returns
        -------
        Spot
            As asked for, also where the words would have to be moved to stay within the panel.
        """
        found: Spot | None = None
        for x, y in places:
            room = self._room(min(x, self._right - width), y, width=width, height=height)
            if found is None or room > found.room:
                found = Spot(x=x, y=y, room=room)
            if room >= ENOUGH_PX:
                break
        assert found is not None
        return found

    def _room(self, left: float, middle: float, *, width: float, height: float) -> float:
        top, right, bottom = middle - 0.5 * height, left + width, middle + 0.5 * height
        if left < self._left or right > self._right + 1e-9 or top < self._top or bottom > self._bottom:
            return -1.0
        for one in self._taken:
            if left < one[2] and one[0] < right and top < one[3] and one[1] < bottom:
                return -1.0
        room = ENOUGH_PX
        start, end = int(left + 0.5) - self._first, int(right + 0.5) - self._first + 1
        for heights in self._heights:
            along = heights[start:end]
            if along:
                room = min(room, max(0.0, min(along) - middle, middle - max(along)))
        return room
