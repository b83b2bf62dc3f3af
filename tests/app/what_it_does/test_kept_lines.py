import numpy as np
import pytest
from PySide6.QtGui import QImage

from gainbench_app.shown_tuning import PATTERNS, ShownTuning
from gainbench_app.what_it_does.kept_lines import loop_lines, time_lines
from gainbench_app.what_it_does.spans import Span


@pytest.fixture
def tuning(desk):
    desk.set_values({"aims.speed.crossover": "30 Hz"})
    desk.compute_now()
    found = ShownTuning(name="slow", assessment=desk.assessment, pattern=PATTERNS[1])
    desk.undo()
    desk.compute_now()
    return found


def test_lines_are_those_of_the_trace_in_the_units_of_the_axes(tuning):
    span = Span(start=0.1, stop=0.2)
    speed, current, voltage = time_lines((tuning,), span=span, speed_size=2.0, columns=600)
    trace = tuning.assessment.response.trace
    assert len(speed) == len(current) == len(voltage) == 1
    assert speed[0].pattern == PATTERNS[1]
    assert speed[0].x[0] == pytest.approx(0.1, abs=1e-4)
    assert speed[0].x[-1] == pytest.approx(0.2, abs=1e-4)
    np.testing.assert_allclose(np.interp(speed[0].x, trace.time, trace.speed) / 2.0, speed[0].y, rtol=1e-3)


def test_a_tuning_without_a_response_has_no_lines_over_time(desk):
    desk.set_values({"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"})
    desk.compute_now()
    unstable = ShownTuning(name="x", assessment=desk.assessment, pattern=PATTERNS[0])
    assert time_lines((unstable,), span=Span(start=0.0, stop=0.1), speed_size=1.0, columns=600) == ((), (), ())
    assert len(loop_lines((unstable,), "speed")[0]) == 1


def test_open_loops_cross_where_the_tuning_does(tuning):
    (magnitude,), (phase,) = loop_lines((tuning,), "speed")
    assert float(np.interp(30.0, magnitude.x, magnitude.y)) == pytest.approx(0.0, abs=0.05)
    assert float(np.interp(30.0, phase.x, phase.y)) == pytest.approx(-120.0, abs=0.5)


def test_they_are_drawn_below_the_live_curves_and_cost_no_drag_anything(window, desk, tuning):
    plots, bode = window.what_it_does.plots, window.what_it_does.bode
    bare = [one.grab().toImage() for one in (plots, bode)]
    desk.show_kept((tuning,))
    assert plots.kept_curves == bode.kept_curves == (tuning,)
    drawn = [one.grab().toImage() for one in (plots, bode)]
    assert all(one != other for one, other in zip(bare, drawn, strict=True))
    backgrounds = [one._background for one in (plots, bode)]
    desk.set_values({"aims.speed.crossover": "60.01 Hz"})
    desk.compute_now()
    for one in (plots, bode):
        one.grab()
    assert [one._background for one in (plots, bode)] == backgrounds
    desk.undo()
    desk.compute_now()
    desk.show_kept(())
    assert [one.grab().toImage().convertToFormat(QImage.Format.Format_RGB32) for one in (plots, bode)] == [
        one.convertToFormat(QImage.Format.Format_RGB32) for one in bare
    ]
