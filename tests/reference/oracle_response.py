"""The reference model's time response: the sampled law tick by tick in plain Python, and the duty's figures."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass

import numpy as np

from gainbench.model import Duty, Firmware, IntegratorRule, WindupRule
from oracle_bench import Array, Bench
from oracle_loops import PI
from oracle_motion import Motion


@dataclass(frozen=True, kw_only=True)
class History:
    """All signals at the ticks."""

    time: Array
    reference: Array
    speed: Array
    load_speed: Array
    current: Array
    current_reference: Array
    voltage: Array
    current_clamps: int
    voltage_clamps: int
    returned: float


@dataclass(frozen=True, kw_only=True)
class Outcome:
    """The duty's figures; None where there is none."""

    overshoot_percent: float | None
    rise_time_s: float | None
    settling_time_s: float | None
    load_dip_rad_s: float | None
    recovery_time_s: float | None
    peak_current_a: float
    rms_current_a: float
    peak_voltage_v: float
    current_limited_s: float
    voltage_limited_s: float
    returned_energy_j: float


class Controller:
    """One PI with its clamp."""

    def __init__(self, gains: PI, *, T: float, beta: float, firmware: Firmware, integral: float) -> None:
        self.gains, self.T, self.beta, self.firmware = gains, T, beta, firmware
        self.s, self.e_old = integral, 0.0

    def step(self, r: float, y: float, *, limit: float, extra: float = 0.0) -> tuple[float, bool]:
        """Output after the clamp, and whether the clamp acted."""
        e = r - y
        kp, ki, T = self.gains.kp, self.gains.ki, self.T
        p = kp * (self.beta * r - y)
        s = self.s
        match self.firmware.integrator:
            case IntegratorRule.BACKWARD:
                new = s + ki * T * e
                u = p + new
            case IntegratorRule.FORWARD:
                u = p + s
                new = s + ki * T * e
            case _:
                new = s + ki * T * (e + self.e_old) / 2.0
                u = p + new
        u += extra
        out = max(-limit, min(limit, u))
        acts = out != u
        if self.firmware.windup is WindupRule.HOLD:
            if acts and e * u > 0.0:
                new = s
        elif acts:
            new += min(1.0, T * ki / kp) * (out - u)
        self.s, self.e_old = new, e
        return out, acts


def first_tick(t: float, Ts: float) -> int:
    """The first tick with ``t_k >= t - 1e-6 Ts``."""
    return max(0, math.ceil(t / Ts - 1e-6))


def reference_at(duty: Duty, t: float, Ts: float) -> float:
    """The scripted reference as read at a tick at ``t``."""
    near = 1e-6 * Ts

    def rising(time: float) -> float:
        if time < duty.reference_at - near:
            return 0.0
        full = abs(duty.reference_speed)
        if duty.reference_ramp == 0.0:
            return full
        return min(full, max(0.0, duty.reference_ramp * (time - duty.reference_at)))

    sign = math.copysign(1.0, duty.reference_speed)
    if duty.stop_at is None or t < duty.stop_at - near:
        return sign * rising(t)
    if duty.stop_ramp == 0.0:
        return 0.0
    return sign * max(0.0, rising(duty.stop_at) - duty.stop_ramp * max(0.0, t - duty.stop_at))


def respond(
    bench: Bench,
    current: PI,
    speed: PI,
    *,
    firmware: Firmware,
    duty: Duty,
    load_torque: float,
    weight: float,
    injected: Callable[[int], float] | None = None,
    moving: type[Motion] = Motion,
) -> History:
    """Walk the duty; ``injected`` adds to the speed PI's output at speed tick n, behind its clamp.

    ``moving`` is what carries the plant from one change of voltage to the next.
    """
    ticks = round(duty.length / bench.Ts)
    at_rest = bench.load_at_shaft(load_torque, 0)
    i0 = at_rest / bench.Kt
    motion = moving(bench=bench, x=np.zeros(0), load=load_torque, ways=[0] * len(bench.bodies))
    x = np.zeros(len(motion.names))
    x[motion.at["i"]] = i0
    if "f" in motion.at:
        x[motion.at["f"]] = i0
    if "twist" in motion.at:
        x[motion.at["twist"]] = at_rest / bench.stiffness
    motion.x = x
    sample = "f" if "f" in motion.at else "i"

    inner = Controller(current, T=bench.Ts, beta=1.0, firmware=firmware, integral=bench.R * i0)
    outer = Controller(speed, T=bench.Tw, beta=weight, firmware=firmware, integral=i0)
    feed = bench.Ke if firmware.back_emf_feedforward else 0.0
    whole = math.floor(bench.delay)
    part = bench.delay - whole
    past = [bench.R * i0] * 4
    read = [0.0] * (bench.window + 1)
    w_hat = r = 0.0
    i_ref = pending = i0
    kept = {name: np.zeros(ticks) for name in ("time", "r", "w", "wl", "i", "ref", "v")}
    current_clamps = voltage_clamps = 0
    for k in range(ticks):
        t = k * bench.Ts
        w = motion.value("w")
        if k % bench.N == 0:
            r = reference_at(duty, t, bench.Ts)
            if bench.counts:
                count = math.floor(motion.value("theta") * bench.counts / math.tau + 0.5)
                read = [count * math.tau / bench.counts, *read[:-1]] if k else read
                w_raw = (read[0] - read[-1]) / (bench.window * bench.Tw)
            else:
                w_raw = w
            w_hat += bench.speed_filter_gain * (w_raw - w_hat)
            pending, acts = outer.step(r, w_hat, limit=bench.current_limit)
            pending += injected(k // bench.N) if injected else 0.0
            current_clamps += acts
        if k % bench.N == bench.speed_delay:
            i_ref = pending
        y = motion.value(sample)
        limit = bench.voltage_limit
        if bench.pole_pairs:
            limit = math.sqrt(max(0.0, limit**2 - (bench.pole_pairs * w_hat * bench.L * y) ** 2))
        v, acts = inner.step(i_ref, y, limit=limit, extra=feed * w_hat)
        voltage_clamps += acts
        wl = motion.value("wl") if "wl" in motion.at else w
        for name, value in zip(kept, (t, r, w, wl, motion.value("i"), i_ref, v), strict=True):
            kept[name][k] = value

        past = [v, *past[:3]]
        if duty.load_step != 0.0 and k >= first_tick(duty.load_time, bench.Ts):
            motion.load = load_torque + duty.load_step
        motion.run(past[whole + 1], part * bench.Ts)
        motion.run(past[whole], (1.0 - part) * bench.Ts)
    return History(
        time=kept["time"],
        reference=kept["r"],
        speed=kept["w"],
        load_speed=kept["wl"],
        current=kept["i"],
        current_reference=kept["ref"],
        voltage=kept["v"],
        current_clamps=current_clamps,
        voltage_clamps=voltage_clamps,
        returned=motion.returned,
    )


def outcome(history: History, bench: Bench, duty: Duty) -> Outcome:
    """The figures of a response."""
    Ts, ticks = bench.Ts, len(history.time)
    size, sign = abs(duty.reference_speed), math.copysign(1.0, duty.reference_speed)
    has_reference, has_load = duty.reference_speed != 0.0, duty.load_step != 0.0
    stop = ticks if duty.stop_at is None else min(ticks, first_tick(duty.stop_at, Ts))
    begin, load = first_tick(duty.reference_at, Ts), first_tick(duty.load_time, Ts)
    backwards = has_reference and has_load and duty.load_time <= duty.reference_at

    overshoot = rise = settling = dip = recovery = None
    end = min(stop, load) if has_load else stop
    if has_reference and not backwards and begin < end:
        y = sign * history.speed[begin:end]
        overshoot = max(0.0, 100.0 * (float(np.max(y)) - size) / size)
        if np.any(y >= 0.9 * size) and np.any(y >= 0.1 * size):
            rise = float(np.argmax(y >= 0.9 * size) - np.argmax(y >= 0.1 * size)) * Ts
        settling = _last_outside(np.abs(y - size), 0.02 * size, Ts)
    if has_load and not backwards and load < stop:
        off = np.abs(history.speed[load:stop] - history.reference[load:stop])
        dip = float(np.max(off))
        recovery = _last_outside(off, 0.02 * size, Ts) if has_reference else None
    return Outcome(
        overshoot_percent=overshoot,
        rise_time_s=rise,
        settling_time_s=settling,
        load_dip_rad_s=dip,
        recovery_time_s=recovery,
        peak_current_a=float(np.max(np.abs(history.current))),
        rms_current_a=float(np.sqrt(np.mean(history.current**2))),
        peak_voltage_v=float(np.max(np.abs(history.voltage))),
        current_limited_s=history.current_clamps * bench.Tw,
        voltage_limited_s=history.voltage_clamps * bench.Ts,
        returned_energy_j=history.returned,
    )


def _last_outside(off: Array, band: float, Ts: float) -> float | None:
    """The last tick outside, from the window's first; 0 if none, None if it is the window's last."""
    outside = np.flatnonzero(off > band)
    if not len(outside):
        return 0.0
    return None if outside[-1] == len(off) - 1 else float(outside[-1]) * Ts
