"""From an input event to painted pixels: ``python tests/benchmarks/window_latency.py --json``.

The window is 1400 x 900 with response, Bode plot and third view shown and two kept tunings drawn; both cores are used.
Events come at a rate for some seconds, whether the window is ready for them or not: the mouse drags a slider, drags the
point of a reach map, an arrow key repeats, or a value is typed. Each event counts from when it was due until the first
frame whose curves show it, or a later one, is painted; and once more until its words are, which may be the same frame.
The floor is a plain widget of the same size with a cached background that paints the same curves for the same events,
without computing anything; floor and window take turns.

Keys of the JSON, first offscreen, then once more below ``xvfb`` (null with its reason where there is no Xvfb):
``ratio_30``, ``ratio_60``, ``ratio_200``: p95 over the floor's p95 at so many events a second; ``p95_ms_30`` and so on
in ms, ``floor_p95_ms_30`` and so on, ``words_p95_ms_30`` and so on for the words; ``reach_p95_ms_60``,
``key_p95_ms_30``, ``typed_p95_ms_4``; ``compute_ms`` and ``paint_ms``, the medians of one frame's parts;
``last_painted``: whether the last event was shown every time.
"""

from __future__ import annotations

import argparse
import json
import math
import os
import shutil
import statistics
import subprocess
import sys
import time
from collections.abc import Callable, Iterator
from dataclasses import dataclass, field
from itertools import chain, count, cycle

RATES = (30, 60, 200)
SIZE = (1400, 900)
TUNINGS = (("softer", "38 Hz", "66 deg"), ("harder", "90 Hz", "45 deg"))
DISPLAYS = range(90, 120)


@dataclass(slots=True)
class Run:
    """What was seen of one stretch of events."""

    waits: list[float] = field(default_factory=list)
    computes: list[float] = field(default_factory=list)
    paints: list[float] = field(default_factory=list)
    due: list[float] = field(default_factory=list)
    """Of events that were sent and are not painted yet."""
    ready: int = 0
    """How many of them the next frame shows."""
    word_waits: list[float] = field(default_factory=list)
    unsaid: list[float] = field(default_factory=list)
    """Due times of the events whose words are not painted yet."""
    said: int = 0
    """How many of them the next frame says."""
    last_painted: bool = True

    @property
    def p95_ms(self) -> float:
        """95 % of the events were painted within it [ms]."""
        return _p95_ms(self.waits)

    @property
    def words_p95_ms(self) -> float:
        """The same until the words were painted as well [ms]."""
        return _p95_ms(self.word_waits)


def _p95_ms(waits: list[float]) -> float:
    return 1e3 * sorted(waits)[math.ceil(0.95 * len(waits)) - 1]


def main() -> None:
    """Measure, and print."""
    parser = argparse.ArgumentParser(description=__doc__, formatter_class=argparse.RawDescriptionHelpFormatter)
    parser.add_argument("--json", action="store_true", help="print JSON")
    parser.add_argument("--seconds", type=float, default=5.0, help="of each stretch of events")
    parser.add_argument("--platform", choices=("both", "offscreen", "xcb"), default="both")
    options = parser.parse_args()
    if options.platform == "both":
        found = here("offscreen", options.seconds)
        found["xvfb"] = under_xvfb(options.seconds)
    else:
        found = measured(options.platform, options.seconds)
    if options.json:
        sys.stdout.write(json.dumps(found, indent=2) + "\n")
    else:
        for key, value in found.items():
            sys.stdout.write(f"{key}: {value}\n")


def here(platform: str, seconds: float, display: str = "") -> dict[str, object]:
    """Measure in a process of its own: Qt has one platform for each."""
    environment = {**os.environ, "QT_QPA_PLATFORM": platform} | ({"DISPLAY": display} if display else {})
    command = [sys.executable, __file__, "--json", "--seconds", str(seconds), "--platform", platform]
    done = subprocess.run(command, env=environment, capture_output=True, text=True, check=True)
    return json.loads(done.stdout)


def under_xvfb(seconds: float) -> dict[str, object] | str:
    """The same under an X server that paints into memory."""
    server = shutil.which("Xvfb")
    if server is None:
        return "there is no Xvfb here"
    for number in DISPLAYS:
        process = subprocess.Popen(
            [server, f":{number}", "-screen", "0", "1600x1000x24", "-nolisten", "tcp"], stderr=subprocess.DEVNULL
        )
        try:
            time.sleep(1.0)
            if process.poll() is None:
                return here("xcb", seconds, f":{number}")
        finally:
            process.terminate()
            process.wait()
    return "no display was free"


def measured(platform: str, seconds: float) -> dict[str, object]:
    """All stretches on one platform."""
    os.environ["QT_QPA_PLATFORM"] = platform
    if hasattr(os, "sched_setaffinity"):
        os.sched_setaffinity(0, set(sorted(os.sched_getaffinity(0))[:2]))
    bench = Bench(seconds)
    found: dict[str, object] = {"platform": platform, "seconds": seconds}
    runs: list[Run] = []
    for rate in RATES:
        floor = bench.floor_run(rate)
        run = bench.slider_run(rate)
        runs.append(run)
        found[f"ratio_{rate}"] = round(run.p95_ms / floor.p95_ms, 2)
        found[f"p95_ms_{rate}"] = round(run.p95_ms, 2)
        found[f"floor_p95_ms_{rate}"] = round(floor.p95_ms, 2)
        found[f"words_p95_ms_{rate}"] = round(run.words_p95_ms, 2)
        found[f"median_ms_{rate}"] = round(1e3 * statistics.median(run.waits), 2)
    for name, rate, measure in (
        ("reach", 60, bench.reach_run),
        ("key", 30, bench.key_run),
        ("typed", 4, bench.typed_run),
    ):
        run = measure(rate)
        runs.append(run)
        found[f"{name}_p95_ms_{rate}"] = round(run.p95_ms, 2)
    found["compute_ms"] = round(1e3 * statistics.median(chain.from_iterable(one.computes for one in runs[:2])), 2)
    found["paint_ms"] = round(1e3 * statistics.median(chain.from_iterable(one.paints for one in runs[:2])), 2)
    found["last_painted"] = all(one.last_painted for one in runs)
    return found


def swing(low: float, high: float, steps: int = 90) -> Iterator[float]:
    """Places between two ends, to and fro."""
    for step in cycle([*range(steps), *range(steps, 0, -1)]):
        yield low + (high - low) * step / steps


class Bench:
    """A window with everything in it, and a floor beside it."""

    def __init__(self, seconds: float) -> None:
        from PySide6.QtCore import QEvent
        from PySide6.QtWidgets import QApplication, QWidget

        from gainbench.assess import warm_up
        from gainbench.sheetfile import parse_sheet
        from gainbench_app import desk as desk_module
        from gainbench_app.desk import Desk
        from gainbench_app.theme import LIGHT, body_font, palette, style_sheet
        from gainbench_app.widgets.appearance import Appearance
        from gainbench_app.window import Window
        from gainbench_resources import demo_sheet

        self.seconds = seconds
        self.application = QApplication([])
        self.application.setStyle("Fusion")
        self.application.setFont(body_font())
        self.application.setPalette(palette(LIGHT))
        self.application.setStyleSheet(style_sheet(LIGHT))
        warm_up()
        self.run = Run()
        bench = self

        class TimedWindow(Window):
            """Tells when a frame is painted."""

            def event(self, event: QEvent) -> bool:
                if event.type() != QEvent.Type.UpdateRequest:
                    return super().event(event)
                start = time.perf_counter()
                done = super().event(event)
                bench.painted(time.perf_counter() - start)
                return done

        class Floor(QWidget):
            """Paints what the window has painted: a picture behind, and curves over it."""

            def __init__(self, picture: object, curves: list[Callable[[object, int], None]]) -> None:
                super().__init__()
                self._picture, self._curves = picture, curves
                self.shift = 0
                self.resize(*SIZE)

            def paintEvent(self, event: object) -> None:  # noqa: N802
                from PySide6.QtGui import QPainter

                with QPainter(self) as painter:
                    painter.drawPixmap(0, 0, self._picture)
                    painter.setRenderHint(QPainter.RenderHint.Antialiasing)
                    for curve in self._curves:
                        curve(painter, self.shift)

            def event(self, event: QEvent) -> bool:
                if event.type() != QEvent.Type.UpdateRequest:
                    return super().event(event)
                start = time.perf_counter()
                done = super().event(event)
                bench.painted(time.perf_counter() - start)
                return done

        plain = desk_module.assess

        def timed(*arguments: object, **named: object) -> object:
            start = time.perf_counter()
            found = plain(*arguments, **named)
            self.run.computes.append(time.perf_counter() - start)
            return found

        desk_module.assess = timed
        file = demo_sheet("label-unwinder")
        self.desk = Desk(parse_sheet(file.read_text(encoding="utf-8"), file.name))
        self.desk.compute_now()
        self.window = TimedWindow(self.desk, appearance=Appearance(LIGHT))
        self.window.resize(*SIZE)
        self.window.show()
        self.window.activateWindow()
        for name, crossover, margin in TUNINGS:
            self.desk.set_values({"aims.speed.crossover": crossover, "aims.speed.phase_margin": margin})
            self.desk.compute_now()
            self.window.shelf.shelf.keep(name)
        self.desk.set_values({"aims.speed.crossover": "60 Hz", "aims.speed.phase_margin": "60 deg"})
        self.desk.compute_now()
        self.window.shelf.shelf.compute_now()
        self.rest(0.5)
        assert len(self.desk.shown_kept) == len(TUNINGS)
        assert (self.window.width(), self.window.height()) == SIZE
        self.floor = Floor(self.window.grab(), self._curves())
        self.desk.assessed.connect(self._computed)
        self.desk.words_due.connect(self._told)
        self.window.settle_memory()

    def _curves(self) -> list[Callable[[object, int], None]]:
        """The lines and bands of the plots that are shown, where they are in the window."""
        from PySide6.QtCore import QPoint

        from gainbench_app.widgets.figure import Figure

        found = []
        for figure in self.window.what_it_does.findChildren(Figure):
            if figure.isVisible():
                at = figure.mapTo(self.window, QPoint(0, 0))
                panels = figure.panels()

                def curve(
                    painter: object, shift: int, figure: Figure = figure, panels: object = panels, at: QPoint = at
                ) -> None:
                    painter.save()
                    painter.translate(at.x() + 0.01 * shift, at.y())
                    painter.setFont(figure.small_font())
                    figure.paint_curves(painter, panels)
                    painter.restore()

                found.append(curve)
        return found

    # What is seen

    def _computed(self) -> None:
        self.run.ready = len(self.run.due)

    def _told(self) -> None:
        self.run.said = len(self.run.unsaid)

    def painted(self, took: float) -> None:
        """A frame is on the screen."""
        run, now = self.run, time.perf_counter()
        if run.ready:
            run.paints.append(took)
            run.waits += [now - due for due in run.due[: run.ready]]
            del run.due[: run.ready]
            run.ready = 0
        run.word_waits += [now - due for due in run.unsaid[: run.said]]
        del run.unsaid[: run.said]
        run.said = 0

    def rest(self, seconds: float) -> None:
        """Let the window do what it wants to."""
        until = time.perf_counter() + seconds
        while time.perf_counter() < until:
            self.application.processEvents()
            time.sleep(0.001)

    def stretch(self, rate: float, act: Callable[[int], None]) -> Run:
        """Send events at a rate; each is due when it is due, however long the one before took."""
        from PySide6.QtCore import QEventLoop, Qt, QTimer

        self.rest(0.3)
        run = self.run = Run()
        loop = QEventLoop()
        timer = QTimer()
        timer.setTimerType(Qt.TimerType.PreciseTimer)
        start = time.perf_counter()
        sent = count()
        state = {"next": next(sent)}

        def send() -> None:
            now = time.perf_counter() - start
            if now >= self.seconds:
                timer.stop()
                loop.quit()
                return
            while state["next"] / rate <= now:
                run.due.append(start + state["next"] / rate)
                run.unsaid.append(run.due[-1])
                act(state["next"])
                state["next"] = next(sent)

        timer.timeout.connect(send)
        timer.start(1)
        loop.exec()
        self.rest(0.3)
        run.last_painted = not run.due and not run.unsaid
        return run

    # Stretches of events

    def floor_run(self, rate: float) -> Run:
        """The floor: each event asks for a frame, and the frame shows it."""
        self.window.hide()
        self.floor.show()

        def act(number: int) -> None:
            self.floor.shift = number % 100
            self.floor.update()
            self._computed()
            self._told()

        found = self.stretch(rate, act)
        self.floor.hide()
        self.window.show()
        self.window.activateWindow()
        self.rest(0.3)
        return found

    def _mouse(self, widget: object, kind: str, x: float, y: float) -> None:
        from PySide6.QtCore import QEvent, QPointF, Qt
        from PySide6.QtGui import QMouseEvent

        at = QPointF(x, y)
        button = Qt.MouseButton.NoButton if kind == "MouseMove" else Qt.MouseButton.LeftButton
        held = Qt.MouseButton.NoButton if kind == "MouseButtonRelease" else Qt.MouseButton.LeftButton
        event = QMouseEvent(
            getattr(QEvent.Type, kind), at, widget.mapToGlobal(at), button, held, Qt.KeyboardModifier.NoModifier
        )
        self.application.sendEvent(widget, event)

    def slider_run(self, rate: float) -> Run:
        """The mouse drags the crossover of the speed loop to and fro; each step is another place."""
        slider = self.window.what_we_ask.speed.row("crossover").slider
        places = swing(0.35 * slider.width(), 0.62 * slider.width())
        self._mouse(slider, "MouseButtonPress", next(places), slider.height() / 2.0)
        found = self.stretch(rate, lambda _: self._mouse(slider, "MouseMove", next(places), slider.height() / 2.0))
        at = slider.number
        self._mouse(slider, "MouseButtonRelease", next(places), slider.height() / 2.0)
        self.rest(0.6)
        found.last_painted &= self.desk.assessment is not None and math.isclose(
            at, self.desk.assessment.sheet.aims.speed.crossover, rel_tol=1e-9
        )
        self.desk.undo()
        return found

    def reach_run(self, rate: float) -> Run:
        """The mouse drags the point of the speed loop's reach map in a circle."""
        from gainbench_app.widgets.reach_plot import ReachPlot

        plot = next(one for one in self.window.what_we_ask.speed.findChildren(ReachPlot) if one.isVisible())
        view = plot.view
        assert view is not None
        assert view.point is not None
        at = plot.place_of(view.point)
        self._mouse(plot, "MouseButtonPress", at.x(), at.y())
        found = self.stretch(
            rate,
            lambda number: self._mouse(
                plot, "MouseMove", at.x() - 12.0 + 12.0 * math.cos(0.1 * number), at.y() + 8.0 * math.sin(0.1 * number)
            ),
        )
        self._mouse(plot, "MouseButtonRelease", at.x(), at.y())
        self.rest(0.6)
        self.desk.undo()
        return found

    def key_run(self, rate: float) -> Run:
        """An arrow key repeats on the slider of the speed loop's crossover."""
        from PySide6.QtCore import Qt
        from PySide6.QtTest import QTest

        slider = self.window.what_we_ask.speed.row("crossover").slider
        slider.setFocus()

        def act(number: int) -> None:
            key = Qt.Key.Key_Left if number // 20 % 2 == 0 else Qt.Key.Key_Right
            QTest.keyClick(slider, key)

        found = self.stretch(rate, act)
        self.window.on_bench.cards[0].head.setFocus()
        self.rest(0.9)
        self.desk.undo()
        return found

    def typed_run(self, rate: float) -> Run:
        """A value is typed and taken, through the sheet's own reader."""
        from PySide6.QtCore import Qt
        from PySide6.QtTest import QTest

        box = self.window.on_bench.row("train.load_inertia").box

        def act(number: int) -> None:
            box.setFocus()
            box.selectAll()
            QTest.keyClicks(box, f"{3.6 + 0.1 * (number % 9 + 1):.1f} kg*cm^2")
            QTest.keyClick(box, Qt.Key.Key_Return)

        return self.stretch(rate, act)


if __name__ == "__main__":
    main()
