"""What the logs of a sheet tell of the curves that are predicted: read once per change of a file.

Everything here runs off the window's thread; what it hands out is frozen.
"""

from __future__ import annotations

from contextlib import ExitStack
from dataclasses import dataclass, field
from importlib.resources import as_file
from pathlib import Path

from gainbench.errors import GainbenchError, LogError
from gainbench.evidence.frequency_response import (
    FrequencyCheck,
    MeasuredResponse,
    check_measured_response,
    measured_response,
)
from gainbench.evidence.prepared import Record, prepare
from gainbench.evidence.reading import read_log
from gainbench.evidence.step_check import LoggedStep, StepCheck, check_logged_step, logged_step
from gainbench.model import EvidenceLog, Experiment, LogColumn, Sheet, Stage
from gainbench_app.log_places import file_of
from gainbench_resources import demo_log

LAID_OVER = (Experiment.STEP_CHECK, Experiment.FREQUENCY_RESPONSE)
"""Experiments whose logs are measured curves of what is predicted."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Request:
    """What is to be read, and what it is held against."""

    sheet: Sheet
    path: Path | None
    """Of the sheet's file; None where it has none yet."""
    predicted: bool
    """Whether the prediction can be computed already."""

    @property
    def entries(self) -> tuple[EvidenceLog, ...]:
        """The logs that are laid over."""
        return laid_over(self.sheet)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MeasuredStep:
    """A step as it was measured."""

    name: str
    step: LoggedStep
    check: StepCheck | None = None
    """Against the sheet; None where nothing is predicted."""


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MeasuredFrequencies:
    """A frequency response as it was measured."""

    name: str
    response: MeasuredResponse
    check: FrequencyCheck | None = None
    """Against the sheet; None where nothing is predicted."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Unread:
    """A log that gives no curve, yet or at all."""

    name: str
    experiment: Experiment
    reason: str
    """For the user; empty while it is being read."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Measurements:
    """All logs of a sheet that are laid over, in its order."""

    steps: tuple[MeasuredStep, ...] = ()
    responses: tuple[MeasuredFrequencies, ...] = ()
    unread: tuple[Unread, ...] = ()

    def unread_of(self, experiment: Experiment) -> tuple[Unread, ...]:
        """Logs of an experiment that give no curve."""
        return tuple(one for one in self.unread if one.experiment is experiment)


def laid_over(sheet: Sheet) -> tuple[EvidenceLog, ...]:
    """The logs of a sheet that are measured curves of what it predicts."""
    return tuple(one for one in sheet.evidence if one.experiment in LAID_OVER)


def name_of(entry: EvidenceLog) -> str:
    """A log as it is called in the window."""
    return Path(entry.log).name or entry.log


def waiting(sheet: Sheet) -> Measurements:
    """Before anything is read."""
    return Measurements(
        unread=tuple(Unread(name=name_of(one), experiment=one.experiment, reason="") for one in laid_over(sheet))
    )


@dataclass(frozen=True, slots=True, kw_only=True)
class _FileState:
    """A file as it was when it was read, and which of its columns were taken."""

    path: Path
    changed_ns: int
    size: int
    columns: tuple[LogColumn, ...]


@dataclass(slots=True, kw_only=True, eq=False)
class _Known:
    """What is known of one state of a file; a log that was refused stays so until it changes."""

    record: Record | None = None
    refusal: str = ""
    response: MeasuredResponse | None = None
    response_of: Stage | None = None


@dataclass(slots=True, kw_only=True, eq=False)
class LogReader:
    """Reads the logs of requests, each state of a file once. One thread at a time."""

    _known: dict[_FileState, _Known] = field(default_factory=dict)

    def read(self, request: Request) -> Measurements:
        """All that a request asks for.

        Parameters
        ----------
        request : Request
            What is to be read.

        Returns
        -------
        Measurements
            A log that cannot be read or used is among ``unread``, with the reason.
        """
        steps: list[MeasuredStep] = []
        responses: list[MeasuredFrequencies] = []
        unread: list[Unread] = []
        used: dict[_FileState, _Known] = {}
        for entry in request.entries:
            try:
                known = self._opened(entry, request.path, used)
                if entry.experiment is Experiment.STEP_CHECK:
                    steps.append(_step(known, request, name_of(entry)))
                else:
                    responses.append(_frequencies(known, request, name_of(entry)))
            except GainbenchError as error:
                unread.append(Unread(name=name_of(entry), experiment=entry.experiment, reason=str(error)))
            except Exception as error:  # noqa: BLE001  (whatever a file holds, the window has to stay)
                reason = f"{name_of(entry)}: cannot be used: {type(error).__name__}: {error}"
                unread.append(Unread(name=name_of(entry), experiment=entry.experiment, reason=reason))
        self._known = used
        return Measurements(steps=tuple(steps), responses=tuple(responses), unread=tuple(unread))

    def _opened(self, entry: EvidenceLog, sheet: Path | None, used: dict[_FileState, _Known]) -> _Known:
        """The log on its even grid, read anew only where its file or its columns are other than before."""
        with ExitStack() as stack:
            file = _open_file(entry.log, sheet, stack)
            state = _state_of(file, entry)
            known = used.get(state) or self._known.get(state) or _Known()
            used[state] = known
            if known.record is None and not known.refusal:
                try:
                    known.record = prepare(read_log(file, entry.columns))
                except LogError as error:
                    known.refusal = str(error)
        if known.refusal:
            raise LogError(known.refusal)
        return known


def _open_file(log: str, sheet: Path | None, stack: ExitStack) -> Path:
    """The file of a log: beside the sheet; of a sheet without a file in the working folder, or among the demo logs."""
    file = file_of(log, sheet)
    if sheet is None and Path(log).name == log and not file.exists():
        demo = demo_log(log)
        if demo.is_file():
            return stack.enter_context(as_file(demo))
    return file


def _state_of(file: Path, entry: EvidenceLog) -> _FileState:
    try:
        status = file.stat()
    except FileNotFoundError:
        raise LogError(f"{name_of(entry)}: there is no such file; it was looked for at {file}") from None
    except (OSError, ValueError) as error:
        raise LogError(f"{name_of(entry)}: cannot be read: {getattr(error, 'strerror', None) or error}") from None
    return _FileState(path=file, changed_ns=status.st_mtime_ns, size=status.st_size, columns=entry.columns)


def _step(known: _Known, request: Request, name: str) -> MeasuredStep:
    assert known.record is not None
    step = logged_step(request.sheet, known.record)
    check = None
    if request.predicted:
        try:
            check = check_logged_step(request.sheet, step)
        except LogError:
            # The plots say themselves why there is no prediction.
            check = None
    return MeasuredStep(name=name, step=step, check=check)


def _frequencies(known: _Known, request: Request, name: str) -> MeasuredFrequencies:
    assert known.record is not None
    stage = request.sheet.rig.stage
    if known.response is None or known.response_of != stage:
        known.response, known.response_of = measured_response(request.sheet, known.record), stage
    check = None
    if request.predicted:
        try:
            check = check_measured_response(request.sheet, known.response)
        except LogError:
            check = None
    return MeasuredFrequencies(name=name, response=known.response, check=check)
