"""The current of a winding under a measured voltage and speed, as a model whose output is the measured current."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.evidence.output_error import Outputs
from gainbench.evidence.shifting import delayed

Array = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class WindingModel:
    """``L di/dt = v(t - dead time) - R i - Ke w``; parameters: R, L, Ke where it turns, dead time in samples."""

    measured: Array
    """Current [A], shape (n,)."""
    voltage: Array
    """[V], shape (n,)."""
    speed: Array | None
    """[rad/s], shape (n,); None where the rotor is locked."""
    step: float
    """[s]."""
    pieces: NDArray[np.int64]
    size: Array
    """Of the parameters, shape (p,)."""

    def keep(self, values: Array) -> float:
        """As :class:`gainbench.evidence.output_error.Model`; values in each parameter's unit."""
        return float(np.exp(-values[0] * self.step / values[1]))

    def first_starts(self, bounds: NDArray[np.int64]) -> Array:
        """As :class:`gainbench.evidence.output_error.Model`."""
        return self.measured[bounds[:-1]][:, None]

    def run(self, values: Array, bounds: NDArray[np.int64], *, starts: Array, nudge: float) -> Outputs:
        """As :class:`gainbench.evidence.output_error.Model`; values in each parameter's unit, nudge a share."""
        from gainbench.kernels.identify_winding import BACK_EMF, COLUMNS, run_winding

        count = values.size if nudge else 0
        moved = np.tile(values, (count + 2, 1))
        for one in range(count):
            moved[1 + one, one] += nudge * self.size[one]
        sets = np.zeros((count + 2, COLUMNS))
        sets[:, :BACK_EMF] = moved[:, :BACK_EMF]
        speed = np.zeros(self.measured.size)
        if self.speed is not None:
            sets[:, BACK_EMF] = moved[:, BACK_EMF]
            speed = self.speed
        voltage = delayed(self.voltage, values[-1], self.pieces)[None]
        source = np.zeros(count + 2, dtype=np.int64)
        if count:
            voltage = np.vstack((voltage, delayed(self.voltage, moved[count, -1], self.pieces)))
            source[count] = 1
        begin = np.tile(starts[:, 0], (count + 2, 1))
        lift = 1e-6 * max(float(np.abs(self.measured).max()), 1e-12)
        begin[-1] += lift
        out = np.empty((count + 2, self.measured.size))
        run_winding(voltage, speed, self.step, sets, source, bounds, begin, out)
        return Outputs(
            output=out[0],
            sensitivities=(out[1 : 1 + count] - out[0]) / (nudge if nudge else 1.0),
            nuisance=((out[-1] - out[0]) / lift)[None],
        )
