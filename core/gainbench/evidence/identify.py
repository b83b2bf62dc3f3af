"""From a sheet and its logs to estimates: each log by its experiment, then all of them together."""

from __future__ import annotations

from collections.abc import Sequence

from gainbench.errors import LogError
from gainbench.evidence.coast_down import coast_down
from gainbench.evidence.combining import Known, combine
from gainbench.evidence.driven import driven
from gainbench.evidence.estimate import EstimateName, Identification, RunReport
from gainbench.evidence.frequency_response import check_frequency_response
from gainbench.evidence.locked_rotor import locked_rotor
from gainbench.evidence.log import Log
from gainbench.evidence.no_load import no_load
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import prepare
from gainbench.evidence.step_check import check_step
from gainbench.model import EvidenceLog, Experiment, Sheet
from gainbench.plant import Plant, refer

_FEWEST = 60
"""Rows of a log below which nothing is told from it."""


def identify(sheet: Sheet, logs: Sequence[Log]) -> Identification:
    """Identify from the logs of a sheet.

    Each log is fitted by itself; what they tell is put together by weight. Estimates are SI, in the terms of the
    equations: q axis and peak amperes for pm-sine, between two terminals for pm-block, inertia and frictions as totals
    at the motor shaft.

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
    plant = refer(sheet.rig)
    outcomes = [_outcome(sheet, plant, entry, log) for entry, log in zip(sheet.evidence, logs, strict=True)]
    known = Known(torque_constant=plant.torque, inertia=plant.inertia, torque_factor=plant.torque / plant.back_emf)
    fitted = combine([told for one in outcomes for told in one.fitted], known)
    linear = combine([told for one in outcomes for told in one.linear], known)
    return Identification(
        estimates=fitted.estimates,
        regression=linear.estimates,
        runs=tuple(
            RunReport(
                log=entry.log,
                experiment=entry.experiment,
                fit_percent=outcome.fit_percent,
                remarks=(*log.remarks, *outcome.remarks, *_borrowed(outcome, fitted.borrowed, known)),
            )
            for entry, log, outcome in zip(sheet.evidence, logs, outcomes, strict=True)
        ),
    )


def _borrowed(outcome: Outcome, borrowed: tuple[EstimateName, ...], known: Known) -> list[str]:
    """Which values of the sheet the estimates of a log rest on, in words."""
    used = {ratio.per for told in outcome.fitted for ratio in told.ratios}
    words = []
    if EstimateName.TORQUE_CONSTANT in borrowed and EstimateName.TORQUE_CONSTANT in used:
        words.append(f"torques rest on the sheet's torque constant, {known.torque_constant:.4g} N*m/A: no log tells it")
    if EstimateName.INERTIA in borrowed and EstimateName.INERTIA in used:
        words.append(f"frictions rest on the sheet's inertia, {known.inertia:.4g} kg*m^2: no log tells it")
    return words


def _outcome(sheet: Sheet, plant: Plant, entry: EvidenceLog, log: Log) -> Outcome:
    if entry.experiment is Experiment.STEP_CHECK:
        return check_step(sheet, log).outcome
    if entry.experiment is Experiment.FREQUENCY_RESPONSE:
        return check_frequency_response(sheet, log).outcome
    record = prepare(log)
    if record.size < _FEWEST:
        raise LogError(
            f"{log.name}: too short to identify from: it has {record.size} rows in unbroken pieces, it takes at least"
            f" {_FEWEST}; record a longer run, or at a higher rate"
        )
    found: Outcome
    if entry.experiment is Experiment.LOCKED_ROTOR:
        found = locked_rotor(record, plant)
    elif entry.experiment is Experiment.NO_LOAD:
        found = no_load(record, plant)
    elif entry.experiment is Experiment.COAST_DOWN:
        found = coast_down(record)
    else:
        found = driven(record, plant)
    repaired = record.remarks[len(log.remarks) :]
    return Outcome(
        fitted=found.fitted, linear=found.linear, fit_percent=found.fit_percent, remarks=(*repaired, *found.remarks)
    )
