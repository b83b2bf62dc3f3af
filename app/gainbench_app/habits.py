"""What the window remembers from one start to the next, in a small file of its own."""

from __future__ import annotations

import base64
import binascii
import contextlib
import json
from collections.abc import Callable
from dataclasses import dataclass, replace
from pathlib import Path

from gainbench.errors import SheetError
from gainbench.sheetfile import replace_file
from gainbench_app.theme import Scheme

MOST_RECENT = 10
SCALES = (100, 125, 150, 175, 200)
"""Sizes of the window in percent."""
_MOST_BYTES = 200_000


@dataclass(frozen=True, slots=True, kw_only=True)
class Habits:
    """Everything that is remembered."""

    scheme: Scheme = Scheme.FOLLOW
    scale: int = 100
    """[%]."""
    geometry: bytes = b""
    """As Qt saves it; empty for the usual place."""
    folded: tuple[str, ...] = ()
    """Names of the cards that are folded."""
    choices: tuple[tuple[str, str], ...] = ()
    """Names of rows of words, and the word chosen in each."""
    recent: tuple[str, ...] = ()
    """Paths of sheets, the latest first."""


def with_recent(habits: Habits, path: Path) -> Habits:
    """A sheet was opened or saved: it comes first."""
    own = str(path.absolute())
    return replace(habits, recent=(own, *(one for one in habits.recent if one != own))[:MOST_RECENT])


def without_recent(habits: Habits, path: Path) -> Habits:
    """A sheet is not there any more."""
    own = str(path.absolute())
    return replace(habits, recent=tuple(one for one in habits.recent if one != own))


class Memory:
    """Reads and writes the file; two windows may share it, so each change starts from what is there."""

    def __init__(self, file: Path) -> None:
        self._file = file

    def habits(self) -> Habits:
        """What is remembered; where the file is absent or damaged, the usual."""
        try:
            if self._file.stat().st_size > _MOST_BYTES:
                return Habits()
            data = json.loads(self._file.read_text(encoding="utf-8"))
        except (OSError, ValueError, RecursionError):
            return Habits()
        return _read(data) if isinstance(data, dict) else Habits()

    def change(self, how: Callable[[Habits], Habits]) -> Habits:
        """Remember something else; where it cannot be written the window forgets, and nothing else suffers."""
        habits = how(self.habits())
        with contextlib.suppress(OSError, SheetError):
            self._file.parent.mkdir(parents=True, exist_ok=True)
            replace_file(self._file, json.dumps(_written(habits), indent=1).encode("utf-8"))
        return habits


def _written(habits: Habits) -> dict[str, object]:
    return {
        "scheme": habits.scheme.value,
        "scale": habits.scale,
        "geometry": base64.b64encode(habits.geometry).decode("ascii"),
        "folded": list(habits.folded),
        "choices": dict(habits.choices),
        "recent": list(habits.recent),
    }


def _read(data: dict[str, object]) -> Habits:
    scheme, scale, geometry = data.get("scheme"), data.get("scale"), data.get("geometry")
    choices = data.get("choices")
    place = b""
    if isinstance(geometry, str):
        with contextlib.suppress(ValueError, binascii.Error):
            place = base64.b64decode(geometry, validate=True)
    return Habits(
        scheme=Scheme(scheme) if isinstance(scheme, str) and scheme in set(Scheme) else Scheme.FOLLOW,
        scale=scale if isinstance(scale, int) and scale in SCALES else 100,
        geometry=place,
        folded=_words(data.get("folded")),
        choices=tuple((str(key), value) for key, value in choices.items() if isinstance(value, str))
        if isinstance(choices, dict)
        else (),
        recent=_words(data.get("recent"))[:MOST_RECENT],
    )


def _words(value: object) -> tuple[str, ...]:
    return tuple(one for one in value if isinstance(one, str)) if isinstance(value, list) else ()
