"""How fast the response kernel runs, held against the same law in C; run as a script, ``--json`` for machines.

Both run the whole duty of the label unwinder, by turns, so that a busy machine slows both; medians are compared. Their
traces must agree, or the comparison means nothing. The C side gets its steps ready made; the kernel's time includes
computing them.
"""

from __future__ import annotations

import argparse
import ctypes
import json
import math
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

import numpy as np
from numpy.typing import NDArray

import gainbench_resources
from gainbench.kernels.response_records import Row, Run
from gainbench.plant import refer
from gainbench.results import Gains
from gainbench.sheetfile import parse_sheet
from gainbench.simulate import schedule
from gainbench.simulate.preparation import prepare_run

SOURCE = Path(__file__).with_name("kernel_speed.c")
COMPILE = ("gcc", "-O3", "-std=c11", "-ffp-contract=off", "-shared", "-fPIC")
ROUNDS = 301
TRACES = 6
ALLOWED_RATIO = 1.5
AGREEMENT = 1e-9
"""Share of each trace's largest value: rounding, after thousands of ticks of feedback."""

_D, _L = ctypes.c_double, ctypes.c_long


class CLaw(ctypes.Structure):
    """law_t of the C source."""

    _fields_ = (("kp", _D), ("ki_period", _D), ("weight", _D), ("relief", _D), ("rule", _L), ("hold", _L))


class CStep(ctypes.Structure):
    """step_t of the C source."""

    _fields_ = (
        ("i", _D * 4),
        ("w", _D * 4),
        ("f", _D * 4),
        ("a", _D * 4),
        ("q", _D * 4),
        ("f_self", _D),
        ("width", _D),
    )


class CRun(ctypes.Structure):
    """run_t of the C source."""

    _fields_ = (
        *((name, _L) for name in ("ticks", "divisor", "held_ticks", "reference_delay", "window", "reference_tick")),
        *((name, _L) for name in ("stop_tick", "load_tick", "terms", "filtered")),
        *((name, _D) for name in ("period", "held_part", "counts_per_radian", "filter_gain", "feedforward")),
        *((name, _D) for name in ("current_limit", "voltage_limit", "reactance")),
        *((name, _D) for name in ("reference", "reference_at", "ramp", "stop_at", "stop_ramp", "stop_size")),
        *((name, _D) for name in ("start_current", "start_voltage")),
        *((name, _D) for name in ("ii", "iw", "iv", "wi", "ww", "wd", "fi", "ff")),
        ("drag", _D * 2 * 2),
        ("current", CLaw),
        ("speed", CLaw),
        ("step", CStep * 2 * 2),
    )


class CTally(ctypes.Structure):
    """tally_t of the C source."""

    _fields_ = tuple(
        (name, _D)
        for name in ("peak_current", "squares", "peak_voltage", "current_clamps", "voltage_clamps", "returned")
    )


def demo_run() -> Run:
    """The label unwinder's duty with the gains on its shelf."""
    text = gainbench_resources.demo_sheet("label-unwinder").read_text(encoding="utf-8")
    sheet = parse_sheet(text, "label-unwinder.bench.toml").sheet
    stage = sheet.rig.stage
    return prepare_run(
        refer(sheet.rig),
        stage,
        sheet.aims.firmware,
        sheet.duty,
        plan=schedule(sheet.duty, stage),
        load_torque=sheet.rig.train.load_torque,
        reference_weight=sheet.aims.speed.reference_weight,
        current=Gains(kp=2.66, ki=4681.0),
        speed=Gains(kp=0.481, ki=57.6),
    )


def c_run(run: Run) -> CRun:
    """The same run as the C source takes it, with its steps ready made; for a rigid train with short segments."""
    from gainbench.kernels.motion import flow_matrix, prepare_motion, read_flow, read_step

    sampling, script = run.sampling, run.script
    first = sampling.held_part * sampling.period
    matrix = flow_matrix(run.plant[0], run.plant[1], run.layout)
    flow = read_flow(matrix, False)
    motion = prepare_motion(matrix, first, sampling.period - first)
    if motion.fine > 0 or run.layout.load_speed >= 0:
        raise ValueError("the C source knows rigid trains and segments that are short against the plant")
    out = CRun(terms=motion.terms + 1, filtered=int(run.layout.filtered >= 0))
    for source, names in (
        (sampling, ("ticks", "divisor", "held_ticks", "reference_delay", "window", "period", "held_part")),
        (sampling, ("counts_per_radian", "filter_gain", "feedforward", "current_limit", "voltage_limit", "reactance")),
        (script, ("reference", "reference_tick", "reference_at", "ramp", "stop_tick", "stop_at", "stop_ramp")),
        (script, ("stop_size", "load_tick")),
        (flow, ("ii", "iw", "iv", "wi", "ww", "wd", "fi", "ff")),
    ):
        for name in names:
            setattr(out, name, getattr(source, name))
    out.start_current, out.start_voltage = run.start.current, run.start.voltage
    for index, drag in enumerate(run.drags):
        out.drag[index][0], out.drag[index][1] = drag.motor_backwards, drag.motor_forwards
    for name, law in (("current", run.current_law), ("speed", run.speed_law)):
        setattr(out, name, CLaw(law.kp, law.ki_period, law.weight, law.relief, law.rule, int(law.hold)))
    for resting in range(2):
        for segment in range(2):
            # Without a first segment, its step is without meaning.
            step = read_step(motion, segment if first > 0.0 else 1, resting, motion.fine)
            out.step[segment][resting] = CStep(
                i=_four(step.current),
                w=_four(step.speed),
                f=_four(step.filtered),
                a=_four(step.angle),
                q=_four(step.charge),
                f_self=step.filtered_self,
                width=step.width,
            )
    return out


def _four(row: Row) -> ctypes.Array[ctypes.c_double]:
    return (_D * 4)(row.current, row.speed, row.voltage, row.motor_drag)


def build(folder: Path) -> ctypes.CDLL:
    """Compile the C source into ``folder`` and load it."""
    library = folder / "kernel_speed.so"
    subprocess.run([*COMPILE, "-o", str(library), str(SOURCE), "-lm"], check=True)
    return ctypes.CDLL(str(library))


def agree(ours: NDArray[np.float64], theirs: NDArray[np.float64]) -> bool:
    """Whether two sets of traces are the same but for rounding."""
    scale = np.abs(ours).max(axis=1, keepdims=True)
    return bool(np.all(np.abs(ours - theirs) <= AGREEMENT * np.maximum(scale, math.ulp(1.0))))


def measure(rounds: int = ROUNDS) -> dict[str, float]:
    """Run both by turns.

    Parameters
    ----------
    rounds : int
        Runs of each.

    Returns
    -------
    dict
        ``ratio`` of the medians, ``kernel_ns_per_tick``, ``c_ns_per_tick``.

    Raises
    ------
    ValueError
        If the two do not give the same traces.
    """
    from gainbench.kernels.response import respond

    run = demo_run()
    ticks = run.sampling.ticks
    ours, theirs = np.zeros((TRACES, ticks)), np.zeros((TRACES, ticks))
    our_flags, their_flags = np.zeros((2, ticks), dtype=np.bool_), np.zeros((2, ticks), dtype=np.bool_)
    with tempfile.TemporaryDirectory() as folder:
        library = build(Path(folder))
        given, found = c_run(run), CTally()
        arguments = (
            ctypes.byref(given),
            theirs.ctypes.data_as(ctypes.c_void_p),
            their_flags.ctypes.data_as(ctypes.c_void_p),
            ctypes.byref(found),
        )
        tally = respond(run, ours, our_flags)
        library.respond(*arguments)
        same_tally = all(
            math.isclose(getattr(tally, name), getattr(found, name), rel_tol=AGREEMENT, abs_tol=1e-12)
            for name, _ in CTally._fields_
        )
        if not (agree(ours, theirs) and np.array_equal(our_flags, their_flags) and same_tally):
            raise ValueError("the kernel and the C source do not give the same traces")
        kernel_times, c_times = [], []
        for _ in range(rounds):
            begin = time.perf_counter_ns()
            respond(run, ours, our_flags)
            middle = time.perf_counter_ns()
            library.respond(*arguments)
            kernel_times.append(middle - begin)
            c_times.append(time.perf_counter_ns() - middle)
    kernel, plain = statistics.median(kernel_times) / ticks, statistics.median(c_times) / ticks
    return {"ratio": kernel / plain, "kernel_ns_per_tick": kernel, "c_ns_per_tick": plain}


def main() -> int:
    """Print what was measured; 1 if the kernel is slower than it may be."""
    parser = argparse.ArgumentParser(description=(__doc__ or "").splitlines()[0])
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    wanted = parser.parse_args()
    found = measure()
    if wanted.json:
        text = json.dumps(found)
    else:
        text = (
            f"kernel {found['kernel_ns_per_tick']:.1f} ns a tick, C {found['c_ns_per_tick']:.1f} ns, "
            f"ratio {found['ratio']:.2f} (at most {ALLOWED_RATIO})"
        )
    sys.stdout.write(text + "\n")
    return 0 if found["ratio"] <= ALLOWED_RATIO else 1


if __name__ == "__main__":
    raise SystemExit(main())
