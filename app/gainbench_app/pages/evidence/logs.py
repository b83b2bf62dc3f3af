"""The logs of the open sheet: what the sheet names, what was found in the files, and which part of each counts.

What the sheet holds is edited through the desk. Spans are of this window only: the sheet has no place for them.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial
from pathlib import Path

from PySide6.QtCore import QObject, Signal

from gainbench.errors import LogError, SheetError
from gainbench.evidence import Log, LogSurvey, SurveyedColumn, read_log, survey_log
from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import SheetDocument, remove_evidence
from gainbench_app.desk import Desk
from gainbench_app.log_places import file_of, place_of
from gainbench_app.pages.evidence import edits
from gainbench_app.pages.evidence.guesses import guessed_experiment
from gainbench_app.pages.evidence.overview import LogOverview, overview
from gainbench_app.pages.evidence.reader import Reader
from gainbench_app.what_it_does.spans import Span

_Stamp = tuple[int, int]
_FileKey = tuple[str, _Stamp | None]
_LogKey = tuple[_FileKey, tuple[LogColumn, ...]]


@dataclass(frozen=True, slots=True, kw_only=True)
class LogEntry:
    """One log of the list."""

    index: int | None
    """Its place in the sheet; None for one that is not in it yet, since none of its columns is mapped."""
    log: str
    """As the sheet names it."""
    file: Path
    experiment: Experiment
    columns: tuple[LogColumn, ...] = ()


@dataclass(frozen=True, slots=True, kw_only=True)
class _Wanted:
    """A file that is to be added."""

    file: Path


class Logs(QObject):
    """The list, and one of it that is chosen."""

    changed = Signal()
    """The list, what is known of it, or what is chosen, is other than before."""
    refused = Signal(str)
    """Why a file was not taken, or an edit not made."""

    def __init__(self, desk: Desk, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._desk = desk
        self._reader = Reader(self)
        self._reader.found.connect(self._receive)
        self._active = False
        self._seen: tuple[object, ...] = ()
        self._entries: tuple[LogEntry, ...] = ()
        self._drafts: list[LogEntry] = []
        self._chosen = 0
        self._stamps: dict[Path, _Stamp | None] = {}
        self._surveys: dict[_FileKey, LogSurvey | LogError] = {}
        self._overviews: dict[_LogKey, LogOverview | LogError] = {}
        self._spans: dict[Path, Span] = {}
        desk.changed.connect(self._follow)
        desk.opened.connect(self._begin_anew)
        self._follow()

    # What there is

    @property
    def entries(self) -> tuple[LogEntry, ...]:
        """Those of the sheet, then those that are not in it yet."""
        return self._entries

    @property
    def chosen(self) -> LogEntry | None:
        """The one whose columns and signals are shown."""
        return self._entries[self._chosen] if self._entries else None

    @property
    def reading(self) -> bool:
        """Whether a file is being looked into."""
        return self._reader.busy

    def survey(self, entry: LogEntry) -> LogSurvey | None:
        """What is in a file; None while it is not known, or cannot be."""
        found = self._surveys.get(self._file_key(entry))
        return found if isinstance(found, LogSurvey) else None

    def overview(self, entry: LogEntry) -> LogOverview | None:
        """What a log looks like with its mapping; None while it is not known, or cannot be."""
        found = self._overviews.get(self._log_key(entry))
        return found if isinstance(found, LogOverview) else None

    def problem(self, entry: LogEntry) -> str:
        """Why a log cannot be used; empty where nothing speaks against it."""
        for found in (self._surveys.get(self._file_key(entry)), self._overviews.get(self._log_key(entry))):
            if isinstance(found, LogError):
                return str(found)
        if entry.index is None:
            return "not in the sheet yet: say below what one of its columns holds"
        return ""

    def pending(self, entry: LogEntry) -> bool:
        """Whether a log is being looked into, or waits for it."""
        return self._reader.asked(self._file_key(entry)) or self._reader.asked(self._log_key(entry))

    def span(self, entry: LogEntry) -> Span | None:
        """The part of a log that counts; None for all of it."""
        return self._spans.get(entry.file)

    # What can be done

    def choose(self, place: int) -> None:
        """Show another log."""
        if place != self._chosen and 0 <= place < len(self._entries):
            self._chosen = place
            self.changed.emit()

    def add(self, file: Path) -> None:
        """Look into a file, and put it into the sheet with what is guessed of it."""
        wanted = place_of(file, self._desk.path)
        place = next((place for place, one in enumerate(self._entries) if one.log == wanted), None)
        if place is not None:
            self.choose(place)
            self.refused.emit(f"{file.name} is in the list already")
            return
        self._reader.ask(_Wanted(file=file), partial(survey_log, file))
        self.changed.emit()

    def remove(self, entry: LogEntry) -> None:
        """Take a log out of the list; its file stays."""
        if entry.index is None:
            self._drafts = [one for one in self._drafts if one is not entry]
            self._rebuild()
        else:
            index = entry.index
            self._edit(lambda document: remove_evidence(document, index))

    def choose_experiment(self, entry: LogEntry, experiment: Experiment) -> None:
        """Say what a log is of."""
        if entry.index is None:
            self._drafts = [replace(one, experiment=experiment) if one is entry else one for one in self._drafts]
            self._rebuild()
        else:
            self._edit(partial(edits.with_experiment, index=entry.index, experiment=experiment))

    def map_column(
        self, entry: LogEntry, column: SurveyedColumn, *, signal: SignalName, unit: str, scale: float
    ) -> str:
        """Say what a column holds; why it is refused, or nothing."""
        chosen = LogColumn(signal=signal, column=self._name_of(entry, column), unit=unit, scale=scale)
        return self._map(entry, edits.mapped(entry.columns, chosen, names=names_of(column)))

    def unmap_column(self, entry: LogEntry, column: SurveyedColumn) -> str:
        """Say that a column holds nothing that is used; why it is refused, or nothing."""
        columns = edits.unmapped(entry.columns, names=names_of(column))
        if not columns and entry.index is not None:
            return "one column at least has to be mapped; remove the log to be rid of it"
        return self._map(entry, columns) if len(columns) < len(entry.columns) else ""

    def choose_span(self, entry: LogEntry, span: Span | None) -> None:
        """Say which part of a log counts; None for all of it."""
        found = self.overview(entry)
        if span is not None and found is not None and span.start <= 0.0 and span.stop >= found.length:
            span = None
        if span is None:
            self._spans.pop(entry.file, None)
        else:
            self._spans[entry.file] = span
        self.changed.emit()

    def look_again(self) -> None:
        """Look whether files have changed, and read those that have."""
        self._active = True
        self._stamps.clear()
        self._read_all()
        self.changed.emit()

    def rest(self) -> None:
        """The page is not shown: nothing is read ahead."""
        self._active = False

    def close(self) -> None:
        """Wait for what is being read."""
        self._reader.close()

    # How it comes about

    def _name_of(self, entry: LogEntry, column: SurveyedColumn) -> str:
        """What the mapping calls a column already, else what it is to call it."""
        names = names_of(column)
        return next((one.column for one in entry.columns if one.column in names), column.mapped_as)

    def _map(self, entry: LogEntry, columns: list[LogColumn]) -> str:
        if entry.index is None:
            wanted = EvidenceLog(log=entry.log, experiment=entry.experiment, columns=tuple(columns))
            why = self._edit(partial(edits.with_log, evidence=wanted), tell=False)
            if not why:
                self._drafts = [one for one in self._drafts if one is not entry]
                self._rebuild()
                self._chosen = len(self._desk.sheet.evidence) - 1
                self.changed.emit()
            return why
        return self._edit(partial(edits.with_columns, index=entry.index, columns=columns), tell=False)

    def _edit(self, change: Callable[[SheetDocument], SheetDocument], *, tell: bool = True) -> str:
        """Edit the sheet as one step of undo; why it is refused, or nothing."""
        try:
            self._desk.edit(change)
        except SheetError as error:
            first = error.problems[0] if error.problems else None
            why = (
                str(error)
                if first is None
                else first.reason + (f" (for example {first.example})" if first.example else "")
            )
            if tell:
                self.refused.emit(why)
            return why
        return ""

    def _begin_anew(self) -> None:
        """Another sheet is open."""
        self._reader.drop()
        self._drafts.clear()
        self._spans.clear()
        self._chosen = 0
        self._seen = ()
        self._follow()

    def _follow(self) -> None:
        """The desk has changed; most often not here."""
        seen = (self._desk.sheet.evidence, self._desk.path)
        if seen != self._seen:
            self._seen = seen
            self._rebuild()

    def _rebuild(self) -> None:
        path = self._desk.path
        listed = [
            LogEntry(
                index=index, log=one.log, file=file_of(one.log, path), experiment=one.experiment, columns=one.columns
            )
            for index, one in enumerate(self._desk.sheet.evidence)
        ]
        self._entries = (*listed, *self._drafts)
        self._chosen = min(self._chosen, max(0, len(self._entries) - 1))
        self._read_all()
        self.changed.emit()

    def _read_all(self) -> None:
        if not self._active:
            return
        for entry in self._entries:
            file_key = self._file_key(entry)
            if file_key not in self._surveys:
                self._reader.ask(file_key, partial(survey_log, entry.file))
            log_key = self._log_key(entry)
            if entry.columns and log_key not in self._overviews:
                self._reader.ask(log_key, partial(_read, entry.file, entry.columns))

    def _receive(self, key: object, found: object) -> None:
        if isinstance(key, _Wanted):
            self._take(key.file, found)
        elif isinstance(key, tuple) and isinstance(key[0], str) and isinstance(found, LogSurvey | LogError):
            self._surveys[key] = found
        elif isinstance(key, tuple) and isinstance(found, LogOverview | LogError):
            self._overviews[key] = found
        self.changed.emit()

    def _take(self, file: Path, found: object) -> None:
        """A file that was to be added was looked into."""
        if not isinstance(found, LogSurvey):
            self.refused.emit(f"nothing was added: {found}")
            return
        place = place_of(file, self._desk.path)
        columns = found.suggestion
        # Columns whose unit is not known yet speak of the experiment as well.
        experiment = guessed_experiment([one.guess.signal for one in found.columns if one.guess is not None])
        wanted = EvidenceLog(log=place, experiment=experiment, columns=columns)
        if not columns or self._edit(partial(edits.with_log, evidence=wanted), tell=False):
            draft = LogEntry(index=None, log=place, file=file, experiment=experiment)
            self._drafts.append(draft)
            self._rebuild()
            self.choose(len(self._entries) - 1)
        else:
            self.choose(len(self._desk.sheet.evidence) - 1)

    def _file_key(self, entry: LogEntry) -> _FileKey:
        if entry.file not in self._stamps:
            self._stamps[entry.file] = _stamp(entry.file)
        return (str(entry.file), self._stamps[entry.file])

    def _log_key(self, entry: LogEntry) -> _LogKey:
        return (self._file_key(entry), entry.columns)


def names_of(column: SurveyedColumn) -> tuple[str, ...]:
    """What a mapping may call a column."""
    return (column.mapped_as, column.name, *column.others)


def _read(file: Path, columns: tuple[LogColumn, ...]) -> LogOverview:
    log: Log = read_log(file, columns)
    return overview(log)


def _stamp(file: Path) -> _Stamp | None:
    """What tells one state of a file from another; None where there is none."""
    try:
        status = file.stat()
    except (OSError, ValueError):
        return None
    return (status.st_mtime_ns, status.st_size)
