"""Locked-rotor runs: resistance and inductance from a step or pulses of voltage."""

from __future__ import annotations

import numpy as np

from gainbench.errors import LogError
from gainbench.evidence.driven import has_motion, refuse_signs, smoothed_speed
from gainbench.evidence.outcome import Outcome
from gainbench.evidence.prepared import Record
from gainbench.evidence.winding_fit import fit_winding
from gainbench.model import SignalName
from gainbench.plant import Plant

_MOVED = 0.02
"""Share of the voltage that a rotor's back EMF may reach and still count as locked."""


def locked_rotor(record: Record, plant: Plant) -> Outcome:
    """Identify R and L from voltage and current with the rotor held.

    The measured voltage is what drives the model, so that a supply that rises or sags is accounted for.

    Parameters
    ----------
    record : Record
        With voltage [V] and current [A].
    plant : Plant
        As the sheet has it, to begin from.

    Returns
    -------
    Outcome
        SI.

    Raises
    ------
    LogError
        If voltage or current is missing.
    """
    if not record.has(SignalName.VOLTAGE, SignalName.CURRENT):
        raise LogError(
            f"{record.name}: a locked-rotor run takes a column of voltage and one of current; map them in"
            " [evidence.columns]. The voltage must be that at the terminals: the supply's own rise is part of it"
        )
    winding = fit_winding(record, turning=False, start=np.array([plant.resistance, plant.inductance]))
    if winding.against:
        refuse_signs(record.name, "voltage", "current")
    remarks = list(winding.remarks)
    if has_motion(record):
        moved = float(np.percentile(np.abs(smoothed_speed(record)), 95.0)) * plant.back_emf
        if moved > _MOVED * float(np.abs(record.signals[SignalName.VOLTAGE]).max()):
            remarks.append(f"the rotor turned: its back EMF reached {moved:.3g} V, both values are off by as much")
    return Outcome(
        fitted=(winding.fitted,), linear=(winding.linear,), fit_percent=winding.fit_percent, remarks=tuple(remarks)
    )
