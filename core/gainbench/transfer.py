"""The plant as python-control objects, for users who go on from there. The only module that imports that library."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from gainbench.model import Rig
from gainbench.plant import refer, state_space

if TYPE_CHECKING:
    import control


@dataclass(frozen=True, slots=True, kw_only=True)
class TransferFunctions:
    """The continuous linear plant at the motor shaft, without Coulomb friction; SI, as in :mod:`gainbench.plant`."""

    plant: control.StateSpace
    """All of it: inputs ``voltage`` [V] and ``load_torque`` [N m] (positive brakes); outputs ``current`` [A],
    ``sampled_current`` [A] behind the analogue filter, ``speed`` and ``load_speed`` [rad/s]."""
    current_by_voltage: control.StateSpace
    """[A/V]."""
    speed_by_voltage: control.StateSpace
    """[rad/(s V)]."""
    speed_by_load: control.StateSpace
    """Motor speed by load torque [rad/(s N m)]."""


def transfer_functions(rig: Rig) -> TransferFunctions:
    """Hand out the continuous plant of a rig as state-space objects of python-control.

    ``L di/dt = v - R i - Ke w``, ``J dw/dt = Kt i - b w - T_load``; the free angle is left out, as no output needs it.

    Parameters
    ----------
    rig : Rig
        Machine, train and stage as the sheet states them.

    Returns
    -------
    TransferFunctions
        ``control.StateSpace`` objects with named signals; ``control.ss2tf`` turns one into polynomials.

    Raises
    ------
    ValueError
        As :func:`gainbench.plant.refer`.

    Examples
    --------
    >>> from gainbench.sheetfile import parse_sheet
    >>> from gainbench_resources import demo_sheet
    >>> text = demo_sheet("label-unwinder").read_text(encoding="utf-8")
    >>> sheet = parse_sheet(text, "label-unwinder.bench.toml").sheet
    >>> transfer_functions(sheet.rig).speed_by_voltage.nstates
    2
    """
    import control

    space = state_space(refer(rig))
    kept = space.a.shape[0] - 1
    rows = [space.current, space.sampled_current, space.speed, space.load_speed]
    c = np.zeros((4, kept))
    for output, state in enumerate(rows):
        c[output, state] = 1.0
    plant = control.ss(
        space.a[:kept, :kept],
        space.b[:kept][:, [0, 2]],
        c,
        np.zeros((4, 2)),
        inputs=["voltage", "load_torque"],
        outputs=["current", "sampled_current", "speed", "load_speed"],
        name="plant",
    )
    return TransferFunctions(
        plant=plant,
        current_by_voltage=plant[0, 0],
        speed_by_voltage=plant[2, 0],
        speed_by_load=plant[2, 1],
    )
