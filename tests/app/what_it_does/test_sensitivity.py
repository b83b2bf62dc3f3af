import numpy as np
import pytest
from PySide6.QtCore import QPoint
from PySide6.QtWidgets import QWidget

from gainbench.assess import assess
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_it_does.sensitivity import SensitivityPlot, sensitivity_curve


@pytest.fixture
def loops(demo_texts):
    found = assess(parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").sheet)
    return {"speed": found.speed, "current": found.current}


@pytest.fixture
def plot(qtbot, appearance):
    holder = QWidget()
    holder.resize(380, 300)
    qtbot.addWidget(holder)
    found = SensitivityPlot(appearance, holder)
    found.resize(360, 280)
    with qtbot.waitExposed(holder):
        holder.show()
    yield found
    holder.hide()


@pytest.mark.parametrize("name", ["speed", "current"])
def test_the_peak_of_the_curve_is_the_figure(loops, name):
    curve = sensitivity_curve(loops[name])
    assert curve.peak == loops[name].figures.peak_sensitivity
    assert 10.0 ** (float(curve.level_db.max()) / 20.0) == pytest.approx(curve.peak, rel=1e-3)
    at = int(np.argmax(curve.level_db))
    assert curve.peak_hz == curve.frequency_hz[at]
    # Far below the crossover the loop holds off what disturbs it.
    assert curve.level_db[0] < -20.0


def test_an_unstable_loop_has_no_sensitivity(demo_texts):
    values = {"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"}
    found = assess(parse_sheet(demo_texts["label-unwinder"], "x.bench.toml").with_values(values).sheet)
    assert sensitivity_curve(found.speed) is None
    assert sensitivity_curve(found.current) is not None


def test_both_loops_are_drawn_with_their_peaks(plot, loops, qtbot):
    plot.show_loops(loops)
    assert set(plot.curves) == {"speed", "current"}
    assert "speed loop peak 1.24" in plot.accessibleDescription()
    axes = plot.panels()[0]
    assert axes.y.high > max(float(one.level_db.max()) for one in plot.curves.values())
    # A pointer that is there already does not move.
    qtbot.mouseMove(plot, QPoint(1, 1))
    before = plot.grab().toImage()
    qtbot.mouseMove(plot, QPoint(round(axes.box.center().x()), round(axes.box.center().y())))
    assert plot.grab().toImage() != before
    plot.show_loops({"current": loops["current"]})
    assert "speed" not in plot.accessibleDescription()


def test_without_a_stable_loop_it_says_so(plot):
    plot.show_loops({})
    assert plot.accessibleDescription() == "no stable loop"
    assert not plot.grab().isNull()
