"""What is guessed of a log, with the reason, in the words of people."""

from __future__ import annotations

from collections.abc import Collection, Mapping

from gainbench.evidence import SurveyedColumn
from gainbench.evidence.guessing import guess_column, spelled
from gainbench.model import Experiment, SignalName

EXPERIMENTS: Mapping[Experiment, str] = {
    Experiment.DRIVEN: "driven run",
    Experiment.LOCKED_ROTOR: "locked rotor",
    Experiment.NO_LOAD: "no-load run",
    Experiment.COAST_DOWN: "coast-down",
    Experiment.STEP_CHECK: "step check",
    Experiment.FREQUENCY_RESPONSE: "frequency response",
}
SIGNALS: Mapping[SignalName, str] = {
    SignalName.TIME: "time",
    SignalName.VOLTAGE: "voltage",
    SignalName.CURRENT: "current",
    SignalName.TORQUE: "torque",
    SignalName.SPEED: "speed",
    SignalName.ANGLE: "angle",
    SignalName.SPEED_REFERENCE: "speed reference",
    SignalName.CURRENT_REFERENCE: "current reference",
}
COMPARED = (Experiment.STEP_CHECK, Experiment.FREQUENCY_RESPONSE)
"""Experiments that are laid over the prediction, and identify nothing."""


def guessed_experiment(signals: Collection[SignalName]) -> Experiment:
    """What a log of these signals may be of; its user knows better."""
    moves = SignalName.SPEED in signals or SignalName.ANGLE in signals
    drives = {SignalName.VOLTAGE, SignalName.CURRENT, SignalName.TORQUE} & set(signals)
    if SignalName.SPEED_REFERENCE in signals and moves:
        return Experiment.STEP_CHECK
    if SignalName.CURRENT_REFERENCE in signals and not moves:
        return Experiment.FREQUENCY_RESPONSE
    if moves and not drives:
        return Experiment.COAST_DOWN
    if not moves and {SignalName.VOLTAGE, SignalName.CURRENT} <= set(signals):
        return Experiment.LOCKED_ROTOR
    return Experiment.DRIVEN


def why_guessed(column: SurveyedColumn) -> str:
    """What a column was guessed to hold, and from what."""
    if not column.numeric:
        return "holds no numbers"
    guess = column.guess
    if guess is None:
        return "nothing guessed: neither its name nor its unit says what it holds"
    words = SIGNALS[guess.signal]
    by_name = guess_column(column.name, "", others=column.others)
    from_what = []
    if by_name is not None and by_name.signal is guess.signal:
        from_what.append("its name")
    if spelled(column.unit):
        from_what.append("its unit")
    why = " and ".join(from_what) or "its stamps"
    if guess.unit:
        return f"guessed: {words} in {guess.unit}, from {why}"
    return f"perhaps {words}, from {why}; the file gives no unit"
