"""The time of one reach map and of one phase ledger, for each loop of the demo sheets.

A map is computed anew whenever the plant moves, so it has to fit in a screen frame with the assessment. The best of
many is what a shared machine disturbs least.

    python tests/benchmarks/reach_speed.py [--json]
"""

from __future__ import annotations

import argparse
import json
import math
import time
from collections.abc import Callable

from gainbench.assess import assess
from gainbench.assessed import LoopName, assessed_loop
from gainbench.ledger import phase_ledger
from gainbench.reach import reach_map
from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet, demo_sheet_names

TURNS = 60
LOOPS: tuple[LoopName, ...] = ("current", "speed")


def best(call: Callable[[], object]) -> float:
    """The shortest of many calls [ms], the first one, which may compile, left out."""
    call()
    least = math.inf
    for _ in range(TURNS):
        begin = time.perf_counter()
        call()
        least = min(least, time.perf_counter() - begin)
    return round(1e3 * least, 4)


def measure() -> dict[str, dict[str, float]]:
    """By sheet and loop: both times, and how many crossovers the map has."""
    found = {}
    for name in demo_sheet_names():
        assessment = assess(parse_sheet(demo_sheet(name).read_text(encoding="utf-8"), name).sheet)
        for which in LOOPS:
            loop = assessed_loop(assessment, which)
            if loop is None:
                raise SystemExit(f"{name} has no {which} loop")
            found[f"{name}, {which}"] = {
                "map_ms": best(lambda loop=loop: reach_map(loop)),
                "ledger_ms": best(lambda held=assessment, which=which: phase_ledger(held, which)),
                "crossovers": reach_map(loop).crossover.size,
            }
    return found


def main() -> None:
    """Print the measurement."""
    arguments = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    arguments.add_argument("--json", action="store_true", help="one JSON object")
    as_json = arguments.parse_args().json
    found = measure()
    if as_json:
        print(json.dumps(found))  # noqa: T201
        return
    for name, one in found.items():
        print(  # noqa: T201
            f"{name:<25} map {one['map_ms']:.2f} ms of {one['crossovers']} crossovers, ledger {one['ledger_ms']:.3f} ms"
        )


if __name__ == "__main__":
    main()
