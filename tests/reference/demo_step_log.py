"""Makes the demo log of a step check: the label unwinder under the gains of its sheet, on a bench a little off it.

    python tests/reference/demo_step_log.py FILE

Invented data: the sampled law as the library runs it, on the machine of ``demo_log`` instead of the sheet's, up to the
load step, every fifth tick, with noise of the sensors.
"""

from __future__ import annotations

import math
import sys
from dataclasses import replace
from pathlib import Path

import numpy as np

from demo_log import TRUE
from gainbench.assess import assess
from gainbench.model import DesignMethod, HandGains, Sheet
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet

EVERY, LENGTH = 5, 0.24


def bench(sheet: Sheet) -> Sheet:
    """The same loops with the sheet's gains, on the machine that is really there."""
    gains = assess(sheet, simulated=False)
    current, speed = (HandGains(kp=one.gains.kp, ki=one.gains.ki) for one in (gains.current, gains.speed) if one.gains)
    train = sheet.rig.train
    machine = replace(
        sheet.rig.machine,
        resistance=float(TRUE.resistance[0]),
        inductance=float(TRUE.inductance[0]),
        torque_constant=float(TRUE.constant[0]),
        rotor_inertia=float(TRUE.inertia[0]) - train.load_inertia / train.ratio**2,
        viscous_friction=float(TRUE.viscous[0]),
        coulomb_friction=float(TRUE.coulomb[0]),
    )
    by_hand = DesignMethod.BY_HAND
    aims = replace(
        sheet.aims,
        current=replace(sheet.aims.current, method=by_hand, hand=current),
        speed=replace(sheet.aims.speed, method=by_hand, hand=speed),
    )
    duty = replace(sheet.duty, load_step=0.0, load_at=None, length=LENGTH)
    return replace(sheet, rig=replace(sheet.rig, machine=machine), aims=aims, duty=duty)


def demo_step_log() -> str:
    """The log as text."""
    name = "label-unwinder"
    sheet = parse_sheet(demo_sheet(name).read_text(encoding="utf-8"), f"{name}.bench.toml").sheet
    response = assess(bench(sheet)).response
    if response is None:
        raise ValueError("this bench has no response")
    trace = response.trace
    rng = np.random.default_rng(2025)
    rpm = 30.0 / math.pi
    rows = np.arange(0, trace.time.size, EVERY)
    speed = np.round(rpm * trace.speed[rows] + 4.0 * rng.standard_normal(rows.size), 1)
    current = np.round(trace.current[rows] + 0.06 * rng.standard_normal(rows.size), 2)
    voltage = np.round(trace.voltage[rows] + 0.05 * rng.standard_normal(rows.size), 2)
    lines = ["time [ms],reference [rpm],speed [rpm],current [A],voltage [V]"]
    lines += [
        f"{1e3 * t:.2f},{r:.0f},{w:.1f},{i:.2f},{u:.2f}"
        for t, r, w, i, u in zip(trace.time[rows], rpm * trace.reference[rows], speed, current, voltage, strict=True)
    ]
    return "\n".join(lines) + "\n"


if __name__ == "__main__":
    Path(sys.argv[1]).write_text(demo_step_log(), encoding="utf-8")
