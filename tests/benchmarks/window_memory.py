"""What the window keeps: ``python tests/benchmarks/window_memory.py --json``.

``grown_mb``: resident memory after 10,000 moves of a slider, each computed and painted, over that after the first 500.
``resident_mb``: at the end. ``start_s``: from the start of a process to a window that is shown and answers, kernels
cached; ``bare_start_s``: the same for an empty QMainWindow with one plot in it; both the median of some processes that
take turns. Offscreen.
"""

from __future__ import annotations

import argparse
import json
import math
import os
import statistics
import subprocess
import sys
import time
from pathlib import Path

os.environ["QT_QPA_PLATFORM"] = "offscreen"

FIRST, ALL = 500, 10_000
STARTS = 3
BARE = """
import time
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication, QMainWindow
import pyqtgraph
application = QApplication([])
window = QMainWindow()
plot = pyqtgraph.PlotWidget()
plot.plot([0.0, 1.0], [0.0, 1.0])
window.setCentralWidget(plot)
window.resize(1400, 900)
window.show()
QTimer.singleShot(0, lambda: (print(time.time(), flush=True), application.quit()))
application.exec()
"""
FULL = """
import time
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from gainbench_app.session import open_window
application = QApplication([])
def look():
    if any(one.isVisible() for one in application.topLevelWidgets()):
        print(time.time(), flush=True)
        application.exit(0)
        QTimer.singleShot(0, application.closeAllWindows)
timer = QTimer()
timer.timeout.connect(look)
timer.start(5)
open_window(None)
"""


def resident_mb() -> float:
    """Memory of this process that is in use [MB]."""
    pages = int(Path("/proc/self/statm").read_text(encoding="ascii").split()[1])
    return pages * os.sysconf("SC_PAGE_SIZE") / 1e6


def start_seconds(script: str) -> float:
    """From the start of a process to the moment that it tells."""
    began = time.time()
    told = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True).stdout
    return float(told.split()[0]) - began


def moved(count: int) -> dict[str, float]:
    """Move a slider, and see what stays."""
    from PySide6.QtWidgets import QApplication

    from gainbench.sheetfile import parse_sheet
    from gainbench_app.desk import Desk
    from gainbench_app.theme import LIGHT, body_font, style_sheet
    from gainbench_app.warming import warm_up_window
    from gainbench_app.widgets.appearance import Appearance
    from gainbench_app.window import Window
    from gainbench_resources import demo_sheet

    application = QApplication([])
    application.setFont(body_font())
    application.setStyleSheet(style_sheet(LIGHT))
    warm_up_window()
    file = demo_sheet("label-unwinder")
    desk = Desk(parse_sheet(file.read_text(encoding="utf-8"), file.name))
    window = Window(desk, appearance=Appearance(LIGHT))
    window.resize(1400, 900)
    window.show()
    window.settle_memory()
    before = 0.0
    path = "aims.speed.crossover"
    desk.begin_gesture(path)
    for number in range(count):
        if number == FIRST:
            before = resident_mb()
        desk.move(path, math.tau * (40.0 + 0.05 * (number % 800)))
        desk.compute_now()
        application.processEvents()
    desk.end_gesture()
    after = resident_mb()
    window.hide()
    return {"grown_mb": round(after - before, 2), "resident_mb": round(after, 1), "moves": count}


def main() -> None:
    """Measure, and print."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--json", action="store_true", help="print JSON")
    parser.add_argument("--moves", type=int, default=ALL)
    options = parser.parse_args()
    found = moved(max(options.moves, FIRST + 1))
    starts = [(start_seconds(FULL), start_seconds(BARE)) for _ in range(STARTS)]
    full, bare = (statistics.median(one) for one in zip(*starts, strict=True))
    found |= {"start_s": round(full, 3), "bare_start_s": round(bare, 3), "start_ratio": round(full / bare, 2)}
    sys.stdout.write(json.dumps(found, indent=2) + "\n" if options.json else f"{found}\n")


if __name__ == "__main__":
    main()
