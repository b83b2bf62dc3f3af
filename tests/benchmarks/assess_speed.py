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
from gainbench.model import Sheet
from gainbench.plant import Plant, refer
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet

TICKS = 10_000
POINTS = 400
TURNS = 7
ASSESSMENTS_PER_TURN = 30


@dataclass(frozen=True, slots=True, kw_only=True)
class Scripted:
    """What the script found, to show that it did the same work."""

    current_kp: float
    current_ki: float
    speed_kp: float
    speed_ki: float
    current_margin: float
    """[deg]."""
    speed_margin: float
    """[deg]."""
    overshoot: float
    """[%]."""
    peak_current: float
    """[A]."""


def pi_gains(response: complex, w: float, period: float, margin: float) -> tuple[float, float]:
    """Kp and Ki of a backward PI that put L on exp(j (margin - pi)) at w."""
    wanted = cmath.exp(1j * (margin - math.pi)) / response
    z = cmath.exp(1j * w * period)
    shape = period * z / (z - 1.0)
    ki = wanted.imag / shape.imag
    return wanted.real - ki * shape.real, ki


def phase_margin(frequency: np.ndarray, loop: np.ndarray) -> float:
    """Smallest distance of the phase to -180 degrees over all crossings of one, by straight lines [deg]."""
    size = np.log(np.abs(loop))
    found = []
    for k in np.flatnonzero(np.sign(size[:-1]) != np.sign(size[1:])):
        share = size[k] / (size[k] - size[k + 1])
        first = np.angle(-loop[k])
        step = np.angle(loop[k + 1] / loop[k])
        found.append(abs(math.degrees(first + share * step)))
    return min(found)


def scripted(sheet: Sheet, plant: Plant) -> Scripted:
    """The careful user's script."""
    stage, aims, duty = sheet.rig.stage, sheet.aims, sheet.duty
    ts, n = stage.current_period, stage.speed_divisor
    tw = n * ts
    # The winding and the shaft, sampled; one period from sample to voltage.
    a = np.array(
        [
            [-plant.resistance / plant.inductance, -plant.back_emf / plant.inductance, 0.0],
            [plant.torque / plant.inertia, -plant.viscous / plant.inertia, 0.0],
            [0.0, 1.0, 0.0],
        ]
    )
    b = np.array([[1.0 / plant.inductance, 0.0], [0.0, -1.0 / plant.inertia], [0.0, 0.0]])
    sampled = control.sample_system(control.ss(a, b, np.eye(3), np.zeros((3, 2))), ts, method="zoh")
    ad, bd = np.asarray(sampled.A), np.asarray(sampled.B)
    held = np.zeros((3, 3))
    held[:2, :2], held[:2, 2] = ad[:2, :2], bd[:2, 0]
    current_plant = control.ss(held, np.array([[0.0], [0.0], [1.0]]), np.array([[1.0, 0.0, 0.0]]), 0.0, ts)
    w1 = np.geomspace(1e-4, 1.0, POINTS) * math.pi / ts
    response = np.asarray(control.frequency_response(current_plant, w1).complex)
    there = complex(current_plant(cmath.exp(1j * aims.current.crossover * ts)))
    kp, ki = pi_gains(there, aims.current.crossover, ts, aims.current.phase_margin)
    z = np.exp(1j * w1 * ts)
    current_margin = phase_margin(w1, response * (kp + ki * ts * z / (z - 1.0)))

    # The closed current loop over one speed period, then the encoder's difference of one period.
    fast = np.zeros((6, 6))  # i, w, theta, voltage under way, integrator, reference
    fast[:3, :3], fast[:3, 3] = ad, bd[:, 0]
    fast[3, 0], fast[3, 4], fast[3, 5] = -(kp + ki * ts), 1.0, kp + ki * ts
    fast[4, 0], fast[4, 4], fast[4, 5] = -ki * ts, 1.0, ki * ts
    fast[5, 5] = 1.0
    slow = np.linalg.matrix_power(fast, n)
    a_slow = np.zeros((6, 6))
    a_slow[:5, :5] = slow[:5, :5]
    a_slow[5, 2] = 1.0
    b_slow = np.append(slow[:5, 5], 0.0)[:, None]
    speed_plant = control.ss(a_slow, b_slow, np.array([[0.0, 0.0, 1.0, 0.0, 0.0, -1.0]]) / tw, 0.0, tw)
    w2 = np.geomspace(1e-4, 1.0, POINTS) * math.pi / tw
    response = np.asarray(control.frequency_response(speed_plant, w2).complex)
    there = complex(speed_plant(cmath.exp(1j * aims.speed.crossover * tw)))
    kp_w, ki_w = pi_gains(there, aims.speed.crossover, tw, aims.speed.phase_margin)
    z = np.exp(1j * w2 * tw)
    speed_margin = phase_margin(w2, response * (kp_w + ki_w * tw * z / (z - 1.0)))

    # The response, in plain floats.
    (a11, a12, _), (a21, a22, _), (a31, a32, _) = ad.tolist()
    (b1, d1), (b2, d2), (b3, d3) = bd.tolist()
    limit_i, limit_v, coulomb = plant.current_limit, plant.voltage_limit, plant.coulomb
    counts = stage.encoder_counts / math.tau
    step = duty.load_step / sheet.rig.train.ratio
    k_ref, k_load = round(duty.reference_at / ts), round(duty.load_time / ts)
    i = w = theta = s = s_w = reference = voltage = 0.0
    seen_before = math.floor(0.5)
    ki_ts, ki_tw = ki * ts, ki_w * tw
    speeds, currents = [0.0] * TICKS, [0.0] * TICKS
    for k in range(TICKS):
        speeds[k], currents[k] = w, i
        if k % n == 0:
            seen = math.floor(theta * counts + 0.5)
            measured = (seen - seen_before) / counts / tw
            seen_before = seen
            error = (duty.reference_speed if k >= k_ref else 0.0) - measured
            integral = s_w + ki_tw * error
            u = kp_w * error + integral
            reference = min(max(u, -limit_i), limit_i)
            if reference == u or error * u <= 0.0:
                s_w = integral
        error = reference - i
        integral = s + ki_ts * error
        u = kp * error + integral
        applied, voltage = voltage, min(max(u, -limit_v), limit_v)
        if voltage == u or error * u <= 0.0:
            s = integral
        load = step if k >= k_load else 0.0
        if w == 0.0 and abs(plant.torque * i - load) <= coulomb:
            i = a11 * i + b1 * applied
            continue
        drag = load + (coulomb if w > 0.0 or (w == 0.0 and plant.torque * i > load) else -coulomb)
        before = w
        i, w, theta = (
            a11 * i + a12 * w + b1 * applied + d1 * drag,
            a21 * i + a22 * w + b2 * applied + d2 * drag,
            theta + a31 * i + a32 * w + b3 * applied + d3 * drag,
        )
        if before * w < 0.0:
            w = 0.0
    top = max(speeds[k_ref:k_load])
    return Scripted(
        current_kp=kp,
        current_ki=ki,
        speed_kp=kp_w,
        speed_ki=ki_w,
        current_margin=current_margin,
        speed_margin=speed_margin,
        overshoot=100.0 * max(top / duty.reference_speed - 1.0, 0.0),
        peak_current=max(map(abs, currents)),
    )


def same_work(found: Scripted, sheet: Sheet) -> None:
    """Refuse to compare two different jobs."""
    result = assess(sheet)
    mine, theirs = (
        (
            result.current.gains.kp,
            result.current.gains.ki,
            result.speed.gains.kp,
            result.speed.gains.ki,
            result.current.figures.phase_margin_deg,
            result.speed.figures.phase_margin_deg,
            result.response.figures.peak_current_a,
        ),
        (
            found.current_kp,
            found.current_ki,
            found.speed_kp,
            found.speed_ki,
            found.current_margin,
            found.speed_margin,
            found.peak_current,
        ),
    )
    if not np.allclose(mine, theirs, rtol=1e-3):
        raise SystemExit(f"the two do not agree: {mine} {theirs}")
    if abs(result.response.figures.overshoot_percent - found.overshoot) > 0.5:
        raise SystemExit(f"overshoots differ: {result.response.figures.overshoot_percent} {found.overshoot}")


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
