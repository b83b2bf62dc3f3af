"""One state of an open sheet, and the steps from one to the next: no Qt, no widgets, nothing is changed in place."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace

from gainbench.errors import SheetError
from gainbench.model import DesignMethod, HandGains, Sheet
from gainbench.sheetfile import EntryValue, SheetDocument, quantity_paths, read_entry
from gainbench_app.sheet_edits import gain_dimension, with_number, written

_GAINS = ("kp", "ki")


@dataclass(frozen=True, slots=True, kw_only=True)
class State:
    """One state of the desk; undo goes from one to another."""

    document: SheetDocument
    """The last text that is a valid sheet."""
    sheet: Sheet
    """In force: the document's, with the live values put in."""
    live: Mapping[str, EntryValue] = field(default_factory=dict)
    """Moved by sliders and not yet in the text."""
    wrong: Mapping[str, EntryValue] = field(default_factory=dict)
    """Wanted and refused: texts as typed, None for an entry taken out."""
    problems: Mapping[str, str] = field(default_factory=dict)
    """Why, by path."""
    held: Mapping[str, HandGains] = field(default_factory=dict)
    """Gains that stay while the plant is edited, by loop; not part of the sheet."""

    @property
    def valid(self) -> bool:
        """Whether every entry is taken."""
        return not self.wrong and not self.problems

    @property
    def assessed_sheet(self) -> Sheet:
        """What is assessed: the sheet in force, with gains that are held as gains by hand."""
        aims = self.sheet.aims
        for loop, hand in self.held.items():
            by_hand = {"method": DesignMethod.BY_HAND, "hand": hand}
            if loop == "current":
                aims = replace(aims, current=replace(aims.current, **by_hand))
            else:
                aims = replace(aims, speed=replace(aims.speed, **by_hand))
        return self.sheet if aims is self.sheet.aims else replace(self.sheet, aims=aims)


@dataclass(frozen=True, slots=True, kw_only=True)
class Typed:
    """What typing leads to."""

    state: State
    taken: Mapping[str, EntryValue]
    """What its document holds other than the one before."""


def as_text(value: EntryValue) -> str:
    """An entry as it stands in a box."""
    if isinstance(value, bool):
        return "true" if value else "false"
    return repr(value) if isinstance(value, float) else str(value)


def settled(state: State) -> State:
    """The state with its live values written into the text.

    Raises
    ------
    SheetError
        If the text cannot be edited there.
    """
    if not state.live:
        return state
    document = state.document.with_values(state.live)
    return replace(state, document=document, sheet=document.sheet, live={})


def typed(state: State, values: Mapping[str, EntryValue]) -> Typed:
    """The state after entries were typed: taken where the sheet stays valid, kept and marked where not.

    What was refused before is tried again with the new values, since two entries may be right only together; where
    that does not do, the new values may be fine without it.
    """
    base = settled(state)
    wanted = {**state.wrong, **values}
    document, problems = _tried(base.document, wanted)
    if document is not None:
        after = State(document=document, sheet=document.sheet, held=state.held)
        return Typed(state=after, taken={**state.live, **wanted})
    if state.wrong:
        kept = {path: value for path, value in state.wrong.items() if path not in values}
        alone = _tried(base.document, values)[0]
        if alone is not None:
            problems = _tried(alone, kept)[1]
            after = State(document=alone, sheet=alone.sheet, wrong=kept, problems=problems, held=state.held)
            return Typed(state=after, taken={**state.live, **values})
    after = State(document=base.document, sheet=base.sheet, wrong=wanted, problems=problems, held=state.held)
    return Typed(state=after, taken=state.live)


def moved(state: State, path: str, value: float, *, differs: bool = True) -> State:
    """The state with one number moved by a slider, as it would be saved in the user's unit.

    Parameters
    ----------
    state : State
        Before.
    path : str
        ``aims.current.crossover``.
    value : float
        In the model's unit; a value that the sheet would refuse changes nothing.
    differs : bool
        True sees that a small step is not lost in the digits that are shown.
    """
    shown = state.live.get(path)
    before = as_text(shown) if shown is not None else state.document.typed(path)
    key = path.rpartition(".")[2]
    dimension = gain_dimension(path, before) if key in _GAINS else quantity_paths()[path]
    entry = written(value, dimension, like=before, differs_from=before if differs else None)
    try:
        number = read_entry(path, as_text(entry))
    except SheetError:
        return state
    if not isinstance(number, int | float):
        return state
    state = _without_wrong(state, path)
    sheet = with_number(state.sheet, path, float(number))
    return replace(state, sheet=sheet, live={**state.live, path: entry})


def _without_wrong(state: State, path: str) -> State:
    """The state without a refused text, which a slider replaces."""
    if path not in state.wrong:
        return state
    wrong = {key: value for key, value in state.wrong.items() if key != path}
    return replace(state, wrong=wrong, problems=_tried(state.document, wrong)[1] if wrong else {})


def _tried(document: SheetDocument, values: Mapping[str, EntryValue]) -> tuple[SheetDocument | None, dict[str, str]]:
    """The document with values set; where it is refused, None and the reasons by path."""
    try:
        return document.with_values(values), {}
    except SheetError as error:
        if not error.problems:
            return None, dict.fromkeys(values, str(error))
        return None, {
            problem.path: problem.reason + (f" (for example {problem.example})" if problem.example else "")
            for problem in reversed(error.problems)
        }
