"""The sampled loops of the reference model: open-loop frequency responses and closed-loop poles.

The law is walked tick by tick on *rows*: every signal is carried as its coefficients over the state at the start of
one period and the inputs, so that one period's matrix falls out of the law itself. Nothing is simplified, which is
slow and plain.
"""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from gainbench.model import IntegratorRule
from oracle_bench import Array, Bench, continuous

Complex = NDArray[np.complex128]
OpenLoop = Callable[[Array], Complex]


@dataclass(frozen=True, kw_only=True)
class PI:
    """Gains of one loop, without the period."""

    kp: float
    ki: float


@dataclass(frozen=True, kw_only=True)
class Period:
    """One period of a loop: ``x' = A x + B u``, ``y = C x + D u``."""

    A: Array
    B: Array
    C: Array
    D: float

    def response(self, omega: Array, T: float) -> Complex:
        """C (z - A)^-1 B + D at ``z = exp(j omega T)``, all frequencies."""
        z = np.exp(1j * np.atleast_1d(omega) * T)
        n = self.A.shape[0]
        left = z[:, None, None] * np.eye(n) - self.A
        right = np.broadcast_to(self.B.astype(complex)[:, None], (z.size, n, 1))
        return np.asarray(np.linalg.solve(left, right)[:, :, 0] @ self.C + self.D, dtype=np.complex128)

    def poles(self) -> Complex:
        return np.asarray(np.linalg.eigvals(self.A), dtype=np.complex128)


def controller(rule: IntegratorRule, omega: Array, T: float) -> Complex:
    """The integral part per unit of ``Ki``: the z-transform of each rule's sum."""
    z = np.exp(1j * np.atleast_1d(omega) * T)
    if rule is IntegratorRule.BACKWARD:
        return np.asarray(T * z / (z - 1.0))
    if rule is IntegratorRule.FORWARD:
        return np.asarray(T / (z - 1.0))
    return np.asarray(T / 2.0 * (z + 1.0) / (z - 1.0))


class Rows:
    """Signals as coefficient rows over a basis of named states and inputs."""

    def __init__(self, states: list[str], inputs: list[str]) -> None:
        self.states, self.inputs = states, inputs
        size = len(states) + len(inputs)
        self.row = {name: np.eye(size)[k] for k, name in enumerate(states + inputs)}
        self.zero = np.zeros(size)

    def close(self, output: Array) -> Period:
        n = len(self.states)
        rows = np.array([self.row[name] for name in self.states])
        feed = output[n] if self.inputs else 0.0
        return Period(A=rows[:, :n], B=rows[:, n] if self.inputs else np.zeros(n), C=output[:n].copy(), D=float(feed))

    def pi(self, loop: str, e: Array, p: Array, *, gains: PI, rule: IntegratorRule, T: float) -> Array:
        """One step of a PI on its states ``s_<loop>`` and ``e_<loop>``; returns its output."""
        s = self.row[f"s_{loop}"]
        if rule is IntegratorRule.BACKWARD:
            new = s + gains.ki * T * e
            out = p + new
        elif rule is IntegratorRule.FORWARD:
            out = p + s
            new = s + gains.ki * T * e
        else:
            new = s + gains.ki * T * (e + self.row[f"e_{loop}"]) / 2.0
            out = p + new
        self.row[f"s_{loop}"], self.row[f"e_{loop}"] = new, e
        return out


class PlantTick:
    """One current period of the linear plant with its voltage update delay, on rows."""

    def __init__(self, bench: Bench) -> None:
        self.plant = continuous(bench)
        self.whole = math.floor(bench.delay)
        part = bench.delay - self.whole
        self.kept = self.whole + (1 if part > 0.0 else 0)
        self.pieces = [(self.whole + 1, part), (self.whole, 1.0 - part)] if part > 0.0 else [(self.whole, 1.0)]
        self.steps = [(back, *self.plant.step(share * bench.Ts)) for back, share in self.pieces]

    @property
    def states(self) -> list[str]:
        return [*self.plant.names, *(f"u{k}" for k in range(1, self.kept + 1))]

    def run(self, rows: Rows, command: Array) -> None:
        """Apply this tick's command ``u0`` among the older ones ``u1``, ``u2``, ..., and let a period pass."""
        past = [command] + [rows.row[f"u{k}"] for k in range(1, self.kept + 1)]
        x = np.array([rows.row[name] for name in self.plant.names])
        for back, F, G in self.steps:
            x = F @ x + np.outer(G[:, 0], past[back])
        rows.row.update(zip(self.plant.names, x, strict=True))
        for k in range(1, self.kept + 1):
            rows.row[f"u{k}"] = past[k - 1]


def _sample(bench: Bench) -> str:
    return "f" if bench.Tf_current > 0.0 else "i"


def current_plant(bench: Bench) -> Period:
    """From the voltage command to the current sample, mechanics included; the free angle is left out."""
    tick = PlantTick(bench)
    states = [name for name in tick.states if name != "theta"]
    rows = Rows(states, ["v"])
    rows.row["theta"] = rows.zero
    output = rows.row[_sample(bench)]
    tick.run(rows, rows.row["v"])
    return rows.close(output)


def current_poles(bench: Bench, gains: PI, *, rule: IntegratorRule) -> Complex:
    """Closed current loop: reference zero, feedforward cut, mechanics free."""
    tick = PlantTick(bench)
    states = [name for name in tick.states if name != "theta"] + ["s_i"]
    states += ["e_i"] if rule is IntegratorRule.TRAPEZOID else []
    rows = Rows(states, [])
    rows.row["theta"] = rows.zero
    e = -rows.row[_sample(bench)]
    u = rows.pi("i", e, gains.kp * e, gains=gains, rule=rule, T=bench.Ts)
    tick.run(rows, u)
    return rows.close(rows.zero).poles()


def _speed_period(
    bench: Bench, current: PI, *, rule: IntegratorRule, feedforward: bool, speed: PI | None
) -> tuple[Rows, Array]:
    """Walk one speed period: open at the current reference where ``speed`` is None, else closed.

    The encoder's angle is kept as the increments ``a1`` (latest) to ``am`` of the last periods, so that the free
    angle never enters.
    """
    tick = PlantTick(bench)
    rule_state = ["e_i"] if rule is IntegratorRule.TRAPEZOID else []
    states = [name for name in tick.states if name != "theta"] + ["s_i", *rule_state]
    steps = [f"a{k}" for k in range(1, bench.window + 1)] if bench.counts else []
    states += steps
    states += ["w_hat"] if bench.speed_filter_gain < 1.0 else []
    states += ["ref"] if bench.speed_delay > 0 else []
    if speed is not None:
        states += ["s_w"] + (["e_w"] if rule is IntegratorRule.TRAPEZOID else [])
    rows = Rows(states, ["new"] if speed is None else [])

    if bench.counts:
        w_raw = sum((rows.row[name] for name in steps), rows.zero) / (bench.window * bench.Tw)
    else:
        w_raw = rows.row["w"]
    g = bench.speed_filter_gain
    w_hat = w_raw if g == 1.0 else rows.row["w_hat"] + g * (w_raw - rows.row["w_hat"])
    rows.row["w_hat"] = w_hat

    if speed is None:
        new = rows.row["new"]
    else:
        new = rows.pi("w", -w_hat, -speed.kp * w_hat, gains=speed, rule=rule, T=bench.Tw)

    rows.row["theta"] = rows.zero
    for k in range(bench.N):
        if k == bench.speed_delay:
            rows.row["ref"] = new
        e = rows.row["ref"] - rows.row[_sample(bench)]
        u = rows.pi("i", e, current.kp * e, gains=current, rule=rule, T=bench.Ts)
        if feedforward:
            u = u + bench.Ke * w_hat
        tick.run(rows, u)
    for k in range(bench.window, 1, -1):
        if bench.counts:
            rows.row[f"a{k}"] = rows.row[f"a{k - 1}"]
    if bench.counts:
        rows.row["a1"] = rows.row["theta"]
    return rows, w_hat


def speed_plant(bench: Bench, current: PI, *, rule: IntegratorRule, feedforward: bool) -> Period:
    """From the speed PI's output to ``w_hat``, both rates kept, over one speed period."""
    rows, w_hat = _speed_period(bench, current, rule=rule, feedforward=feedforward, speed=None)
    return rows.close(w_hat)


def speed_poles(bench: Bench, current: PI, speed: PI, *, rule: IntegratorRule, feedforward: bool) -> Complex:
    """Closed speed loop over one speed period."""
    rows, _ = _speed_period(bench, current, rule=rule, feedforward=feedforward, speed=speed)
    return rows.close(rows.zero).poles()


@dataclass(frozen=True, kw_only=True)
class Loop:
    """One sampled loop, still without gains."""

    plant: Period
    T: float
    rule: IntegratorRule

    @property
    def nyquist(self) -> float:
        return math.pi / self.T

    def open(self, gains: PI) -> OpenLoop:
        """L over rad/s with these gains."""

        def response(omega: Array) -> Complex:
            return np.asarray(
                (gains.kp + gains.ki * controller(self.rule, omega, self.T)) * self.plant.response(omega, self.T)
            )

        return response


def current_loop(bench: Bench, *, rule: IntegratorRule) -> Loop:
    return Loop(plant=current_plant(bench), T=bench.Ts, rule=rule)


def speed_loop(bench: Bench, current: PI, *, rule: IntegratorRule, feedforward: bool) -> Loop:
    return Loop(plant=speed_plant(bench, current, rule=rule, feedforward=feedforward), T=bench.Tw, rule=rule)


def is_stable(poles: Complex) -> bool:
    return bool(np.max(np.abs(poles)) < 1.0 + 1e-9)
