import pytest
from PySide6.QtCore import Qt

from gainbench.assess import assess
from gainbench.sheetfile import parse_sheet
from gainbench_app.what_it_does.third_view import LEDGER, PLANE, SENSITIVITY, STEP, ThirdSubject, ThirdView

LEFT_BUTTON = Qt.MouseButton.LeftButton


@pytest.fixture
def third(qtbot, appearance, demo_texts):
    found = ThirdView(appearance)
    qtbot.addWidget(found)
    found.resize(380, 320)
    with qtbot.waitExposed(found):
        found.show()
    found.show_subject(subject(demo_texts))
    yield found
    found.hide()


def subject(demo_texts, *, loop="speed", values=None, prepared=True):
    document = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml")
    assessment = assess((document.with_values(values) if values else document).sheet)
    return ThirdSubject(assessment=assessment, loop=loop, speed_unit="rpm", speed_size=0.1047, prepared=prepared)


def test_each_view_can_be_chosen(third, qtbot):
    told = []
    third.chosen.connect(lambda name: told.append(name))
    for name in (PLANE, SENSITIVITY, STEP, LEDGER):
        qtbot.mouseClick(third.tabs.buttons[name], LEFT_BUTTON)
        assert third.view is third.views[name]
        assert third.view.isVisible()
        assert third.view.accessibleDescription()
    assert told == [PLANE, SENSITIVITY, STEP, LEDGER]


def test_only_what_is_shown_is_computed(third, demo_texts):
    assert third.ledger.shown is not None
    assert third.step.step is None
    third.choose(STEP)
    step = third.step.step
    assert step is not None
    shown = third.ledger.shown
    third.show_subject(subject(demo_texts, values={"aims.speed.crossover": "30 Hz"}))
    assert third.ledger.shown is shown
    assert third.step.step is not step
    third.choose(LEDGER)
    assert third.ledger.shown.frequency_hz == pytest.approx(30.0)


def test_out_of_sight_nothing_is_computed(third, demo_texts):
    shown = third.ledger.shown
    third.hide()
    third.show_subject(subject(demo_texts, loop="current"))
    assert third.ledger.shown is shown
    third.show()
    third.fill_again()
    assert third.ledger.shown.loop == "current"


def test_until_its_code_is_compiled_there_is_no_ledger(third, demo_texts):
    third.show_subject(subject(demo_texts, prepared=False))
    assert third.ledger.shown is None


def test_all_of_it_is_hatched_where_the_sheet_is_not_valid(third):
    third.show_stale("last valid sheet")
    assert all(view.stale == "last valid sheet" for view in third.views.values())
