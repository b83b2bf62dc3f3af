"""Short logs of a simulated motor as files, and a desk whose sheet names them."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import numpy as np
import pytest

from gainbench.evidence import survey_log
from gainbench.model import EvidenceLog, Experiment
from gainbench.sheetfile import add_evidence
from identified import some_motion

HEADS = {"voltage": "u [V]", "current": "i [A]", "speed": "w [rad/s]", "angle": "phi [rad]"}


@pytest.fixture(scope="session")
def motion():
    """Half a second under steps of voltage, a thousand rows."""
    return some_motion(0.5)


@pytest.fixture
def log_file(tmp_path, motion) -> Callable[..., Path]:
    """Writes signals of the motion as csv: ``log_file("run.csv", "voltage", "current")``."""

    def write(name: str, *only: str) -> Path:
        columns = [motion.time, *(getattr(motion, one)[0] for one in only)]
        head = ",".join(["t [s]", *(HEADS[one] for one in only)])
        path = tmp_path / name
        np.savetxt(path, np.column_stack(columns), fmt="%.5f", delimiter=",", header=head, comments="")
        return path

    return write


@pytest.fixture
def driven_log(log_file) -> Path:
    """A driven run."""
    return log_file("run-07.csv", "voltage", "current", "speed")


@pytest.fixture
def name_log() -> Callable[..., None]:
    """Puts a log into a desk's sheet as it is guessed: ``name_log(desk, path, Experiment.DRIVEN)``."""

    def name(desk, path: Path, experiment: Experiment) -> None:
        columns = survey_log(path).suggestion
        wanted = EvidenceLog(log=str(path), experiment=experiment, columns=columns)
        desk.edit(lambda document: add_evidence(document, wanted))

    return name
