"""Logs of closed loops under excitation, stepped apart from the library: the sampled law by a matrix exponential."""

from __future__ import annotations

import math

import numpy as np
from scipy.linalg import expm

from gainbench.assess import assess
from gainbench.model import Sheet


def excitation(kind: str, rate: float, *, seconds: float = 6.0) -> np.ndarray:
    """A chirp, a multisine or noise as a reference [rad/s], one row per tick."""
    t = np.arange(round(seconds * rate)) / rate
    rng = np.random.default_rng(2)
    if kind == "chirp":
        growth = math.log(400.0)
        return 10.0 * np.sin(math.tau * seconds / growth * (np.exp(t / seconds * growth) - 1.0))
    if kind == "multisine":
        tones = np.unique(np.round(np.geomspace(1.0, 0.3 * rate, 30) * seconds)) / seconds
        return sum(3.0 * np.sin(math.tau * f * t + rng.uniform(0.0, 6.0)) for f in tones)
    return 5.0 * rng.standard_normal(t.size)


def closed_loop(sheet: Sheet, reference: np.ndarray, *, noise: float) -> dict[str, np.ndarray]:
    """The sampled cascade, written out for a rigid brushed drive with an update delay of 1 and no clamp."""
    found = assess(sheet)
    plant, stage = found.plant, sheet.rig.stage
    inner, outer = found.current.gains, found.speed.gains
    ts, divisor = stage.current_period, stage.speed_divisor
    flow = np.zeros((4, 4))
    flow[0] = [-plant.resistance / plant.inductance, -plant.back_emf / plant.inductance, 0.0, 1.0 / plant.inductance]
    flow[1, :2] = plant.torque / plant.inertia, -plant.viscous / plant.inertia
    flow[2, 1] = 1.0
    step = expm(flow * ts)[:3]
    rng = np.random.default_rng(3)
    state, voltage, current_sum, speed_sum, wanted, before = np.zeros(3), 0.0, 0.0, 0.0, 0.0, 0.0
    rows = []
    for k in range(reference.size * divisor):
        if k % divisor == 0:
            asked = reference[k // divisor]
            seen = (state[2] - before) / (divisor * ts) + noise * rng.standard_normal()
            before = state[2]
            speed_sum += outer.ki * divisor * ts * (asked - seen)
            wanted = outer.kp * (sheet.aims.speed.reference_weight * asked - seen) + speed_sum
            rows.append((k * ts, asked, seen, wanted))
        error = wanted - state[0]
        current_sum += inner.ki * ts * error
        state, voltage = step @ np.append(state, voltage), inner.kp * error + current_sum
    names = ("time", "speed_reference", "speed", "current_reference")
    return dict(zip(names, np.array(rows).T, strict=True))
