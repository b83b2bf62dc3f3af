"""Logs of simulated motors as the library reads them, and sheets that ask to identify from them."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
from numpy.typing import NDArray

from bench_logs import Benches, Motions, counted, noisy, run, stepped_voltage
from gainbench.evidence.log import Log
from gainbench.model import EvidenceLog, Experiment, Machine, MachineKind, Rig, Sheet, SignalName, Train, TrainKind
from rigs import fixed_sheet

Array = NDArray[np.float64]

RATE = 2000.0
"""Rows a second [Hz]."""
ONE = Benches(
    resistance=np.array([0.6]),
    inductance=np.array([0.9e-3]),
    constant=np.array([0.052]),
    inertia=np.array([2.4e-4]),
    viscous=np.array([1e-4]),
    coulomb=np.array([0.03]),
    offset=np.array([-8e-3]),
)
"""A brushed motor with its load."""
TRUE = {
    "resistance": 0.6,
    "inductance": 0.9e-3,
    "back_emf_constant": 0.052,
    "torque_constant": 0.052,
    "inertia": 2.4e-4,
    "viscous_friction": 1e-4,
    "coulomb_friction": 0.03,
    "torque_offset": -8e-3,
    "viscous_friction_forward": 1e-4,
    "viscous_friction_backward": 1e-4,
    "coulomb_friction_forward": 0.022,
    "coulomb_friction_backward": 0.038,
}


def some_motion(seconds: float = 4.0, *, benches: Benches = ONE, seed: int = 3, one_way: bool = False) -> Motions:
    """A run under random steps of voltage."""
    rng = np.random.default_rng(seed)
    voltage = stepped_voltage(benches.count, round(seconds * RATE), RATE, rng=rng)
    return run(benches, np.abs(voltage) + 6.0 if one_way else voltage, rate=RATE)


def log_of(motions: Motions, *, only: tuple[str, ...], bench: int = 0, decibel: float = 50.0, seed: int = 4) -> Log:
    """One bench's log with some of its signals and noise; an angle comes in counts of an encoder."""
    rng = np.random.default_rng(seed)
    signals = {}
    for name in only:
        values = getattr(motions, name)[bench]
        signals[SignalName(name)] = counted(values, 4096) if name == "angle" else noisy(values, decibel, rng)
    return Log(name="run.csv", time=motions.time, signals=signals)


def sheet_of(*experiments: Experiment, off: float = 1.5, benches: Benches = ONE, bench: int = 0) -> Sheet:
    """A sheet whose values are off by a factor, with one log for each experiment."""
    base = fixed_sheet("plain")
    machine = Machine(
        kind=MachineKind.BRUSHED_DC,
        resistance=float(benches.resistance[bench]) * off,
        inductance=float(benches.inductance[bench]) * off,
        torque_constant=float(benches.constant[bench]) * off,
        rotor_inertia=float(benches.inertia[bench]) * off,
    )
    rig = Rig(machine=machine, train=Train(kind=TrainKind.RIGID, load_inertia=0.0), stage=base.rig.stage)
    evidence = tuple(
        EvidenceLog(log=f"run-{number}.csv", experiment=one, columns=()) for number, one in enumerate(experiments)
    )
    return replace(base, rig=rig, evidence=evidence, tolerances=())
