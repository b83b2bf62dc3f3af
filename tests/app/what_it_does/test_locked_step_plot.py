import numpy as np
import pytest
from PySide6.QtCore import QPoint
from PySide6.QtWidgets import QWidget

from gainbench.assess import assess
from gainbench.results import LockedStep
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_it_does.locked_step_plot import LockedStepPlot


@pytest.fixture
def plot(qtbot, appearance):
    holder = QWidget()
    holder.resize(380, 300)
    qtbot.addWidget(holder)
    found = LockedStepPlot(appearance, holder)
    found.resize(360, 280)
    with qtbot.waitExposed(holder):
        holder.show()
    yield found
    holder.hide()


def step_of(demo_texts, name="label-unwinder"):
    return assess(parse_sheet(demo_texts[name], "x.bench.toml").sheet).locked_step


@pytest.mark.parametrize("name", ["label-unwinder", "sieve-drum", "bottle-indexer"])
def test_rise_and_peak_are_in_sight(plot, demo_texts, name):
    step = step_of(demo_texts, name)
    plot.show_step(step)
    axes = plot.panels()[0]
    assert axes.y.high > float(step.current.max())
    assert step.rise_s < 0.5 * plot.end
    assert float(step.time[int(np.argmax(step.current))]) < plot.end <= float(step.time[-1])
    assert f"overshoot {step.overshoot_percent:.1f} %" in plot.accessibleDescription()
    assert not plot.grab().isNull()


def test_marks_are_where_the_figures_are(plot, demo_texts, qtbot):
    step = step_of(demo_texts)
    plot.show_step(step)
    axes = plot.panels()[0]
    with_marks = plot.grab().toImage()
    plain = LockedStep(rise_s=None, overshoot_percent=None, time=step.time, current=step.current)
    plot.show_step(plain)
    without = plot.grab().toImage()
    differs = [
        (x, y)
        for x in range(with_marks.width())
        for y in range(with_marks.height())
        if with_marks.pixel(x, y) != without.pixel(x, y)
    ]
    assert differs
    first = float(
        np.interp(0.1, step.current[: int(np.argmax(step.current)) + 1], step.time[: int(np.argmax(step.current)) + 1])
    )
    left = min(x for x, _ in differs)
    assert left == pytest.approx(float(axes.across(first)), abs=4.0)
    top = min(y for _, y in differs)
    assert top <= float(axes.down(float(step.current.max()))) + 2.0
    assert plot.accessibleDescription() == ""


def test_the_cursor_reads_out(plot, demo_texts, qtbot):
    plot.show_step(step_of(demo_texts))
    # A pointer that is there already does not move.
    qtbot.mouseMove(plot, QPoint(1, 1))
    before = plot.grab().toImage()
    box = plot.panels()[0].box
    qtbot.mouseMove(plot, QPoint(round(box.center().x()), round(box.center().y())))
    assert plot.grab().toImage() != before


def test_without_a_step_it_says_so(plot):
    plot.show_step(None)
    assert plot.step is None
    assert not plot.grab().isNull()
