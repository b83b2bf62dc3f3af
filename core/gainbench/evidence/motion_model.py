"""The motion of the shaft under a measured drive, as a model whose output is the measured angle or speed."""

from __future__ import annotations

from dataclasses import dataclass
from enum import Enum

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.output_error import Outputs
from gainbench.evidence.shifting import delayed

Array = NDArray[np.float64]


class Shape(Enum):
    """Which parameters the friction has; rows of the kernel's sets over the parameters after the inertia."""

    EVEN = (3, ((1, 0, 0), (0, 1, 1), (1, 0, 0), (0, 1, -1)))
    """viscous, Coulomb, offset."""
    BY_WAY = (4, ((1, 0, 0, 0), (0, 1, 0, 0), (0, 0, 1, 0), (0, 0, 0, 1)))
    """viscous and drag forwards, viscous and drag backwards."""
    ONE_WAY = (2, ((1, 0), (0, 1), (1, 0), (0, 1)))
    """viscous and drag, of the one direction that there was."""

    @property
    def count(self) -> int:
        """Parameters of the friction."""
        return int(self.value[0])

    @property
    def rows(self) -> Array:
        """From them to forward viscous, forward drag, backward viscous, backward drag, shape (4, count)."""
        return np.array(self.value[1], dtype=np.float64)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class MotionModel:
    """``J dw/dt = drive(t - dead time) - friction``; parameters: inertia, those of the shape, dead time in samples.

    Where ``drive`` is None the shaft coasts: inertia and dead time are no parameters, and friction is per inertia.
    """

    recorded: Array
    """Angle [rad] or speed [rad/s], shape (n,)."""
    is_angle: bool
    """An angle is compared by what it grows from sample to sample: by the mean speed between them."""
    speed: Array
    """Smoothed [rad/s], where segments start; shape (n,)."""
    drive: Array | None
    """Torque [N m], or what is proportional to it, shape (n,)."""
    step: float
    """[s]."""
    pieces: NDArray[np.int64]
    shape: Shape
    size: Array
    """Of the parameters, shape (p,)."""
    follow: tuple[float, float] = (0.0, 0.0)
    """Shares of what was measured beside the output by which speed and angle are moved after every sample: a predictor
    from sample to sample. Zero twice lets the motion run freely."""

    @property
    def follows(self) -> bool:
        """Whether it is a predictor from sample to sample."""
        return self.follow != (0.0, 0.0)

    def keep(self, values: Array) -> float:
        """As :class:`gainbench.evidence.output_error.Model`; values in each parameter's unit."""
        return 0.0 if self.follows else self.state_keep(values)

    def state_keep(self, values: Array) -> float:
        """Share of the speed that is left after one sample, with these parameters [each its own unit]."""
        inertia = 1.0 if self.drive is None else float(values[0])
        friction = values if self.drive is None else values[1:]
        viscous = float(np.mean((self.shape.rows @ friction[: self.shape.count])[[0, 2]]))
        return float(np.exp(-viscous * self.step / inertia))

    def first_starts(self, bounds: NDArray[np.int64]) -> Array:
        """As :class:`gainbench.evidence.output_error.Model`: speed, and angle where it is measured."""
        return self.speed[bounds[:-1]][:, None]

    @property
    def measured(self) -> Array:
        """As :class:`gainbench.evidence.output_error.Model`: speed, or mean speed since the sample before.

        A predictor is compared by the angle itself.
        """
        return self._grown(self.recorded, self.pieces) if self.is_angle and not self.follows else self.recorded

    def _grown(self, values: Array, bounds: NDArray[np.int64]) -> Array:
        """Mean speed since the sample before; the first sample of a segment has none and counts as 0."""
        grown = np.diff(values, prepend=0.0) / self.step
        grown[..., bounds[:-1]] = 0.0
        return grown

    def run(self, values: Array, bounds: NDArray[np.int64], *, starts: Array, nudge: float) -> Outputs:
        """As :class:`gainbench.evidence.output_error.Model`; values in each parameter's unit, nudge a share."""
        from gainbench.kernels.identify_motion import COLUMNS, INERTIA, run_motion

        coasting = self.drive is None
        count = values.size if nudge else 0
        sets = np.empty((count + 2, COLUMNS))
        source = np.zeros(count + 2, dtype=np.int64)
        ends = self.pieces
        torque = np.zeros((1, self.recorded.size))
        if self.drive is not None:
            torque = delayed(self.drive, values[-1], ends)[None]
        moved = np.tile(values, (count + 2, 1))
        for one in range(count):
            moved[1 + one, one] += nudge * self.size[one]
        if count and self.drive is not None:
            torque = np.vstack((torque, delayed(self.drive, moved[count, -1], ends)))
            source[count] = 1
        friction = moved if coasting else moved[:, 1 : 1 + self.shape.count]
        sets[:, INERTIA] = 1.0 if coasting else moved[:, 0]
        sets[:, 1:] = friction @ self.shape.rows.T
        begin = np.zeros((count + 2, bounds.size - 1, 2))
        begin[:, :, 0] = starts[:, 0]
        if self.is_angle and self.follows:
            begin[:, :, 1] = self.recorded[bounds[:-1]]
        lift = 1e-6 * max(float(np.abs(self.speed).max()), 1e-12)
        begin[-1, :, 0] += lift
        out = np.empty((count + 2, self.recorded.size))
        follow = np.array(self.follow)
        run_motion(torque, self.step, sets, source, bounds, begin, self.is_angle, self.recorded, follow, out)
        if self.is_angle and not self.follows:
            out = self._grown(out, bounds)
            # What the log has at the first sample of a segment is put out as it is, so that it weighs nothing.
            out[:, bounds[:-1]] = self.measured[bounds[:-1]]
        nuisance = ((out[-1] - out[0]) / lift)[None]
        sensitivities = (out[1 : 1 + count] - out[0]) / (nudge if nudge else 1.0)
        return Outputs(output=out[0], sensitivities=sensitivities, nuisance=nuisance)
