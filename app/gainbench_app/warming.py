"""Everything that the window computes, once: compiled, or loaded from the disk cache."""

from __future__ import annotations

from gainbench.assess import assess, warm_up
from gainbench.assessed import LoopName, assessed_loop
from gainbench.ledger import phase_ledger
from gainbench.reach import reach_map
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_it_does import traces
from gainbench_resources import demo_sheet, demo_sheet_names

_COLUMNS = 4
_LOOPS: tuple[LoopName, ...] = ("current", "speed")


def warm_up_window() -> None:
    """Compile all kernels that the window calls: of an assessment, of drawn traces, of reach maps and ledgers."""
    warm_up()
    traces.warm_up()
    file = demo_sheet(demo_sheet_names()[0])
    assessment = assess(parse_sheet(file.read_text(encoding="utf-8"), file.name).sheet)
    for name in _LOOPS:
        phase_ledger(assessment, name)
        loop = assessed_loop(assessment, name)
        if loop is not None:
            reach_map(loop, columns=_COLUMNS)
