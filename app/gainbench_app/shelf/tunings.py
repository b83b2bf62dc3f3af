"""The tunings on the shelf and what is known of each: assessed when the hand rests, never on the live path. No widgets.

A kept tuning is assessed as gains by hand on the sheet in force; what comes out depends on the rig, the firmware, the
duty and the weight of the reference, not on the aims that a slider moves, so that a drag leaves it alone.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from pathlib import Path

from PySide6.QtCore import QObject, QTimer, Signal

from gainbench.assess import Assessment, assess
from gainbench.errors import SheetError
from gainbench.kept import with_kept
from gainbench.model import Sheet
from gainbench.sheetfile import read_sheet
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness
from gainbench_app.shelf import edits
from gainbench_app.shelf.summary import Summary, summary
from gainbench_app.shown_tuning import PATTERNS, ShownTuning

REST_MS = 60
"""After the last change the shelf follows."""


class Kind(StrEnum):
    """Where a tuning is from."""

    LIVE = "live"
    KEPT = "kept"
    BESIDE = "beside"


@dataclass(frozen=True, slots=True, kw_only=True)
class Key:
    """Which tuning."""

    kind: Kind
    name: str = ""
    """Of the kept tuning; empty for what aims give."""
    path: str = ""
    """Of another sheet."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Row:
    """One tuning."""

    key: Key
    name: str
    note: str = ""
    pattern: tuple[float, ...] | None = None
    """Of its line, where it is drawn; the live one is solid."""
    known: Summary | None = None
    """None while it is not assessed yet."""


@dataclass(slots=True, kw_only=True, eq=False)
class _Known:
    """What was found, and on what."""

    of: tuple[object, ...]
    summary: Summary
    assessment: Assessment | None
    """Kept only where it is drawn: a long duty's curves are many megabytes."""
    shown: ShownTuning | None = None


LIVE = Key(kind=Kind.LIVE)


class Shelf(QObject):
    """Rows of tunings, which of them are drawn, and which one the others are held against."""

    changed = Signal()
    """Rows are other than before."""
    live_changed = Signal()
    """Only the figures of the live one are."""

    def __init__(self, desk: Desk, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._beside: dict[str, Sheet] = {}
        self._drawn: list[Key] = []
        self._known: dict[Key, _Known] = {}
        self._live: Summary | None = None
        self._listed: tuple[object, ...] = ()
        self._reference: Key | None = None
        self._idle = QTimer(self)
        self._idle.setSingleShot(True)
        self._idle.timeout.connect(self._compute_one)
        desk.words_due.connect(self._follow)
        desk.changed.connect(self._list)
        desk.opened.connect(self._forget)
        self._follow()

    # What there is

    @property
    def desk(self) -> Desk:
        """The open sheet."""
        return self._desk

    @property
    def reference(self) -> Key | None:
        """The tuning that the others are held against."""
        return self._reference

    @property
    def busy(self) -> bool:
        """Whether some tuning is still to be assessed."""
        return self._idle.isActive()

    def rows(self) -> tuple[Row, ...]:
        """The live tuning, the sheet's shelf in its order, then other sheets'."""
        found = [self.live_row()]
        notes = {one.name: one.note for one in self._desk.sheet.kept}
        for key in self._keys():
            known = self._fresh(key)
            beside = key.kind is Kind.BESIDE
            title = self._beside[key.path].title if beside else ""
            found.append(
                Row(
                    key=key,
                    name=f"{title}: {key.name or 'as designed'}" if beside else key.name,
                    note=Path(key.path).name if beside else notes[key.name],
                    pattern=self._pattern(key),
                    known=known.summary if known is not None else None,
                )
            )
        return tuple(found)

    def live_row(self) -> Row:
        """The first row alone."""
        return Row(key=LIVE, name="live", known=self._live)

    def _keys(self) -> list[Key]:
        kept = [Key(kind=Kind.KEPT, name=one.name) for one in self._desk.sheet.kept]
        beside = [
            Key(kind=Kind.BESIDE, path=path, name=name)
            for path, sheet in self._beside.items()
            for name in ("", *(one.name for one in sheet.kept))
        ]
        return [*kept, *beside]

    def _pattern(self, key: Key) -> tuple[float, ...] | None:
        return PATTERNS[self._drawn.index(key) % len(PATTERNS)] if key in self._drawn else None

    def _basis(self, key: Key) -> tuple[object, ...]:
        """All that the assessment of a tuning depends on."""
        simulated = self._desk.readiness is Readiness.ALL
        if key.kind is Kind.BESIDE:
            return (simulated, self._beside[key.path])
        sheet = self._desk.sheet
        kept = next(one for one in sheet.kept if one.name == key.name)
        return (
            simulated,
            kept.current,
            kept.speed,
            sheet.rig,
            sheet.aims.firmware,
            sheet.duty,
            sheet.aims.speed.reference_weight,
        )

    def _fresh(self, key: Key) -> _Known | None:
        known = self._known.get(key)
        if known is None or known.of != self._basis(key):
            return None
        return known

    def _sheet_of(self, key: Key) -> Sheet:
        sheet = self._beside[key.path] if key.kind is Kind.BESIDE else self._desk.sheet
        kept = next((one for one in sheet.kept if one.name == key.name), None)
        return with_kept(sheet, kept) if kept is not None else sheet

    # Following the desk

    def _follow(self) -> None:
        assessment = self._desk.assessment
        live = summary(assessment) if assessment is not None else None
        if live != self._live:
            self._live = live
            self.live_changed.emit()
        self._list()

    def _list(self) -> None:
        """Another shelf, plant or readiness: say so, and have what is stale assessed when the hand rests."""
        sheet = self._desk.sheet
        listed = (
            sheet.kept,
            sheet.rig,
            sheet.duty,
            sheet.aims.firmware,
            sheet.aims.speed.reference_weight,
            self._desk.readiness,
        )
        if listed != self._listed:
            self._listed = listed
            self._refresh()

    def _refresh(self) -> None:
        keys = set(self._keys())
        self._known = {key: known for key, known in self._known.items() if key in keys}
        if self._stale() is not None:
            self._idle.start(REST_MS)
        self._show()
        self.changed.emit()

    def _stale(self) -> Key | None:
        """The first tuning that is to be assessed, those that are drawn before the others."""
        if self._desk.readiness is Readiness.NOTHING:
            return None
        keys = self._keys()
        for key in [*(one for one in self._drawn if one in keys), *keys]:
            known = self._fresh(key)
            if known is None or (key in self._drawn and known.assessment is None):
                return key
        return None

    def _compute_one(self) -> None:
        """Assess one tuning, then let the window answer before the next."""
        key = self._stale()
        if key is None:
            return
        found = assess(self._sheet_of(key), simulated=self._desk.readiness is Readiness.ALL)
        drawn = key in self._drawn
        self._known[key] = _Known(
            of=self._basis(key), summary=summary(found), assessment=found if drawn else None, shown=None
        )
        if self._stale() is not None:
            self._idle.start(0)
        self._show()
        self.changed.emit()

    def compute_now(self) -> None:
        """Assess all that is stale without waiting."""
        self._idle.stop()
        while self._stale() is not None:
            self._compute_one()
        self._idle.stop()

    def _forget(self) -> None:
        self._drawn.clear()
        self._beside.clear()
        self._known.clear()
        self._reference = None
        self._listed = ()
        self._follow()

    def _show(self) -> None:
        """Hand what is drawn to the plots; a tuning that is behind the sheet is not drawn."""
        shown = []
        for key in self._drawn:
            if key not in self._known:
                continue
            known = self._fresh(key)
            pattern = self._pattern(key)
            if known is None or known.assessment is None or pattern is None:
                continue
            if known.shown is None or known.shown.pattern != pattern:
                known.shown = ShownTuning(name=key.name or key.path, assessment=known.assessment, pattern=pattern)
            shown.append(known.shown)
        self._desk.show_kept(tuple(shown))

    # What can be done

    def draw(self, key: Key, on: bool) -> None:
        """Draw a tuning over the live curves, or no more."""
        if key.kind is Kind.LIVE or (key in self._drawn) is on:
            return
        if on:
            self._drawn.append(key)
        else:
            self._drawn.remove(key)
            if key in self._known:
                self._known[key].assessment = self._known[key].shown = None
        self._refresh()

    def hold_against(self, key: Key | None) -> None:
        """Make a tuning the reference of the differences; None shows none."""
        if key != self._reference:
            self._reference = key
            self.changed.emit()

    def keep(self, name: str, note: str = "") -> None:
        """Put the gains in force on the shelf, and draw them.

        Raises
        ------
        SheetError
            If there are no gains, or the name is taken or empty; nothing has changed.
        """
        self._desk.end_gesture()
        self._desk.compute_now()
        live = self._live
        if live is None or live.current is None or live.speed is None:
            raise SheetError("there are no gains to keep: the targets of a loop cannot be met")
        self._desk.edit(edits.keeping(name, current=live.current, speed=live.speed, note=note))
        self.draw(Key(kind=Kind.KEPT, name=self._desk.sheet.kept[-1].name), True)

    def rename(self, key: Key, name: str) -> None:
        """Give a kept tuning another name.

        Raises
        ------
        SheetError
            If the name is taken or empty; nothing has changed.
        """
        renamed = Key(kind=Kind.KEPT, name=name.strip())
        if key.kind is not Kind.KEPT or key == renamed:
            return
        known = self._known.get(key)
        self._desk.edit(edits.renaming(key.name, renamed.name))
        self._drawn = [renamed if one == key else one for one in self._drawn]
        if self._reference == key:
            self._reference = renamed
        if known is not None:
            known.shown = None
            self._known[renamed] = known
        self._refresh()

    def note(self, key: Key, note: str) -> None:
        """Give a kept tuning another note.

        Raises
        ------
        SheetError
            If the text is refused; nothing has changed.
        """
        if key.kind is Kind.KEPT:
            self._desk.edit(edits.noting(key.name, note.strip()))

    def take_off(self, key: Key) -> None:
        """Take a tuning off the shelf; of another sheet, that sheet's.

        Raises
        ------
        SheetError
            If the text cannot be edited there; nothing has changed.
        """
        if key.kind is Kind.BESIDE:
            del self._beside[key.path]
            self._drawn = [one for one in self._drawn if one.path != key.path]
            if self._reference is not None and self._reference.path == key.path:
                self._reference = None
            self._refresh()
        elif key.kind is Kind.KEPT:
            self._desk.edit(edits.removing(key.name))
            self._drawn = [one for one in self._drawn if one != key]
            if self._reference == key:
                self._reference = None
            self._refresh()

    def move(self, key: Key, by: int) -> None:
        """Put a kept tuning further up or down.

        Raises
        ------
        SheetError
            If the text cannot be edited there; nothing has changed.
        """
        names = [one.name for one in self._desk.sheet.kept]
        if key.kind is Kind.KEPT and 0 <= names.index(key.name) + by < len(names):
            self._desk.edit(edits.moving(key.name, by))

    def recall(self, key: Key) -> None:
        """Put a tuning in force: both loops by hand, with its gains."""
        if key.kind is Kind.KEPT:
            self._desk.recall(edits.recalled(self._desk.state.document, key.name))
        elif key.kind is Kind.BESIDE:
            known = self._fresh(key)
            if known is not None and known.summary.current is not None and known.summary.speed is not None:
                self._desk.recall(edits.by_hand(known.summary.current, known.summary.speed))

    def open_beside(self, path: Path) -> None:
        """Lay another sheet's tunings beside these.

        Raises
        ------
        SheetError
            If the sheet cannot be read; nothing has changed.
        """
        self._beside[str(path)] = read_sheet(path).sheet
        self._refresh()

    def assessment_of(self, key: Key) -> Assessment:
        """A tuning's assessment, as it would be handed over; the live one's is the desk's own."""
        return assess(self._sheet_of(key))
