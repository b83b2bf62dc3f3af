import math

import pytest
from PySide6.QtCore import QPoint
from PySide6.QtGui import QColor
from PySide6.QtWidgets import QWidget

from gainbench.assess import assess
from gainbench.ledger import phase_ledger
from gainbench.sheetfile import parse_sheet
from gainbench_app.theme import LIGHT
from gainbench_app.what_it_does.ledger_view import LEFT_OVER, LedgerRow, LedgerRows, LedgerView, ledger_rows


def assessed(demo_texts, values=None, name="label-unwinder"):
    document = parse_sheet(demo_texts[name], f"{name}.bench.toml")
    return assess((document.with_values(values) if values else document).sheet)


@pytest.fixture
def view(qtbot, appearance):
    holder = QWidget()
    holder.resize(380, 300)
    qtbot.addWidget(holder)
    found = LedgerView(appearance, holder)
    found.resize(360, 280)
    with qtbot.waitExposed(holder):
        holder.show()
    yield found
    holder.hide()


@pytest.mark.parametrize("loop", ["speed", "current"])
@pytest.mark.parametrize("name", ["label-unwinder", "sieve-drum", "bottle-indexer"])
def test_bars_follow_each_other_and_add_up_to_half_a_turn(demo_texts, name, loop):
    found = assessed(demo_texts, name=name)
    rows = ledger_rows(found, loop)
    figures = getattr(found, loop).figures
    assert rows.frequency_hz == pytest.approx(figures.crossover_hz)
    assert rows.rows[-1].name == LEFT_OVER
    assert rows.rows[-1].stop == 180.0
    assert rows.rows[-1].degrees == pytest.approx(figures.phase_margin_deg, abs=1e-6)
    assert sum(row.degrees for row in rows.rows) == pytest.approx(180.0, abs=0.5)
    for before, after in zip(rows.rows, rows.rows[1:], strict=False):
        # What is too small for a bar leaves a gap smaller than one.
        assert after.start == pytest.approx(before.stop, abs=0.3)


def test_what_takes_nothing_has_no_bar(demo_texts):
    found = assessed(demo_texts)
    entries = {one.name for one in phase_ledger(found, "speed").entries}
    names = [row.name for row in ledger_rows(found, "speed").rows]
    assert "feedforward" in entries
    assert "feedforward" not in names
    assert names == ["plant", "PI", "closed current loop", "speed window", "speed hold", LEFT_OVER]


def test_it_says_what_a_change_would_give(demo_texts):
    assert ledger_rows(assessed(demo_texts), "speed").change == "Twice the speed_rate would give back about 5.4°."
    late = assessed(demo_texts, {"stage.update_delay": 2.0})
    assert "update_delay" in ledger_rows(late, "current").change


def test_an_unstable_loop_has_less_than_nothing_left(demo_texts):
    values = {"aims.speed.method": "by-hand", "aims.speed.kp": "9 A*s/rad", "aims.speed.ki": "50 A/rad"}
    rows = ledger_rows(assessed(demo_texts, values), "speed")
    assert rows.rows[-1].kind == "left"
    assert rows.rows[-1].degrees < 0.0


def test_without_a_current_loop_there_is_no_ledger(demo_texts):
    assert ledger_rows(assessed(demo_texts, {"aims.current.crossover": "9 kHz"}), "speed") is None


def test_bars_are_as_long_as_their_degrees(view, demo_texts):
    view.show_ledger(ledger_rows(assessed(demo_texts), "speed"))
    image = view.grab().toImage()
    axes = view.panels()[0]
    rows = view.shown.rows
    height = axes.box.height() / len(rows)

    def painted(row, colour):
        y = round(axes.box.top() + (row + 0.5) * height)
        return sum(image.pixelColor(x, y) == QColor(colour) for x in range(image.width()))

    degree = axes.box.width() / axes.x.span
    assert painted(0, LIGHT.mixed(LIGHT.speed, 0.42)) == pytest.approx(rows[0].degrees * degree, abs=2.0)
    assert painted(1, LIGHT.speed) == pytest.approx(rows[1].degrees * degree, abs=2.0)
    assert painted(len(rows) - 1, LIGHT.holds) == pytest.approx(rows[-1].degrees * degree, abs=3.0)


def test_it_tells_itself_in_words_and_what_is_below_the_mouse(view, demo_texts, qtbot):
    view.show_ledger(ledger_rows(assessed(demo_texts), "speed"))
    assert "speed loop at 60.0" in view.accessibleDescription()
    assert "PI 17.1°" in view.accessibleDescription()
    # A pointer that is there already does not move.
    qtbot.mouseMove(view, QPoint(1, 1))
    before = view.grab().toImage()
    axes = view.panels()[0]
    qtbot.mouseMove(view, QPoint(round(axes.box.center().x()), round(axes.box.top() + 6.0)))
    assert view.grab().toImage() != before


def test_a_lead_goes_back_and_a_debt_is_hatched(view):
    rows = (
        LedgerRow(name="plant", start=0.0, stop=120.0, what="", kind="plant"),
        LedgerRow(name="PI", start=120.0, stop=240.0, what="", kind="taken"),
        LedgerRow(name="feedforward", start=240.0, stop=215.0, what="", kind="given"),
        LedgerRow(name=LEFT_OVER, start=215.0, stop=180.0, what="", kind="left"),
    )
    view.show_ledger(LedgerRows(loop="speed", frequency_hz=60.0, rows=rows, change=""))
    assert view.panels()[0].x.high == 270.0
    image = view.grab().toImage()
    axes = view.panels()[0]
    height = axes.box.height() / 4
    inside = QPoint(round(float(axes.across(228.0))), round(axes.box.top() + 2.5 * height))
    assert QColor(image.pixel(inside)) == QColor(LIGHT.card)
    y = round(axes.box.top() + 3.5 * height)
    assert any(image.pixelColor(x, y) == QColor(LIGHT.breaks) for x in range(image.width()))


def test_without_a_crossover_it_says_so(view):
    view.show_ledger(None)
    assert not view.grab().isNull()
    assert math.isclose(view.panels()[0].x.high, 180.0)
