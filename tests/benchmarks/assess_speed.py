"""One assessment against the same work as a careful user would script it with python-control and plain floats.

Both take the label unwinder with a duty of 10,000 ticks: gains of both loops by crossover and margin, margins of both
on 400 frequencies, the time response with encoder counts, clamps and friction. The two run by turns in one process, and
the ratio of their best times is claimed, not the times: the best of many is what a shared machine disturbs least.

    python tests/benchmarks/assess_speed.py [--json]
"""

from __future__ import annotations

import argparse
import cmath
import json
import math
import time
from dataclasses import dataclass, replace

import control
import numpy as np

from gainbench.assess import assess, warm_up
from gainbench.model import Duty, Sheet
from gainbench.plant import Plant, refer
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet

TICKS = 10_000
POINTS = 400
TURNS = 7
ASSESSMENTS_PER_TURN = 30


@dataclass(frozen=True, slots=True, kw_only=True)
class Margins:
    """Figures of one loop, read off 400 frequencies by straight lines."""

    stable: bool
    crossover: float
    """[rad/s]."""
    phase_margin: float
    """[deg]."""
    delay_margin: float
    """[s]."""
    gain_margin: float
    """[dB]."""
    peak_sensitivity: float
    bandwidth: float
    """[rad/s]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """The current step with the rotor locked."""

    rise: float
    """[s]."""
    overshoot: float
    """[%]."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Run:
    """Traces and figures of the duty."""

    traces: tuple[list[float], ...]
    overshoot: float
    """[%]."""
    rise: float
    """[s]."""
    settling: float
    """[s]."""
    dip: float
    """[rad/s]."""
    recovery: float
    """[s]."""
    peak_current: float
    rms_current: float
    peak_voltage: float
    current_limited: float
    voltage_limited: float
    returned_energy: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Scripted:
    """What the script found."""

    current: tuple[float, float]
    speed: tuple[float, float]
    current_margins: Margins
    speed_margins: Margins
    step: Step
    run: Run


def pi_gains(response: complex, w: float, period: float, margin: float) -> tuple[float, float]:
    """Kp and Ki of a backward PI that put L on exp(j (margin - pi)) at w."""
    wanted = cmath.exp(1j * (margin - math.pi)) / response
    z = cmath.exp(1j * w * period)
    shape = period * z / (z - 1.0)
    ki = wanted.imag / shape.imag
    return wanted.real - ki * shape.real, ki


def falls(w: np.ndarray, value: np.ndarray) -> list[float]:
    """Where a real curve changes its sign, by straight lines."""
    return [
        float(w[k] + (w[k + 1] - w[k]) * value[k] / (value[k] - value[k + 1]))
        for k in np.flatnonzero(np.sign(value[:-1]) != np.sign(value[1:]))
    ]


def margins(w: np.ndarray, loop: np.ndarray, poles: np.ndarray) -> Margins:
    """All figures of a loop."""
    phase = np.unwrap(np.angle(-loop))
    crossings = falls(w, np.log(np.abs(loop)))
    above = [float(np.interp(one, w, phase)) for one in crossings]
    turns = [one for one in falls(w, loop.imag) if np.interp(one, w, loop.real) < 0.0]
    factors = [-1.0 / float(np.interp(one, w, loop.real)) for one in turns] + [-1.0 / float(loop[-1].real)]
    closed = np.abs(loop / (1.0 + loop))
    return Margins(
        stable=bool(np.all(np.abs(poles) < 1.0 + 1e-9)),
        crossover=crossings[0],
        phase_margin=min(abs(math.degrees(one)) for one in above),
        delay_margin=min((one % math.tau) / at for one, at in zip(above, crossings, strict=True)),
        gain_margin=20.0 * math.log10(min(one for one in factors if one > 1.0)),
        peak_sensitivity=float(np.max(1.0 / np.abs(1.0 + loop))),
        bandwidth=falls(w, closed - math.sqrt(0.5))[0],
    )


def locked(plant: Plant, *, kp: float, ki: float, ts: float) -> Step:
    """The current step with the rotor locked, its levels met between ticks, until it has settled."""
    keep = math.exp(-plant.resistance / plant.inductance * ts)
    tau = plant.inductance / plant.resistance
    i = s = voltage = top = 0.0
    levels = {0.1: 0.0, 0.9: 0.0}
    quiet = k = 0
    while quiet < 8:
        error = 1.0 - i
        s += ki * ts * error
        applied, voltage = voltage, kp * error + s
        rest = applied / plant.resistance
        after = rest + (i - rest) * keep
        for level, met in levels.items():
            if met == 0.0 and after >= level:
                levels[level] = k * ts - tau * math.log1p((level - i) / (i - rest))
        quiet = quiet + 1 if abs(after - i) < 1e-10 else 0
        i = after
        top = max(top, i)
        k += 1
    return Step(rise=levels[0.9] - levels[0.1], overshoot=100.0 * max(top - 1.0, 0.0))


def clamp(value: float, limit: float) -> float:
    """Between minus and plus the limit."""
    return min(max(value, -limit), limit)


def pi_step(kp: float, ki_period: float, integral: float, error: float, limit: float) -> tuple[float, float, bool]:
    """One step of a backward PI that holds its integral at the clamp: output, integral, whether the clamp acted."""
    grown = integral + ki_period * error
    wanted = kp * error + grown
    output = clamp(wanted, limit)
    clamped = output != wanted
    if clamped and error * wanted > 0.0:
        grown = integral
    return output, grown, clamped


def reference_at(duty: Duty, t: float) -> float:
    """The speed reference of a duty with a step or a ramp and no stop [rad/s]."""
    if t < duty.reference_at:
        return 0.0
    if duty.reference_ramp == 0.0:
        return duty.reference_speed
    return math.copysign(
        min(abs(duty.reference_speed), duty.reference_ramp * (t - duty.reference_at)), duty.reference_speed
    )


def friction(plant: Plant, speed: float, pull: float) -> float | None:
    """Coulomb friction against the motion or the motion to come; None where the shaft sticks [N m]."""
    if speed != 0.0:
        return math.copysign(plant.coulomb, speed)
    return None if abs(pull) <= plant.coulomb else math.copysign(plant.coulomb, pull)


def respond(
    sheet: Sheet,
    plant: Plant,
    ad: np.ndarray,
    bd: np.ndarray,
    *,
    current: tuple[float, float],
    speed: tuple[float, float],
) -> Run:
    """The duty in plain floats: two rates, encoder counts, clamps with hold, friction that sticks."""
    stage, duty = sheet.rig.stage, sheet.duty
    ts, n = stage.current_period, stage.speed_divisor
    tw = n * ts
    (a11, a12, *_), (a21, a22, *_), (a31, a32, *_), (a41, a42, *_) = ad.tolist()
    (b1, d1), (b2, d2), (b3, d3), (b4, d4) = bd.tolist()
    keep = math.exp(-plant.resistance / plant.inductance * ts)
    push = (1.0 - keep) / plant.resistance
    count = math.tau / stage.encoder_counts
    k_ref, k_load = round(duty.reference_at / ts), round(duty.load_time / ts)
    (kp, ki), (kp_w, ki_w) = current, speed
    i = w = theta = s = s_w = wanted = voltage = energy = 0.0
    seen_before = 0
    clamped_i = False
    times, references, speeds, currents, currents_wanted, voltages, flags_i, flags_v = ([] for _ in range(8))
    for k in range(TICKS):
        t = k * ts
        if k % n == 0:
            reference = reference_at(duty, t + 1e-6 * ts)
            seen = math.floor(theta / count + 0.5)
            measured = (seen - seen_before) * count / tw
            seen_before = seen
            wanted, s_w, clamped_i = pi_step(kp_w, ki_w * tw, s_w, reference - measured, plant.current_limit)
        applied = voltage
        voltage, s, clamped_v = pi_step(kp, ki * ts, s, wanted - i, plant.voltage_limit)
        times.append(t)
        references.append(reference)
        speeds.append(w)
        currents.append(i)
        currents_wanted.append(wanted)
        voltages.append(voltage)
        flags_i.append(clamped_i)
        flags_v.append(clamped_v)
        load = duty.load_step / sheet.rig.train.ratio if k >= k_load else 0.0
        before = i
        drag = friction(plant, w, plant.torque * i - load)
        if drag is None:
            i = keep * i + push * applied
            charge = 0.5 * (before + i) * ts
        else:
            drag += load
            turning = w
            charge = a41 * i + a42 * w + b4 * applied + d4 * drag
            i, w, theta = (
                a11 * i + a12 * w + b1 * applied + d1 * drag,
                a21 * i + a22 * w + b2 * applied + d2 * drag,
                theta + a31 * i + a32 * w + b3 * applied + d3 * drag,
            )
            if turning * w < 0.0:
                w = 0.0
        if before * i >= 0.0:
            energy += max(-applied * charge, 0.0)
        else:
            # The current turns: what flows before and after, by a straight line.
            first = 0.5 * before * before / (before - i) * ts
            energy += max(-applied * first, 0.0) + max(-applied * (charge - first), 0.0)
    size = abs(duty.reference_speed)
    stepped, loaded = np.array(speeds[k_ref:k_load]), np.array(speeds[k_load:])
    off = np.flatnonzero(np.abs(stepped - duty.reference_speed) > 0.02 * size)
    off_load = np.flatnonzero(np.abs(loaded - duty.reference_speed) > 0.02 * size)
    return Run(
        traces=(times, references, speeds, currents, currents_wanted, voltages, flags_i, flags_v),
        overshoot=100.0 * max(float(stepped.max()) / size - 1.0, 0.0),
        rise=float(np.argmax(stepped >= 0.9 * size) - np.argmax(stepped >= 0.1 * size)) * ts,
        settling=float(off[-1]) * ts if off.size else 0.0,
        dip=float(np.max(np.abs(loaded - duty.reference_speed))),
        recovery=float(off_load[-1]) * ts if off_load.size else 0.0,
        peak_current=max(map(abs, currents)),
        rms_current=math.sqrt(sum(one * one for one in currents) / TICKS),
        peak_voltage=max(map(abs, voltages)),
        current_limited=sum(flags_i[::n]) * tw,
        voltage_limited=sum(flags_v) * ts,
        returned_energy=energy,
    )


def scripted(sheet: Sheet, plant: Plant) -> Scripted:
    """The careful user's script."""
    stage, aims = sheet.rig.stage, sheet.aims
    ts, n = stage.current_period, stage.speed_divisor
    tw = n * ts
    # The winding and the shaft, sampled; one period from sample to voltage.
    a = np.array(
        [
            [-plant.resistance / plant.inductance, -plant.back_emf / plant.inductance, 0.0],
            [plant.torque / plant.inertia, -plant.viscous / plant.inertia, 0.0],
            [0.0, 1.0, 0.0],
            [1.0, 0.0, 0.0],
        ]
    )
    a = np.hstack((a, np.zeros((4, 1))))
    b = np.array([[1.0 / plant.inductance, 0.0], [0.0, -1.0 / plant.inertia], [0.0, 0.0], [0.0, 0.0]])
    sampled = control.sample_system(control.ss(a, b, np.eye(4), np.zeros((4, 2))), ts, method="zoh")
    ad, bd = np.asarray(sampled.A), np.asarray(sampled.B)
    held = np.zeros((3, 3))
    held[:2, :2], held[:2, 2] = ad[:2, :2], bd[:2, 0]
    current_plant = control.ss(held, np.array([[0.0], [0.0], [1.0]]), np.array([[1.0, 0.0, 0.0]]), 0.0, ts)
    w = np.geomspace(1e-4, 1.0, POINTS) * math.pi / ts
    response = np.asarray(control.frequency_response(current_plant, w).complex)
    there = complex(current_plant(cmath.exp(1j * aims.current.crossover * ts)))
    kp, ki = pi_gains(there, aims.current.crossover, ts, aims.current.phase_margin)
    z = np.exp(1j * w * ts)
    loop = response * (kp + ki * ts * z / (z - 1.0))

    # The closed current loop over one speed period, then the encoder's difference of one period.
    fast = np.zeros((6, 6))  # i, w, theta, voltage under way, integrator, reference
    fast[:3, :3], fast[:3, 3] = ad[:3, :3], bd[:3, 0]
    fast[3, 0], fast[3, 4], fast[3, 5] = -(kp + ki * ts), 1.0, kp + ki * ts
    fast[4, 0], fast[4, 4], fast[4, 5] = -ki * ts, 1.0, ki * ts
    fast[5, 5] = 1.0
    poles = np.linalg.eigvals(np.delete(np.delete(fast[:5, :5], 2, axis=0), 2, axis=1))
    current_margins = margins(w, loop, poles)
    slow = np.linalg.matrix_power(fast, n)
    a_slow = np.zeros((6, 6))
    a_slow[:5, :5] = slow[:5, :5]
    a_slow[5, 2] = 1.0
    b_slow = np.append(slow[:5, 5], 0.0)[:, None]
    seen = np.array([[0.0, 0.0, 1.0, 0.0, 0.0, -1.0]]) / tw
    speed_plant = control.ss(a_slow, b_slow, seen, 0.0, tw)
    w = np.geomspace(1e-4, 1.0, POINTS) * math.pi / tw
    response = np.asarray(control.frequency_response(speed_plant, w).complex)
    there = complex(speed_plant(cmath.exp(1j * aims.speed.crossover * tw)))
    kp_w, ki_w = pi_gains(there, aims.speed.crossover, tw, aims.speed.phase_margin)
    z = np.exp(1j * w * tw)
    loop = response * (kp_w + ki_w * tw * z / (z - 1.0))
    closed = np.zeros((7, 7))
    closed[:6, :6] = a_slow - (kp_w + ki_w * tw) * b_slow @ seen
    closed[:6, 6:] = b_slow
    closed[6, :6], closed[6, 6] = -ki_w * tw * seen[0], 1.0
    # The angle itself is free: its pole at one is the one that does not count.
    poles = np.sort(np.abs(np.linalg.eigvals(closed)))[:-1]
    return Scripted(
        current=(kp, ki),
        speed=(kp_w, ki_w),
        current_margins=current_margins,
        speed_margins=margins(w, loop, poles),
        step=locked(plant, kp=kp, ki=ki, ts=ts),
        run=respond(sheet, plant, ad, bd, current=(kp, ki), speed=(kp_w, ki_w)),
    )


def same_work(found: Scripted, sheet: Sheet) -> None:
    """Refuse to compare two different jobs."""
    result = assess(sheet)
    run, figures = found.run, result.response.figures
    pairs = [
        (found.current, (result.current.gains.kp, result.current.gains.ki), 1e-6),
        (found.speed, (result.speed.gains.kp, result.speed.gains.ki), 1e-6),
        (found.step.rise, result.locked_step.rise_s, 1e-6),
        (found.step.overshoot, result.locked_step.overshoot_percent, 1e-6),
        (run.rise, figures.rise_time_s, 0.01),
        (run.settling, figures.settling_time_s, 0.05),
        (run.dip, figures.load_dip_rad_s, 0.05),
        (run.peak_current, figures.peak_current_a, 1e-6),
        (run.rms_current, figures.rms_current_a, 1e-3),
        (run.peak_voltage, figures.peak_voltage_v, 1e-6),
        (run.current_limited, figures.current_limited_s, 0.1),
        (run.returned_energy, figures.returned_energy_j, 0.01),
    ]
    for mine, theirs in ((found.current_margins, result.current), (found.speed_margins, result.speed)):
        own = theirs.figures
        pairs += [
            (mine.stable, own.stable, 0.0),
            (mine.crossover, math.tau * own.crossover_hz, 1e-3),
            (mine.phase_margin, own.phase_margin_deg, 1e-3),
            (mine.delay_margin, own.delay_margin_s, 1e-3),
            (mine.gain_margin, own.gain_margin_db, 1e-3),
            (mine.peak_sensitivity, own.peak_sensitivity, 1e-3),
            (mine.bandwidth, math.tau * own.bandwidth_hz, 1e-3),
        ]
    for mine, theirs, share in pairs:
        if not np.allclose(mine, theirs, rtol=share, atol=0.0):
            raise SystemExit(f"the script and the library do not agree: {mine} and {theirs}")


def measure() -> dict[str, float]:
    """Both times and their ratio."""
    text = demo_sheet("label-unwinder").read_text(encoding="utf-8")
    sheet = parse_sheet(text, "label-unwinder.bench.toml").sheet
    sheet = replace(sheet, duty=replace(sheet.duty, length=TICKS * sheet.rig.stage.current_period))
    plant = refer(sheet.rig)
    warm_up()
    same_work(scripted(sheet, plant), sheet)
    library, script = math.inf, math.inf
    for _ in range(TURNS):
        begin = time.perf_counter()
        scripted(sheet, plant)
        script = min(script, time.perf_counter() - begin)
        for _ in range(ASSESSMENTS_PER_TURN):
            begin = time.perf_counter()
            assess(sheet)
            library = min(library, time.perf_counter() - begin)
    return {
        "ratio": round(script / library, 1),
        "assess_ms": round(1e3 * library, 4),
        "script_ms": round(1e3 * script, 2),
        "ticks": TICKS,
    }


def main() -> None:
    """Print the measurement."""
    arguments = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    arguments.add_argument("--json", action="store_true", help="one JSON object")
    found = measure()
    if arguments.parse_args().json:
        print(json.dumps(found))  # noqa: T201
    else:
        print(  # noqa: T201
            f"assess {found['assess_ms']:.3f} ms, script {found['script_ms']:.1f} ms: {found['ratio']:.0f} times faster"
        )


if __name__ == "__main__":
    main()
