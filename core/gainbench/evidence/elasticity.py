"""What an elastic train does to logs that are laid on one rigid body."""

from __future__ import annotations

import math

import numpy as np

from gainbench.derived import antiresonance, resonance
from gainbench.evidence.prepared import Record
from gainbench.model import SignalName
from gainbench.plant import Plant

_ABOVE = 0.02
"""Share of the drive's power beyond half the antiresonance from which on the log excites it."""
_SEGMENT = 4096


def elastic_remark(record: Record, plant: Plant) -> str:
    """What is to be said where the sheet's train is elastic, empty where it is rigid.

    Below the antiresonance ``sqrt(k/JL)`` motor and load turn as one; from about half of it on the load lags, and what
    is fitted as one inertia is neither.

    Parameters
    ----------
    record : Record
        Of a run that turned.
    plant : Plant
        The sheet's values at the motor shaft.

    Returns
    -------
    str
    """
    low, high = antiresonance(plant), resonance(plant)
    if low is None or high is None:
        return ""
    low, high = low / math.tau, high / math.tau
    words = (
        "the sheet's train is elastic and was fitted as one rigid body: inertia and frictions are those of both sides"
        f" together, as far as the run stays well below the antiresonance at {low:.3g} Hz"
    )
    share = _share_above(record, 0.5 * low)
    if share is None or share < _ABOVE:
        return words
    return (
        f"{words}. This run does not: {100.0 * share:.2g} % of its drive lies above half of that (the resonance is at"
        f" {high:.3g} Hz); record one with slower or softer steps, and stiffness by a frequency response"
    )


def _share_above(record: Record, frequency: float) -> float | None:
    """Share of the drive's moving power above a frequency [Hz], less its noise."""
    from scipy.signal import welch

    names = (SignalName.TORQUE, SignalName.CURRENT, SignalName.VOLTAGE)
    drive = next((record.signals[name] for name in names if record.has(name)), None)
    if drive is None:
        return None
    first, last = max(zip(record.bounds[:-1], record.bounds[1:], strict=True), key=lambda span: span[1] - span[0])
    at, power = welch(drive[first:last], fs=1.0 / record.step, nperseg=min(_SEGMENT, int(last - first)))
    floor = float(np.median(power[2 * power.size // 3 :]))
    power = np.maximum(power - floor, 0.0)[1:]
    whole = float(power.sum())
    return float(power[at[1:] > frequency].sum()) / whole if whole > 0.0 else None
