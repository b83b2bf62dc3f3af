"""The open sheet: its text, what is in force, undo, and the live path. No widgets.

A slider moves the frozen :class:`Sheet` only; the text follows when the hand rests, or before a save. A text typed
into a box goes through the sheet's own reader, so that the rules between entries speak at once.
"""

from __future__ import annotations

import time
from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace
from pathlib import Path

from PySide6.QtCore import QObject, QTimer, Signal, Slot

from gainbench.assess import Assessment, assess
from gainbench.errors import SheetError
from gainbench.model import DesignMethod, HandGains, Sheet
from gainbench.sheetfile import EntryValue, SheetDocument, parse_sheet, read_sheet, write_sheet
from gainbench_app.desk_state import State, as_text, moved, settled, typed
from gainbench_app.edge_stop import loop_of, stopped_at_edge
from gainbench_app.live import AfterFrame, FrameTimer, Readiness
from gainbench_app.log_places import carried_along
from gainbench_app.shown_tuning import ShownTuning
from gainbench_app.starting_values import gains_by_hand, starting_values

IDLE_MS = 400
"""After the last move the text follows."""
_MOST_UNDO = 500


@dataclass(slots=True, kw_only=True)
class _Gesture:
    """A drag under way."""

    path: str
    before: State


class Desk(QObject):
    """One open sheet."""

    changed = Signal()
    """Texts, undo or saved state are other than before; along the live path told with the words."""
    number_moved = Signal(str)
    """The number at this path was moved along the live path just now."""
    assessed = Signal()
    """``assessment`` is new: for what is drawn."""
    words_due = Signal()
    """The same for what is read: at once, or along the live path after the curves and not with every frame."""
    opened = Signal()
    """Another sheet is open."""
    trouble = Signal(str)
    """A message for the user."""
    kept_shown = Signal()
    """``shown_kept`` is new."""

    def __init__(
        self,
        document: SheetDocument,
        *,
        path: Path | None = None,
        readiness: Readiness = Readiness.ALL,
        clock: Callable[[], float] = time.time,
        parent: QObject | None = None,
    ) -> None:
        super().__init__(parent)
        self._clock = clock
        self._readiness = readiness
        self._timer = FrameTimer(self._compute, self)
        self._words = AfterFrame(self._say, self)
        self._idle = QTimer(self)
        self._idle.setSingleShot(True)
        self._idle.setInterval(IDLE_MS)
        self._idle.timeout.connect(self._patch)
        self._past: list[State] = []
        self._future: list[State] = []
        self._gesture: _Gesture | None = None
        self._untold = False
        """Whether numbers have moved since ``changed`` was told."""
        self._typed: dict[str, str | None] = {}
        """Spellings in the document that are known."""
        self._unsaved_since: float | None = None
        self._path: Path | None = None
        self._state = State(document=document, sheet=document.sheet)
        self._computed: State | None = None
        """The state that ``assessment`` is of."""
        self._assessment: Assessment | None = None
        self._shown_kept: tuple[ShownTuning, ...] = ()
        self._open(document, path)

    @property
    def state(self) -> State:
        """The present state."""
        return self._state

    @property
    def sheet(self) -> Sheet:
        """The sheet in force: while an entry is refused, the last valid one."""
        return self._state.sheet

    @property
    def assessment(self) -> Assessment | None:
        """Of a sheet in force, the newest that was computed; None before the first."""
        return self._assessment

    @property
    def shown_kept(self) -> tuple[ShownTuning, ...]:
        """The tunings of the shelf that are drawn over the live curves."""
        return self._shown_kept

    def show_kept(self, tunings: tuple[ShownTuning, ...]) -> None:
        """Draw other tunings of the shelf."""
        if len(tunings) != len(self._shown_kept) or any(a != b for a, b in zip(tunings, self._shown_kept, strict=True)):
            self._shown_kept = tunings
            self.kept_shown.emit()

    @property
    def path(self) -> Path | None:
        """Where the sheet is saved; None for one that has no file yet."""
        return self._path

    @property
    def valid(self) -> bool:
        """Whether every entry is taken."""
        return self._state.valid

    @property
    def readiness(self) -> Readiness:
        """What can be computed already."""
        return self._readiness

    @property
    def unsaved_since(self) -> float | None:
        """When the sheet came to differ from its file [s since the epoch]; None where it does not."""
        return self._unsaved_since

    @property
    def can_undo(self) -> bool:
        """Whether there is something to take back."""
        return bool(self._past)

    @property
    def can_redo(self) -> bool:
        """Whether something was taken back."""
        return bool(self._future)

    def text(self, path: str) -> str | None:
        """What stands in the box of an entry, None where the sheet does not hold it."""
        for layer in (self._state.wrong, self._state.live):
            if path in layer:
                value = layer[path]
                return None if value is None else as_text(value)
        if path not in self._typed:
            self._typed[path] = self._state.document.typed(path)
        return self._typed[path]

    def problem(self, path: str) -> str | None:
        """Why an entry is refused."""
        return self._state.problems.get(path)

    # Opening and saving

    def open_path(self, path: str | Path) -> None:
        """Open a sheet from its file.

        Raises
        ------
        SheetError
            If it cannot be read; what was open stays.
        """
        path = Path(path)
        self._open(read_sheet(path), path)

    def open_text(self, text: str, name: str) -> None:
        """Open a sheet that has no file yet.

        Raises
        ------
        SheetError
            If the text is no sheet; what was open stays.
        """
        self._open(parse_sheet(text, name), None)

    def restore(self, text: str, name: str, *, path: Path | None, since: float) -> None:
        """Open a sheet that was not saved when the program ended; it is unsaved until it is saved.

        Raises
        ------
        SheetError
            If the text is no sheet; what was open stays.
        """
        self._open(parse_sheet(text, name), path)
        self._saved, self._unsaved_since = "", since
        self.changed.emit()

    def save(self, path: Path | None = None) -> None:
        """Write the sheet to its file, or to another one, which is its file from then on.

        Raises
        ------
        SheetError
            If an entry is refused, or the file cannot be written; nothing was written.
        """
        target = path or self._path
        if target is None:
            raise SheetError("this sheet has no file yet: save it under a name")
        if not self.valid:
            entry, reason = next(iter(self._state.problems.items()))
            raise SheetError(f"nothing was saved, the sheet is not valid: {entry}: {reason}")
        self.end_gesture()
        state = settled(self._state)
        document = state.document if target.name == state.document.name else state.document.renamed(target.name)
        document = carried_along(document, before=self._path, after=target)
        write_sheet(document, target)
        self._path = target
        self._saved = document.text()
        self._put(replace(state, document=document, sheet=document.sheet), written=self._state.live)

    def settled_document(self) -> SheetDocument:
        """The text with everything in it that is in force.

        Raises
        ------
        SheetError
            If the text cannot be edited where a slider has moved a value.
        """
        self.end_gesture()
        self._patch_now()
        return self._state.document

    def _open(self, document: SheetDocument, path: Path | None) -> None:
        self._idle.stop()
        self._words.stop()
        self._path = path
        self._saved = document.text()
        self._unsaved_since = None
        self._past.clear()
        self._future.clear()
        self._gesture = None
        self._typed.clear()
        self._state = State(document=document, sheet=document.sheet)
        self._assessment = None
        self._computed = None
        self._timer.request()
        self.opened.emit()
        self.changed.emit()

    # Edits

    def set_values(self, values: Mapping[str, EntryValue]) -> None:
        """Set entries as typed: taken where the sheet stays valid, kept and marked where not. One step of undo."""
        self._set(values, held=self._state.held)

    def _set(self, values: Mapping[str, EntryValue], *, held: Mapping[str, HandGains]) -> None:
        self.end_gesture()
        before = self._state
        try:
            after = typed(before, values)
        except SheetError as error:
            self.trouble.emit(str(error))
            return
        self._push(before)
        self._put(replace(after.state, held=held), written=after.taken)

    def recall(self, values: Mapping[str, EntryValue]) -> None:
        """Set the gains of both loops by hand; none is held any more. One step of undo."""
        self._set(values, held={})

    def edit(self, change: Callable[[SheetDocument], SheetDocument]) -> None:
        """Edit the text as a whole, such as its shelf. One step of undo.

        Raises
        ------
        SheetError
            If the edit is refused; nothing has changed.
        """
        self.end_gesture()
        before = self._state
        base = settled(before)
        document = change(base.document)
        self._push(before)
        self._put(replace(base, document=document, sheet=document.sheet))

    def choose_method(self, loop: str, method: DesignMethod) -> None:
        """Design a loop by another method, from where it is; keys of the other methods stay in the sheet."""
        values: dict[str, EntryValue] = {f"aims.{loop}.method": method.value}
        self._timer.flush()
        assessment = self._assessment
        if assessment is not None:
            assessed = loop_of(assessment, loop)
            values |= starting_values(self.sheet, loop, plant=assessment.plant, assessed=assessed, method=method)
        self._set(values, held=self._held_but(loop))

    def held(self, loop: str) -> bool:
        """Whether a loop keeps its gains while the plant is edited."""
        return loop in self._state.held

    def hold(self, loop: str, on: bool) -> None:
        """Keep a loop's gains as they are, or let its method design them again. One step of undo."""
        self.end_gesture()
        held = self._held_but(loop)
        gains = loop_of(self._assessment, loop).gains if self._assessment is not None else None
        if on and gains is not None:
            held = {**held, loop: HandGains(kp=gains.kp, ki=gains.ki)}
        if held.keys() != self._state.held.keys():
            self._push(self._state)
            self._put(replace(self._state, held=held))

    def take_over(self, loop: str) -> None:
        """Make the gains in force, designed or held, the loop's gains by hand. One step of undo."""
        self.end_gesture()
        gains = loop_of(self._assessment, loop).gains if self._assessment is not None else None
        if gains is not None:
            values = {f"aims.{loop}.method": DesignMethod.BY_HAND.value, **gains_by_hand(loop, gains)}
            self._set(values, held=self._held_but(loop))

    def _held_but(self, loop: str) -> Mapping[str, HandGains]:
        return {name: hand for name, hand in self._state.held.items() if name != loop}

    def begin_gesture(self, path: str) -> None:
        """A drag begins: all its moves are one step of undo."""
        if self._gesture is None or self._gesture.path != path:
            self.end_gesture()
            self._gesture = _Gesture(path=path, before=self._state)

    def move(self, path: str, value: float) -> None:
        """Move a number along the live path.

        Parameters
        ----------
        path : str
            ``aims.current.crossover``.
        value : float
            In the model's unit; what is in force is the value as it would be saved, in the user's unit.
        """
        self.move_all(path, {path: value})

    def move_all(self, name: str, values: Mapping[str, float]) -> None:
        """Move numbers together along the live path.

        Parameters
        ----------
        name : str
            Of the drag: the path of its one number, or ``aims.current`` for a point of that loop's reach map.
        values : mapping
            By their paths, as in :meth:`move`.
        """
        alone = self._gesture is None
        self.begin_gesture(name)
        state = self._state
        for path, value in values.items():
            state = moved(state, path, value)
        if state is not self._state:
            self._move_to(state)
            for path in values:
                self.number_moved.emit(path)
        if alone:
            self.end_gesture()

    def end_gesture(self) -> None:
        """The drag ends where it is."""
        self._timer.flush()
        gesture, self._gesture = self._gesture, None
        if gesture is not None and gesture.before is not self._state:
            self._push(gesture.before)
            self._tell()
        self._words.flush()

    def cancel_gesture(self) -> None:
        """The drag is taken back."""
        gesture, self._gesture = self._gesture, None
        if gesture is not None:
            self._put(gesture.before)

    def undo(self) -> None:
        """Take the last step back."""
        self.end_gesture()
        if self._past:
            self._future.append(self._state)
            self._put(self._past.pop())

    def redo(self) -> None:
        """Take the last undo back."""
        self.end_gesture()
        if self._future:
            self._past.append(self._state)
            self._put(self._future.pop())

    def _push(self, before: State) -> None:
        self._past.append(before)
        del self._past[:-_MOST_UNDO]
        self._future.clear()

    def _put(self, state: State, *, written: Mapping[str, EntryValue] | None = None) -> None:
        """Make a state the present one; ``written`` is what its document holds other than the last one."""
        if state.document is not self._state.document:
            self._remember(written)
        anew = state.sheet != self._state.sheet or state.held != self._state.held
        self._state = state
        self._mark_saved()
        if state.live:
            self._idle.start()
        if anew:
            self._timer.request()
        self._tell()

    def _move_to(self, state: State) -> None:
        """The same along the live path, where events may come faster than frames: the words tell of all of them."""
        self._state = state
        self._mark_saved()
        self._idle.start()
        self._untold = True
        self._timer.request()

    def _tell(self) -> None:
        self._untold = False
        self.changed.emit()

    def _remember(self, written: Mapping[str, EntryValue] | None) -> None:
        """Keep the spellings that are known; finding one anew takes milliseconds."""
        if written is None:
            self._typed.clear()
        for path, value in (written or {}).items():
            self._typed[path] = None if value is None else as_text(value)

    def _mark_saved(self) -> None:
        state = self._state
        differs = bool(state.live or state.wrong) or state.document.text() != self._saved
        if not differs:
            self._unsaved_since = None
        elif self._unsaved_since is None:
            self._unsaved_since = self._clock()

    def _patch(self) -> None:
        """The hand rests: let the text follow."""
        if self._gesture is not None:
            self._idle.start()
            return
        try:
            self._patch_now()
        except SheetError as error:
            self.trouble.emit(str(error))

    def _patch_now(self) -> None:
        state = settled(self._state)
        if state is not self._state:
            self._put(state, written=self._state.live)

    # The live path

    def compute_now(self) -> None:
        """Compute what is asked for, and tell of it, without waiting for the frame."""
        self._timer.flush()
        self._words.flush()

    @Slot(Readiness)
    def reach(self, readiness: Readiness) -> None:
        """More can be computed from now on."""
        self._readiness = readiness
        self._timer.request()
        self.changed.emit()

    def _compute(self) -> None:
        self._words.request()
        if self._readiness is not Readiness.NOTHING:
            self._assess_state()
        if self._gesture is None:
            self._words.flush()

    def _say(self) -> None:
        if self._untold:
            self._tell()
        self.words_due.emit()

    def _assess_state(self) -> None:
        state = self._state
        assessment = self._assess(state.assessed_sheet)
        good, before, stopped = self._computed, self._assessment, None
        if self._gesture is not None and good is not None and before is not None:
            path, again = self._gesture.path, self._assess
            stopped = stopped_at_edge(path, state, assessment, good=good, before=before, assess=again)
        if stopped is not None:
            assessment = stopped.assessment
            asked, self._state = self._state.live, stopped.state
            self._mark_saved()
            self._untold = True
            for path, entry in stopped.state.live.items():
                if asked.get(path) != entry:
                    self.number_moved.emit(path)
        self._assessment = assessment
        self._computed = self._state
        self.assessed.emit()

    def _assess(self, sheet: Sheet) -> Assessment:
        return assess(sheet, simulated=self._readiness is Readiness.ALL)
