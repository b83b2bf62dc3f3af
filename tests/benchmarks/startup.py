"""How long it takes until there is something to see: ``python tests/benchmarks/startup.py --json``.

``assess_s``: one ``gainbench assess`` of a demo sheet with the kernels cached. ``assess_cold_s``: the same with an
empty cache, so that they are compiled first. ``import_ratio``: import of the library over that of numpy and
scipy.linalg, medians of fresh processes that take turns, without the start of the interpreter. ``window_s``: from the
start of the process to a window that is shown and answers events; null with its reason where Qt cannot be loaded. All
in seconds of wall time: run it on a machine that does nothing else.
"""

from __future__ import annotations

import argparse
import json
import os
import statistics
import subprocess
import sys
import tempfile
import time
from pathlib import Path

from gainbench_resources import demo_sheet, demo_sheet_names

LIBRARY = "gainbench.assess, gainbench.sheetfile"
BASE = "numpy, scipy.linalg"
IMPORT = "import time; start = time.perf_counter(); import {}; print(time.perf_counter() - start)"
WINDOW = """
import sys, time
from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QApplication
from gainbench_app.session import open_window
application = QApplication(sys.argv[:1])
def look():
    if any(window.isVisible() and window.isEnabled() for window in application.topLevelWidgets()):
        print(time.time(), flush=True)
        application.exit(0)
        QTimer.singleShot(0, application.closeAllWindows)
timer = QTimer()
timer.timeout.connect(look)
timer.start(5)
open_window(sys.argv[1])
"""


def seconds(command: list[str], environment: dict[str, str]) -> float:
    """Wall time of a process that must end well."""
    start = time.perf_counter()
    subprocess.run(command, env=environment, stdout=subprocess.DEVNULL, check=True)
    return time.perf_counter() - start


def import_seconds(modules: str, environment: dict[str, str]) -> float:
    """Time that an import takes in a fresh process."""
    command = [sys.executable, "-c", IMPORT.format(modules)]
    return float(subprocess.run(command, env=environment, capture_output=True, text=True, check=True).stdout)


def window_seconds(sheet: str, environment: dict[str, str]) -> tuple[float | None, str]:
    """Time to a usable window, or why there is none."""
    start = time.time()
    done = subprocess.run(
        [sys.executable, "-c", WINDOW, sheet],
        env={**environment, "QT_QPA_PLATFORM": "offscreen"},
        capture_output=True,
        text=True,
        timeout=120,
        check=False,
    )
    words = done.stdout.split()
    if done.returncode != 0 or not words:
        return None, (done.stderr.strip().splitlines() or ["the window did not open"])[-1]
    return float(words[0]) - start, ""


def measure(repeats: int) -> dict[str, object]:
    """All figures, each a median of ``repeats``."""
    environment = dict(os.environ)
    with tempfile.TemporaryDirectory() as folder:
        name = demo_sheet_names()[0]
        sheet = Path(folder) / f"{name}.bench.toml"
        sheet.write_text(demo_sheet(name).read_text(encoding="utf-8"), encoding="utf-8")
        assess = [sys.executable, "-m", "gainbench_app.start", "assess", str(sheet)]
        cold = seconds(assess, {**environment, "NUMBA_CACHE_DIR": str(Path(folder) / "cache")})
        seconds(assess, environment)
        warm = [seconds(assess, environment) for _ in range(repeats)]
        library, base = [], []
        for _ in range(repeats):
            library.append(import_seconds(LIBRARY, environment))
            base.append(import_seconds(BASE, environment))
        windows = [window_seconds(str(sheet), environment) for _ in range(repeats)]
    shown = [value for value, _ in windows if value is not None]
    return {
        "assess_s": statistics.median(warm),
        "assess_cold_s": cold,
        "import_ratio": statistics.median(library) / statistics.median(base),
        "import_s": statistics.median(library),
        "window_s": statistics.median(shown) if shown else None,
        "window_reason": "" if shown else windows[0][1],
        "repeats": repeats,
    }


def main() -> None:
    """Measure and print."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--json", action="store_true", help="print one JSON object")
    parser.add_argument("--repeats", type=int, default=5, help="processes for each median (default 5)")
    arguments = parser.parse_args()
    figures = measure(max(1, arguments.repeats))
    if arguments.json:
        sys.stdout.write(json.dumps(figures, allow_nan=False) + "\n")
        return
    for name, value in figures.items():
        sys.stdout.write(f"{name:<16}{value:.3g}\n" if isinstance(value, float) else f"{name:<16}{value}\n")


if __name__ == "__main__":
    main()
