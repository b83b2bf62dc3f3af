"""Simulated logs of driven motors, many benches side by side: exact between friction's changes of sign.

Made apart from the library: matrix exponentials by scipy, one per bench and direction of friction, stepped eight times
per row of the log; a step in which the speed changes its sign is finished in the other direction with that direction's
acceleration, or ends at rest where friction holds.
"""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray
from scipy.linalg import expm

Array = NDArray[np.float64]

SUPPLY = 24.0
"""[V]."""
_FINE = 8


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Benches:
    """Motors with their loads, SI; every array has shape (n_benches,)."""

    resistance: Array
    inductance: Array
    constant: Array
    inertia: Array
    viscous: Array
    coulomb: Array
    offset: Array

    @property
    def count(self) -> int:
        """How many."""
        return self.resistance.size


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Motions:
    """What the benches do, without noise; arrays of shape (n_benches, n_rows) but for the time."""

    time: Array
    voltage: Array
    current: Array
    speed: Array
    angle: Array


def some_benches(count: int, rng: np.random.Generator) -> Benches:
    """Motors from small to large, time constants of 1 to 4 ms and 25 to 120 ms, friction some percent of the stall."""
    resistance = 10.0 ** rng.uniform(-0.5, 0.8, count)
    constant = 10.0 ** rng.uniform(-1.6, -0.5, count)
    stall, top = constant * SUPPLY / resistance, SUPPLY / constant
    coulomb = stall * rng.uniform(0.02, 0.06, count)
    return Benches(
        resistance=resistance,
        inductance=resistance * 10.0 ** rng.uniform(-3.0, -2.4, count),
        constant=constant,
        inertia=constant**2 / resistance * 10.0 ** rng.uniform(-1.6, -0.9, count),
        viscous=stall / top * rng.uniform(0.03, 0.1, count),
        coulomb=coulomb,
        offset=coulomb * rng.uniform(0.2, 0.5, count) * rng.choice([-1.0, 1.0], count),
    )


def stepped_voltage(
    count: int,
    rows: int,
    rate: float,
    *,
    rng: np.random.Generator,
    share: float = 0.8,
    held: tuple[float, float] = (0.04, 0.25),
) -> Array:
    """Voltages that step at random to random levels, each held for a while [s], shape (count, rows)."""
    found = np.empty((count, rows))
    for one in range(count):
        at = 0
        while at < rows:
            length = int(rng.uniform(*held) * rate)
            found[one, at : at + length] = share * SUPPLY * rng.uniform(-1.0, 1.0)
            at += length
    return found


def run(benches: Benches, voltage: Array, *, rate: float) -> Motions:
    """Run every bench under its voltage, held from row to row, from rest.

    Parameters
    ----------
    benches : Benches
        The motors.
    voltage : ndarray, shape (n_benches, n_rows)
        [V].
    rate : float
        Rows a second [Hz].
    """
    b = benches
    fine = 1.0 / (rate * _FINE)
    # States: current, speed, angle; inputs: voltage and the torque against the motion.
    flows = np.zeros((b.count, 5, 5))
    flows[:, 0, 0], flows[:, 0, 1] = -b.resistance / b.inductance, -b.constant / b.inductance
    flows[:, 0, 3] = 1.0 / b.inductance
    flows[:, 1, 0], flows[:, 1, 1], flows[:, 1, 4] = b.constant / b.inertia, -b.viscous / b.inertia, -1.0 / b.inertia
    flows[:, 2, 1] = 1.0
    moving = expm(flows * fine)[:, :3]
    flows[:, 1] = 0.0
    resting = expm(flows * fine)[:, :3]
    state = np.zeros((b.count, 3))
    rows = voltage.shape[1]
    out = np.empty((3, b.count, rows))
    for row in range(rows):
        out[:, :, row] = state.T
        for _ in range(_FINE):
            current, speed = state[:, 0], state[:, 1]
            push = b.constant * current - b.offset
            way = np.where(speed != 0.0, np.sign(speed), np.where(np.abs(push) > b.coulomb, np.sign(push), 0.0))
            inputs = np.stack((voltage[:, row], b.offset + way * b.coulomb), axis=1)
            whole = np.concatenate((state, inputs), axis=1)
            matrix = np.where((way != 0.0)[:, None, None], moving, resting)
            after = np.einsum("bij,bj->bi", matrix, whole)
            crossed = way * after[:, 1] < 0.0
            if crossed.any():
                push = b.constant * after[:, 0] - b.offset
                before, beyond = push - way * b.coulomb, push + way * b.coulomb
                turned = np.where(way * beyond < 0.0, after[:, 1] * beyond / np.where(before == 0.0, 1.0, before), 0.0)
                after[:, 1] = np.where(crossed, turned, after[:, 1])
            state = after
    return Motions(time=np.arange(rows) / rate, voltage=voltage, current=out[0], speed=out[1], angle=out[2])


def noisy(values: Array, decibel: float, rng: np.random.Generator) -> Array:
    """White noise added, this far below each row's root mean square [dB]."""
    size = np.sqrt(np.mean(values**2, axis=-1, keepdims=True)) * 10.0 ** (-decibel / 20.0)
    return np.asarray(values + size * rng.standard_normal(values.shape))


def counted(angle: Array, counts: int) -> Array:
    """An angle [rad] in whole counts of an encoder."""
    return np.asarray(np.floor(angle * counts / (2.0 * np.pi)) * (2.0 * np.pi / counts))
