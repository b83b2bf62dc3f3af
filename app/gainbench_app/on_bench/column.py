"""Machine, train, stage and duty as cards of value boxes."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtWidgets import QPushButton, QVBoxLayout, QWidget

from gainbench.derived import derived_constants
from gainbench.plant import refer
from gainbench_app.desk import Desk
from gainbench_app.on_bench import entries, follows
from gainbench_app.on_bench.meanings import MEANINGS
from gainbench_app.widgets.appearance import Appearance
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_app.widgets.entry_row import Entry, EntryRow
from gainbench_app.widgets.revealing import reveal


class EntryCard(Card):
    """A card whose rows depend on one word of the sheet."""

    def __init__(
        self,
        name: str,
        desk: Desk,
        appearance: Appearance,
        *,
        entries_of: Callable[[str], tuple[Entry, ...]],
        word_path: str = "",
        kinds: tuple[tuple[str, str], ...] = (),
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(name, appearance, parent=parent)
        self._desk = desk
        self._appearance = appearance
        self._entries_of = entries_of
        self._word_path = word_path
        self._shown: tuple[Entry, ...] | None = None
        self._rows: dict[str, EntryRow] = {}
        self.kind: ChoiceBox | None = None
        if kinds:
            self.kind = ChoiceBox(f"kind of {name.lower()}", kinds, appearance, quiet=True)
            self.kind.chosen.connect(lambda word: desk.set_values({word_path: word}))
            self.kind.setToolTip(f"{MEANINGS[word_path]}\n{word_path}")
            self.head_line.addWidget(self.kind)
        self._more = QPushButton("more")
        self._more.setProperty("flat", True)
        self._more.setCheckable(True)
        self._more.toggled.connect(self.refresh)
        self._more.setAccessibleName(f"more entries of {name.lower()}")
        self.rows.addWidget(self._more)

    def row(self, path: str) -> EntryRow:
        """The row of an entry."""
        return self._rows[path]

    def point_at(self, path: str) -> None:
        """Bring an entry to the eye and the keyboard; the head where the card has no such entry."""
        self.head.setChecked(True)
        row = self._rows.get(path)
        if row is not None and row.isHidden():
            self._more.setChecked(True)
        reveal(row.box if row is not None else self.head)

    def refresh(self) -> None:
        """Show what the sheet holds."""
        word = (self._desk.text(self._word_path) or "") if self._word_path else ""
        if self.kind is not None:
            self.kind.show_word(word)
            self.kind.mark(self._desk.problem(self._word_path) or "")
        wanted = self._entries_of(word)
        if wanted != self._shown:
            self._build(wanted)
        hidden = 0
        for path, row in self._rows.items():
            text, problem = self._desk.text(path), self._desk.problem(path)
            spread = f'tolerance."{path}"'
            tolerance, spread_problem = self._desk.text(spread), self._desk.problem(spread)
            row.show_entry(text, problem, tolerance, tolerance_problem=spread_problem)
            told = problem is not None or tolerance is not None or spread_problem is not None
            shown = self._is_main(row.entry, text) or told
            row.setVisible(shown or self._more.isChecked())
            hidden += not shown
        self._more.setVisible(hidden > 0)
        self._more.setText("less" if self._more.isChecked() else f"{hidden} more")

    def _is_main(self, entry: Entry, text: str | None) -> bool:
        if text is None:
            return not entry.optional or entry.path in entries.MAIN_ENTRIES
        return text not in entries.HIDDEN_AT_DEFAULT.get(entry.path, ())

    def _build(self, wanted: tuple[Entry, ...]) -> None:
        keep = {entry.path: entry for entry in wanted}
        for path in [path for path, row in self._rows.items() if keep.get(path) != row.entry]:
            row = self._rows.pop(path)
            self.rows.removeWidget(row)
            row.hide()
            row.deleteLater()
        rows: dict[str, EntryRow] = {}
        for index, entry in enumerate(wanted):
            row = self._rows.get(entry.path) or self._new_row(entry)
            self.rows.insertWidget(index, row)
            rows[entry.path] = row
        self._rows = rows
        self._shown = wanted

    def _new_row(self, entry: Entry) -> EntryRow:
        row = EntryRow(entry, self._appearance)
        row.edited.connect(lambda path, text: self._desk.set_values({path: text}))
        return row


class OnBench(QWidget):
    """The four cards."""

    def __init__(self, desk: Desk, appearance: Appearance, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._shown: tuple[object, ...] = ()
        self.machine = EntryCard(
            "Machine",
            desk,
            appearance,
            entries_of=entries.machine_entries,
            word_path="machine.kind",
            kinds=entries.MACHINE_KINDS,
        )
        self.train = EntryCard(
            "Train",
            desk,
            appearance,
            entries_of=entries.train_entries,
            word_path="train.kind",
            kinds=entries.TRAIN_KINDS,
        )
        self.stage = EntryCard(
            "Stage", desk, appearance, entries_of=entries.stage_entries, word_path="stage.speed_sensor"
        )
        self.duty = EntryCard("Duty", desk, appearance, entries_of=lambda _: entries.duty_entries())
        layout = QVBoxLayout(self)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.setSpacing(8)
        for card in self.cards:
            layout.addWidget(card)
        layout.addStretch(1)
        desk.changed.connect(self.refresh)
        self.refresh()

    @property
    def cards(self) -> tuple[EntryCard, ...]:
        """From top to bottom."""
        return self.machine, self.train, self.stage, self.duty

    def row(self, path: str) -> EntryRow:
        """The row of an entry, ``machine.resistance``."""
        table = path.partition(".")[0]
        return {"machine": self.machine, "train": self.train, "stage": self.stage, "duty": self.duty}[table].row(path)

    def point_at(self, path: str) -> None:
        """Bring an entry, or the card of a table, to the eye and the keyboard."""
        table = path.partition(".")[0]
        card = {"machine": self.machine, "train": self.train, "stage": self.stage, "duty": self.duty}[table]
        card.point_at(path)

    def refresh(self) -> None:
        """Show what the sheet holds, and what follows; nothing of it moves while a slider does."""
        state = self._desk.state
        present = (state.document, state.wrong, state.problems)
        if len(self._shown) == len(present) and all(a is b for a, b in zip(self._shown, present, strict=True)):
            return
        self._shown = present
        for card in self.cards:
            card.refresh()
        sheet = self._desk.sheet
        derived, plant = derived_constants(sheet.rig), refer(sheet.rig)
        self.machine.show_follows(follows.machine_line(derived))
        self.train.show_follows(follows.train_line(derived))
        self.stage.show_follows(follows.stage_line(derived, plant, sheet))
        self.stage.follows.setToolTip(follows.delay_budget(sheet.rig.stage))
        self.duty.show_follows(follows.duty_line(sheet, plant))
