"""Logs that are written for one test, and the refusals that reading them gives."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from pathlib import Path

import numpy as np
import pytest

from gainbench.errors import LogError
from gainbench.evidence.reading import read_log
from gainbench.model import LogColumn, SignalName

COLUMNS = (
    LogColumn(signal=SignalName.TIME, column="t", unit="s"),
    LogColumn(signal=SignalName.CURRENT, column="i", unit="A"),
    LogColumn(signal=SignalName.SPEED, column="w", unit="rad/s"),
)


@pytest.fixture(scope="session")
def columns() -> tuple[LogColumn, ...]:
    """The mapping of most logs in these tests: t, i and w."""
    return COLUMNS


@pytest.fixture(scope="session")
def run() -> np.ndarray:
    """Forty rows of t, i and w."""
    time = np.arange(40) / 1000.0
    return np.column_stack([time, np.round(np.cos(90.0 * time), 4), np.round(20.0 * np.sin(90.0 * time), 4)])


@pytest.fixture
def written(tmp_path: Path) -> Callable[..., Path]:
    """Writes a log and gives its path: ``written(content, "run.csv")``."""

    def write(content: str | bytes, name: str = "run.csv", *, encoding: str = "utf-8") -> Path:
        path = tmp_path / name
        path.write_bytes(content if isinstance(content, bytes) else content.encode(encoding))
        return path

    return write


@pytest.fixture(scope="session")
def as_text() -> Callable[..., str]:
    """The rows of a run as text: ``as_text(rows, header=..., separator=..., mark=...)``."""
    return _as_text


def _as_text(rows: np.ndarray, *, header: str = "t;i;w", separator: str = ";", mark: str = ".", end: str = "\n") -> str:
    lines = [separator.join(f"{value:.10g}".replace(".", mark) for value in row) for row in rows]
    return end.join([*([header] if header else []), *lines, ""])


@pytest.fixture(scope="session")
def log_refusal() -> Callable[..., str]:
    """Gives the one message that reading a log is refused with, having looked whether it names the file."""
    return _log_refusal


def _log_refusal(path: Path, columns: Sequence[LogColumn] = COLUMNS) -> str:
    with pytest.raises(LogError) as caught:
        read_log(path, columns)
    message = str(caught.value)
    assert message.startswith((f"{path.name}: ", repr(path.name)))
    assert "\n" not in message
    return message
