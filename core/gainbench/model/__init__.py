"""Plain frozen dataclasses of SI values: what the bench sheet says, before any computation.

Every unit stands in its field's docstring. Angles are radians, speeds rad/s, design frequencies rad/s,
sampling rates Hz. Nothing in here converts, checks or computes more than a default.
"""

from gainbench.model.aims import (
    CURRENT_METHODS,
    SPEED_METHODS,
    Aims,
    DesignMethod,
    Firmware,
    GainForm,
    HandGains,
    IntegratorRule,
    LoopAims,
    SpeedAims,
    SpeedOutput,
    WindupRule,
)
from gainbench.model.duty import MAX_TICKS, Duty
from gainbench.model.evidence import SIGNAL_DIMENSIONS, EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.model.machine import BackEmfValues, CurrentValues, Machine, MachineKind, WindingValues
from gainbench.model.sheet import KeptTuning, Rig, Sheet, Tolerance
from gainbench.model.stage import SpeedSensor, Stage
from gainbench.model.train import Train, TrainKind

__all__ = [
    "CURRENT_METHODS",
    "MAX_TICKS",
    "SIGNAL_DIMENSIONS",
    "SPEED_METHODS",
    "Aims",
    "BackEmfValues",
    "CurrentValues",
    "DesignMethod",
    "Duty",
    "EvidenceLog",
    "Experiment",
    "Firmware",
    "GainForm",
    "HandGains",
    "IntegratorRule",
    "KeptTuning",
    "LogColumn",
    "LoopAims",
    "Machine",
    "MachineKind",
    "Rig",
    "Sheet",
    "SignalName",
    "SpeedAims",
    "SpeedOutput",
    "SpeedSensor",
    "Stage",
    "Tolerance",
    "Train",
    "TrainKind",
    "WindingValues",
    "WindupRule",
]
