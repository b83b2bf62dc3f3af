"""Makes the demo log: the label unwinder as it might really be, a little off its sheet, with noise of its sensors.

    python tests/reference/demo_log.py FILE

Invented data: the benches of ``bench_logs`` with these values, 5 s at 1 kHz under random steps of voltage.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np

from bench_logs import Benches, counted, run, stepped_voltage

LOG = "label-unwinder-driven.csv"
EVIDENCE = f"""
[[evidence]]
log = "{LOG}"
experiment = "driven"
[evidence.columns]
time = {{ column = "time [s]", unit = "s" }}
voltage = {{ column = "voltage [V]", unit = "V" }}
current = {{ column = "current [A]", unit = "A" }}
angle = {{ column = "angle [deg]", unit = "deg" }}
"""
"""What a sheet says of it."""
RATE, ROWS, COUNTS = 1000.0, 5000, 4096
TRUE = Benches(
    resistance=np.array([0.66]),
    inductance=np.array([0.48e-3]),
    constant=np.array([0.0507]),
    inertia=np.array([7.6e-5]),
    viscous=np.array([4.2e-5]),
    coulomb=np.array([0.0145]),
    offset=np.array([2.0e-3]),
)


def demo_log() -> str:
    """The log as text."""
    rng = np.random.default_rng(2024)
    motions = run(TRUE, stepped_voltage(1, ROWS, RATE, rng=rng, share=0.6), rate=RATE)
    voltage = motions.voltage[0] + 0.03 * rng.standard_normal(ROWS)
    current = np.round(motions.current[0] / 0.01 + 2.0 * rng.standard_normal(ROWS)) * 0.01
    angle = np.degrees(counted(motions.angle[0], COUNTS))
    lines = ["time [s],voltage [V],current [A],angle [deg]"]
    lines += [
        f"{t:.3f},{u:.2f},{i:.2f},{a:.2f}" for t, u, i, a in zip(motions.time, voltage, current, angle, strict=True)
    ]
    return "\n".join(lines) + "\n"


if __name__ == "__main__":
    Path(sys.argv[1]).write_text(demo_log(), encoding="utf-8")
