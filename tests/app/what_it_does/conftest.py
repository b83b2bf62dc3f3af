"""A bench folder: the label unwinder's sheet with a step and a frequency response that were recorded on it."""

from __future__ import annotations

import pytest

STEP = """
[[evidence]]
log = "label-unwinder-step.csv"
experiment = "step-check"
[evidence.columns]
time = { column = "time [ms]", unit = "ms" }
speed_reference = { column = "reference [rpm]", unit = "rpm" }
speed = { column = "speed [rpm]", unit = "rpm" }
current = { column = "current [A]", unit = "A" }
voltage = { column = "voltage [V]", unit = "V" }
"""
CLOSED = """
[[evidence]]
log = "noise.csv"
experiment = "frequency-response"
[evidence.columns]
time = { column = "time", unit = "s" }
speed_reference = { column = "speed_reference", unit = "rad/s" }
speed = { column = "speed", unit = "rad/s" }
"""
PLANT = f"""{CLOSED}current_reference = {{ column = "current_reference", unit = "A" }}
"""


@pytest.fixture(scope="session")
def noise_log(demo_texts) -> str:
    """Two seconds of noise on the speed reference of the label unwinder, simulated apart from the library."""
    from gainbench.sheetfile import parse_sheet
    from loop_logs import closed_loop, excitation

    sheet = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").sheet
    columns = closed_loop(sheet, excitation("noise", sheet.rig.stage.speed_rate, seconds=2.0), noise=0.01)
    rows = [",".join(columns), *(",".join(f"{one:.9g}" for one in row) for row in zip(*columns.values(), strict=True))]
    return "\n".join(rows) + "\n"


@pytest.fixture
def bench(tmp_path, demo_texts, noise_log):
    """Writes the sheet with some evidence into a folder that holds the logs, and gives its path."""
    from gainbench_resources import demo_log

    name = "label-unwinder-step.csv"
    (tmp_path / name).write_text(demo_log(name).read_text(encoding="utf-8"), encoding="utf-8")
    (tmp_path / "noise.csv").write_text(noise_log, encoding="utf-8")

    def write(*evidence: str):
        path = tmp_path / "label-unwinder.bench.toml"
        path.write_text(demo_texts["label-unwinder"] + "".join(evidence), encoding="utf-8")
        return path

    return write


@pytest.fixture
def evidence() -> dict[str, str]:
    """Entries of a sheet, by what they measure."""
    return {"step": STEP, "closed": CLOSED, "plant": PLANT}


@pytest.fixture
def read_logs(qtbot):
    """Waits until a column has read what it has to."""

    def wait(column) -> None:
        qtbot.waitUntil(lambda: not column.measured.busy, timeout=10_000)

    return wait


@pytest.fixture
def bench_column(qtbot, desk, appearance, bench, read_logs):
    """Opens the sheet with some evidence in a column of its own, shown, with the logs read."""
    from gainbench_app.what_it_does.column import WhatItDoes

    column = WhatItDoes(desk, appearance)
    qtbot.addWidget(column)
    column.resize(760, 800)
    with qtbot.waitExposed(column):
        column.show()

    def open_with(*evidence: str) -> WhatItDoes:
        desk.open_path(bench(*evidence))
        desk.compute_now()
        read_logs(column)
        return column

    yield open_with
    column.hide()
