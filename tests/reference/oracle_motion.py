"""The reference model's plant in motion, with Coulomb friction and a load whose share depends on the direction.

A body rests or moves one way. Between two events the equations are linear with constant inputs, so every stretch is
one matrix exponential; an event (a body comes to rest, or breaks away) is located by a bracketing root finder.
"""

from __future__ import annotations

from dataclasses import dataclass, field

import numpy as np
from numpy.polynomial import Polynomial
from scipy.linalg import expm
from scipy.optimize import brentq

from oracle_bench import Array, Bench, continuous

STRETCHES = 4
"""Stretches per held voltage between which events are looked for."""


@dataclass
class Motion:
    """The moving plant; ``x`` follows the names of :func:`oracle_bench.continuous`."""

    bench: Bench
    x: Array
    load: float
    """Load torque in force [N m], at the load shaft."""
    ways: list[int]
    """Direction of each body; 0 rests."""
    returned: float = 0.0
    """Energy given back to the stage [J]."""
    _flows: dict[tuple[tuple[bool, ...], float], tuple[Array, Array]] = field(default_factory=dict)

    def __post_init__(self) -> None:
        self.names = continuous(self.bench).names
        self.at = {name: k for k, name in enumerate(self.names)}
        self.speeds = [self.at["w"]] + ([self.at["wl"]] if len(self.bench.bodies) == 2 else [])

    def value(self, name: str) -> float:
        return float(self.x[self.at[name]])

    def run(self, voltage: float, h: float) -> None:
        """Let ``h`` seconds pass under a held voltage."""
        if h <= 0.0:
            return
        self._settle_modes()
        for _ in range(STRETCHES):
            self._stretch(voltage, h / STRETCHES)

    def _drag(self, body: int, way: int) -> float:
        """Braking torque on a body that moves that way: its friction and the load it carries."""
        one = self.bench.bodies[body]
        return one.coulomb * way + (self.bench.load_at_shaft(self.load, way) if one.carries_load else 0.0)

    def _free(self, body: int) -> bool:
        return self._drag(body, 1) == self._drag(body, -1)

    def _push(self, body: int, x: Array) -> float:
        """Torque on a body that rests, its own friction and load apart."""
        bench, at = self.bench, self.at
        shaft = 0.0
        if len(bench.bodies) == 2:
            shaft = bench.stiffness * x[at["twist"]] + bench.damping * (x[at["w"]] - x[at["wl"]])
        return float(bench.Kt * x[at["i"]] - shaft if body == 0 else shaft)

    def _start_way(self, body: int, x: Array) -> int:
        """The way a resting body starts; 0 stays."""
        if self._push(body, x) - self._drag(body, 1) > 0.0:
            return 1
        return -1 if self._push(body, x) - self._drag(body, -1) < 0.0 else 0

    def _settle_modes(self) -> None:
        """Which bodies rest may change in a jump of the load."""
        for body in range(len(self.ways)):
            if self._free(body):
                self.ways[body] = 1
            elif self.x[self.speeds[body]] == 0.0:
                self.ways[body] = self._start_way(body, self.x)
            elif self.ways[body] * self.x[self.speeds[body]] <= 0.0:
                self.ways[body] = 1 if self.x[self.speeds[body]] > 0.0 else -1

    def _flow(self, h: float, *, keep: bool) -> tuple[Array, Array]:
        held = tuple(way == 0 for way in self.ways)
        if (held, h) in self._flows:
            return self._flows[held, h]
        plant = continuous(self.bench, held=held)
        n, m = plant.B.shape
        block = np.zeros((n + m, n + m))
        block[:n, :n], block[:n, n:] = plant.A, plant.B
        whole = expm(block * h)
        flow = whole[:n, :n], whole[:n, n:]
        if keep:
            self._flows[held, h] = flow
        return flow

    def _after(self, u: Array, h: float, *, keep: bool = False) -> Array:
        F, G = self._flow(h, keep=keep)
        return np.asarray(F @ self.x + G @ u)

    def _inputs(self, voltage: float) -> Array:
        motor = self._drag(0, self.ways[0]) if self.ways[0] else 0.0
        load = self._drag(1, self.ways[1]) if len(self.ways) == 2 and self.ways[1] else 0.0
        return np.array([voltage, motor, load])

    def _stretch(self, voltage: float, h: float) -> None:
        left, first = h, True
        for _ in range(50):
            if left <= 0.0:
                return
            u = self._inputs(voltage)
            x = self._after(u, left, keep=first)
            events = [(t, body) for body in range(len(self.ways)) if (t := self._event(body, u, x, left)) is not None]
            if not events:
                self._energy(voltage, x, left)
                self.x = x
                return
            when, body = min(events)
            x = self._after(u, when) if when > 0.0 else self.x.copy()
            self._energy(voltage, x, when)
            self.x = x
            self.x[self.speeds[body]] = 0.0
            if self.ways[body] == 0:
                self.ways[body] = 1 if self._push(body, x) > 0.5 * (self._drag(body, 1) + self._drag(body, -1)) else -1
            else:
                self.ways[body] = self._start_way(body, self.x)
            left -= when
            first = False
        raise RuntimeError("too many changes of motion in one stretch")

    def _event(self, body: int, u: Array, x: Array, h: float) -> float | None:
        """When the body comes to rest or breaks away within the stretch; None where it does not."""
        way, k = self.ways[body], self.speeds[body]
        if self._free(body):
            return None
        if way != 0:
            if way * x[k] >= 0.0:
                return None
            begin = 0.0
            if way * self.x[k] <= 0.0:
                begin = next((t for t in np.geomspace(h * 1e-6, h, 25) if way * self._after(u, t)[k] > 0.0), 0.0)
                if begin == 0.0:
                    return 0.0
            return float(brentq(lambda t: way * self._after(u, t)[k], begin, h, xtol=1e-15, rtol=1e-12))
        started = self._start_way(body, x)
        if started == 0:
            return None

        def beyond(t: float) -> float:
            state = self._after(u, t) if t > 0.0 else self.x
            return started * (self._push(body, state) - self._drag(body, started))

        if beyond(0.0) >= 0.0:
            return 0.0
        return float(brentq(beyond, 0.0, h, xtol=1e-15, rtol=1e-12))

    def _energy(self, voltage: float, x: Array, h: float) -> None:
        """Integral of -v i where it is given back, over a stretch that ends in ``x``.

        The current between the ends is the cubic through both ends with the slopes that the equation gives there.
        """
        bench, i, w = self.bench, self.at["i"], self.at["w"]
        i0, i1 = float(self.x[i]), float(x[i])
        if h <= 0.0 or voltage == 0.0 or (voltage * i0 >= 0.0 and voltage * i1 >= 0.0):
            return
        d0, d1 = ((voltage - bench.R * state[i] - bench.Ke * state[w]) / bench.L * h for state in (self.x, x))
        curve = Polynomial([i0, d0, 3.0 * (i1 - i0) - 2.0 * d0 - d1, 2.0 * (i0 - i1) + d0 + d1])
        low, high = 0.0, 1.0
        if i0 * i1 < 0.0:
            zero = float(brentq(curve, 0.0, 1.0))
            low, high = (0.0, zero) if voltage * i0 < 0.0 else (zero, 1.0)
        charge = curve.integ()
        self.returned -= bench.power_factor * voltage * float(charge(high) - charge(low)) * h
