"""Time and memory to identify from a driven log of a million rows, against what polars takes to read it.

    python tests/benchmarks/identify_speed.py [--json] [--rows 1000000]

``read_ratio`` is the time from the file to the estimates, reading included, over the time in which polars reads the
same columns of the same file; ``memory_ratio`` is by how much the process grows at most meanwhile, over the file's
size. The best of some turns counts on either side. The motion is thinned behind an anti-alias filter, the winding is
fitted to unbroken stretches; no estimate may be off by more than two percent.
"""

from __future__ import annotations

import argparse
import json
import math
import resource
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
import polars as pl
from numba import njit

from gainbench.evidence.estimate import EstimateName
from gainbench.evidence.identify import identify
from gainbench.evidence.reading import read_log
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet

TURNS = 3
RATE = 10_000.0
"""Rows a second [Hz]."""
RESISTANCE, INDUCTANCE, CONSTANT, INERTIA = 0.6, 0.45e-3, 0.052, 7.1e-5
VISCOUS, COULOMB, OFFSET = 4e-5, 1.6e-2, -3e-3
COUNTS = 4096
TRUE = {
    EstimateName.RESISTANCE: RESISTANCE,
    EstimateName.INDUCTANCE: INDUCTANCE,
    EstimateName.BACK_EMF_CONSTANT: CONSTANT,
    EstimateName.INERTIA: INERTIA,
    EstimateName.VISCOUS_FRICTION: VISCOUS,
    EstimateName.COULOMB_FRICTION: COULOMB,
    EstimateName.TORQUE_OFFSET: OFFSET,
}
RIGHT = 0.02
"""Share by which no estimate may be off."""
EVIDENCE = """
[[evidence]]
log = "driven.csv"
experiment = "driven"
[evidence.columns]
time = { column = "time", unit = "s" }
voltage = { column = "voltage", unit = "V" }
current = { column = "current", unit = "A" }
angle = { column = "angle", unit = "rad" }
"""


@njit
def motion(voltage: np.ndarray, step: float) -> tuple[np.ndarray, np.ndarray]:
    """Current and angle of the motor under a held voltage, by short trapezoids."""
    current, speed, angle = 0.0, 0.0, 0.0
    currents, angles = np.empty(voltage.size), np.empty(voltage.size)
    parts = 4
    dt = step / parts
    for k in range(voltage.size):
        currents[k], angles[k] = current, angle
        for _ in range(parts):
            push = CONSTANT * current - OFFSET
            if speed > 0.0:
                drag = COULOMB
            elif speed < 0.0:
                drag = -COULOMB
            else:
                drag = min(max(push, -COULOMB), COULOMB)
            di = (voltage[k] - RESISTANCE * current - CONSTANT * speed) / INDUCTANCE
            dw = (push - drag - VISCOUS * speed) / INERTIA
            middle_i, middle_w = current + 0.5 * dt * di, speed + 0.5 * dt * dw
            di = (voltage[k] - RESISTANCE * middle_i - CONSTANT * middle_w) / INDUCTANCE
            dw = (CONSTANT * middle_i - OFFSET - drag - VISCOUS * middle_w) / INERTIA
            current += dt * di
            after = speed + dt * dw
            if speed * after < 0.0:
                after = 0.0
            angle += 0.5 * dt * (speed + after)
            speed = after
    return currents, angles


def write_log(path: Path, rows: int) -> None:
    """A log with noise and quantisation."""
    rng = np.random.default_rng(1)
    voltage = np.empty(rows)
    at = 0
    while at < rows:
        held = int(RATE * rng.uniform(0.05, 0.5))
        voltage[at : at + held] = rng.uniform(-30.0, 30.0)
        at += held
    current, angle = motion(voltage, 1.0 / RATE)
    pl.DataFrame(
        {
            "time": np.round(np.arange(rows) / RATE, 6),
            "voltage": np.round(voltage + 0.1 * rng.standard_normal(rows), 3),
            "current": np.round(current + 0.05 * rng.standard_normal(rows), 4),
            "angle": np.round(np.floor(angle * COUNTS / math.tau) * math.tau / COUNTS, 6),
        }
    ).write_csv(path)


def peak() -> float:
    """The largest size the process has had so far [bytes]."""
    return resource.getrusage(resource.RUSAGE_SELF).ru_maxrss * 1024.0


def measure(rows: int) -> dict[str, float]:
    """Both times, their ratio, and the memory."""
    sheet = parse_sheet(demo_sheet("label-unwinder").read_text(encoding="utf-8") + EVIDENCE, "x.bench.toml").sheet
    columns = sheet.evidence[0].columns
    with tempfile.TemporaryDirectory() as folder:
        path, small = Path(folder) / "driven.csv", Path(folder) / "small.csv"
        # Written by another process, so that its memory does not count.
        for one, count in ((small, 20_000), (path, rows)):
            subprocess.run([sys.executable, __file__, "--rows", str(count), "--write", str(one)], check=True)
        identify(sheet, [read_log(small, columns)])
        pl.read_csv(small)
        before = peak()
        ours, theirs = math.inf, math.inf
        for _ in range(TURNS):
            begin = time.perf_counter()
            pl.read_csv(path)
            theirs = min(theirs, time.perf_counter() - begin)
            begin = time.perf_counter()
            found = identify(sheet, [read_log(path, columns)])
            ours = min(ours, time.perf_counter() - begin)
        size = path.stat().st_size
    off = {name: abs(found.estimates[name].value / true - 1.0) for name, true in TRUE.items()}
    worst = max(off, key=lambda name: off[name])
    if off[worst] > RIGHT:
        raise SystemExit(f"{worst.value} is off by {100.0 * off[worst]:.2g} %: what is not right is not timed")
    return {
        "read_ratio": round(ours / theirs, 2),
        "identify_s": round(ours, 3),
        "read_s": round(theirs, 3),
        "memory_ratio": round((peak() - before) / size, 2),
        "worst_error_percent": round(100.0 * off[worst], 3),
        "rows": rows,
    }


def main() -> None:
    """Print the measurement."""
    arguments = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    arguments.add_argument("--json", action="store_true", help="one JSON object")
    arguments.add_argument("--rows", type=int, default=1_000_000, help="of the log")
    arguments.add_argument("--write", type=Path, help="only write such a log")
    given = arguments.parse_args()
    if given.write:
        write_log(given.write, given.rows)
        return
    found = measure(given.rows)
    if given.json:
        print(json.dumps(found))  # noqa: T201
    else:
        print(  # noqa: T201
            f"{found['rows']} rows: identified in {found['identify_s']:.2f} s, read by polars in {found['read_s']:.3f}"
            f" s: {found['read_ratio']:.1f} times; memory {found['memory_ratio']:.1f} times the file"
        )


if __name__ == "__main__":
    main()
