"""From a sheet and its logs to estimates: each log by its experiment, then all of them together."""

from __future__ import annotations

from collections.abc import Sequence

from gainbench.errors import LogError
from gainbench.evidence.coast_down import coast_down
from gainbench.evidence.combining import Known, combine
from gainbench.evidence.driven import driven
from gainbench.evidence.elasticity import elastic_remark
from gainbench.evidence.estimate import EstimateName, Identification, RunReport
from gainbench.evidence.frequency_response import check_frequency_response
from gainbench.evidence.locked_rotor import locked_rotor
from gainbench.evidence.log import Log
from gainbench.evidence.no_load import no_load
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.plausible import off_the_sheet
from gainbench.evidence.prepared import prepare, without_clipped
from gainbench.evidence.step_check import check_step
from gainbench.kernels.code_cache import code_cache
from gainbench.model import EvidenceLog, Experiment, Sheet
from gainbench.plant import Plant, refer

_KERNELS = ("identify_reduce",)
"""What every fit takes, and compiles last."""
_TURNS = (
    (Experiment.LOCKED_ROTOR,),
    (Experiment.DRIVEN,),
    (Experiment.NO_LOAD, Experiment.COAST_DOWN),
    (Experiment.STEP_CHECK, Experiment.FREQUENCY_RESPONSE),
)
_FEWEST = 60
"""Rows of a log below which nothing is told from it."""


def is_compiled() -> bool:
    """Whether the machine code of the kernels is on disk, so that the first identification takes no half minute.

    Returns
    -------
    bool
    """
    return all(code_cache(name).is_dir() for name in _KERNELS)


def identify(sheet: Sheet, logs: Sequence[Log]) -> Identification:
    """Identify from the logs of a sheet.

    Each log is fitted by itself, with what the logs of experiments before it tell in place of what it cannot tell (a
    locked rotor's resistance for a no-load run's constant); what they tell is put together by weight. Estimates are SI,
    in the terms of the equations: q axis and peak amperes for pm-sine, between two terminals for pm-block, inertia and
    frictions as totals at the motor shaft.

    Parameters
    ----------
    sheet : Sheet
        With its evidence, and with values to begin from; those may be off by half and more.
    logs : sequence of Log
        As read, in the order of ``sheet.evidence``.

    Returns
    -------
    Identification
        What no log tells is absent, and named in the remarks of the run.

    Raises
    ------
    LogError
        If there is no evidence, or a log lacks the columns that its experiment takes.
    """
    if not sheet.evidence:
        raise LogError(
            "the sheet has no evidence: add an [[evidence]] table with log, experiment and [evidence.columns] (for"
            ' example log = "run-07.csv", experiment = "driven")'
        )
    if len(logs) != len(sheet.evidence):
        raise ValueError(f"{len(logs)} logs for {len(sheet.evidence)} tables of evidence")
    found: dict[int, Outcome] = {}
    for turn in fit_turns(sheet.evidence):
        earlier = list(found.values())
        found |= {place: told_by(sheet, sheet.evidence[place], logs[place], earlier=earlier) for place in turn}
    return put_together(sheet, logs, [found[place] for place in range(len(logs))])


def fit_turns(evidence: Sequence[EvidenceLog]) -> tuple[tuple[int, ...], ...]:
    """In which turns to fit the logs of a sheet: those that tell most by themselves first, for the others to use.

    Logs of one turn do not use each other, so that their order in the sheet does not matter.

    Parameters
    ----------
    evidence : sequence of EvidenceLog
        Of the sheet.

    Returns
    -------
    tuple of tuples of int
        Places in ``evidence``, each once.
    """
    turns = (tuple(place for place, entry in enumerate(evidence) if entry.experiment in turn) for turn in _TURNS)
    return tuple(turn for turn in turns if turn)


def put_together(sheet: Sheet, logs: Sequence[Log], outcomes: Sequence[Outcome]) -> Identification:
    """Put together by weight what each log of a sheet tells by itself.

    Parameters
    ----------
    sheet : Sheet
        With its evidence.
    logs : sequence of Log
        In the order of ``sheet.evidence``.
    outcomes : sequence of Outcome
        Of :func:`told_by`, in the same order.

    Returns
    -------
    Identification
        SI.
    """
    plant = refer(sheet.rig)
    known = _known(plant)
    fitted = combine([told for one in outcomes for told in one.fitted], known)
    linear = combine([told for one in outcomes for told in one.linear], known)
    off = off_the_sheet(fitted.estimates, sheet, plant)
    return Identification(
        estimates=fitted.estimates,
        regression=linear.estimates,
        runs=tuple(
            RunReport(
                log=entry.log,
                experiment=entry.experiment,
                fit_percent=outcome.fit_percent,
                remarks=(
                    *log.remarks,
                    *outcome.remarks,
                    *_borrowed(outcome, fitted.borrowed, known),
                    *(off if outcome.fitted else ()),
                ),
            )
            for entry, log, outcome in zip(sheet.evidence, logs, outcomes, strict=True)
        ),
    )


def _known(plant: Plant) -> Known:
    return Known(torque_constant=plant.torque, inertia=plant.inertia, torque_factor=plant.torque / plant.back_emf)


def _borrowed(outcome: Outcome, borrowed: tuple[EstimateName, ...], known: Known) -> list[str]:
    """Which values of the sheet the estimates of a log rest on, in words."""
    used = {ratio.per for told in outcome.fitted for ratio in told.ratios}
    words = []
    if EstimateName.TORQUE_CONSTANT in borrowed and EstimateName.TORQUE_CONSTANT in used:
        words.append(f"torques rest on the sheet's torque constant, {known.torque_constant:.4g} N*m/A: no log tells it")
    if EstimateName.INERTIA in borrowed and EstimateName.INERTIA in used:
        words.append(f"frictions rest on the sheet's inertia, {known.inertia:.4g} kg*m^2: no log tells it")
    return words


def told_by(sheet: Sheet, entry: EvidenceLog, log: Log, *, earlier: Sequence[Outcome] = ()) -> Outcome:
    """What one log tells, by its experiment.

    Parameters
    ----------
    sheet : Sheet
        With values to begin from.
    entry : EvidenceLog
        What the log is.
    log : Log
        As read.
    earlier : sequence of Outcome
        Of logs that were fitted before: where this log cannot tell a resistance or an inductance, what they tell
        stands in for the sheet's, with its doubt.

    Returns
    -------
    Outcome
        SI.

    Raises
    ------
    LogError
        If the log does not do for its experiment.
    """
    if entry.experiment is Experiment.STEP_CHECK:
        return check_step(sheet, log).outcome
    if entry.experiment is Experiment.FREQUENCY_RESPONSE:
        return check_frequency_response(sheet, log).outcome
    plant = refer(sheet.rig)
    before = combine([told for one in earlier for told in one.fitted], _known(plant)).estimates
    record = without_clipped(prepare(log))
    if record.size < _FEWEST:
        raise LogError(
            f"{log.name}: too short to identify from: it has {record.size} rows in unbroken pieces, it takes at least"
            f" {_FEWEST}; record a longer run, or at a higher rate"
        )
    found: Outcome
    if entry.experiment is Experiment.LOCKED_ROTOR:
        found = locked_rotor(record, plant)
    elif entry.experiment is Experiment.NO_LOAD:
        found = no_load(record, plant, earlier=before)
    elif entry.experiment is Experiment.COAST_DOWN:
        found = coast_down(record)
    else:
        found = driven(record, plant, earlier=before)
    turned = entry.experiment is not Experiment.LOCKED_ROTOR
    elastic = elastic_remark(record, plant) if turned and found.fitted else ""
    repaired = record.remarks[len(log.remarks) :]
    return Outcome(
        fitted=found.fitted,
        linear=found.linear,
        fit_percent=found.fit_percent,
        remarks=(*repaired, *found.remarks, *([elastic] if elastic else [])),
    )
