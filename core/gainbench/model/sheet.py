"""The bench sheet as the library sees it: plain frozen values, no text, no file."""

from __future__ import annotations

from dataclasses import dataclass

from gainbench.model.aims import Aims, HandGains
from gainbench.model.duty import Duty
from gainbench.model.evidence import EvidenceLog
from gainbench.model.machine import Machine
from gainbench.model.stage import Stage
from gainbench.model.train import Train


@dataclass(frozen=True, slots=True, kw_only=True)
class Rig:
    """What stands on the bench: the machine, its train and the stage that drives it."""

    machine: Machine
    train: Train
    stage: Stage


@dataclass(frozen=True, slots=True, kw_only=True)
class Tolerance:
    """Plus or minus of one quantity, exactly one of ``relative`` and ``absolute``."""

    path: str
    """Dotted path of the quantity, ``machine.resistance``."""
    relative: float | None = None
    """Share of the nominal value, >= 0."""
    absolute: float | None = None
    """In the quantity's SI unit (K for a temperature), >= 0."""


@dataclass(frozen=True, slots=True, kw_only=True)
class KeptTuning:
    """A named set of gains on the shelf."""

    name: str
    current: HandGains
    speed: HandGains
    note: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class Sheet:
    """One tuning project."""

    title: str
    rig: Rig
    aims: Aims
    duty: Duty
    tolerances: tuple[Tolerance, ...] = ()
    kept: tuple[KeptTuning, ...] = ()
    evidence: tuple[EvidenceLog, ...] = ()
