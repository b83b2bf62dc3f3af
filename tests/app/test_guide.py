"""The window of the guide: pages, links, the way back, the search, and F1 from wherever the focus is."""

from __future__ import annotations

import pytest
from PySide6.QtCore import QPoint, Qt, QUrl
from PySide6.QtGui import QColor, QTextTable
from PySide6.QtWidgets import QPushButton

from gainbench.model import Experiment
from gainbench_app.guide.look import HEADING_PX, heading_blocks
from gainbench_app.guide.pages import FIRST, GROUPS, has_place, headings
from gainbench_app.guide.view import GuideView
from gainbench_app.guide.where import GUIDE, PLACES, VIEWS, place_for
from gainbench_app.guide.window import GuideWindow
from gainbench_app.theme import DARK, LIGHT
from gainbench_app.what_it_does.third_view import PLANE

ALT, SHIFT, CTRL = (
    Qt.KeyboardModifier.AltModifier,
    Qt.KeyboardModifier.ShiftModifier,
    Qt.KeyboardModifier.ControlModifier,
)
LEFT_BUTTON = Qt.MouseButton.LeftButton
NAMES = [name for names in GROUPS.values() for name in names]


@pytest.fixture
def guide(qtbot, appearance):
    found = GuideWindow(appearance)
    qtbot.addWidget(found)
    with qtbot.waitExposed(found):
        found.show()
    found.activateWindow()
    return found


def row_of(guide, name):
    """The item of a page in the list."""
    items = [guide.pages.item(number) for number in range(guide.pages.count())]
    return next(one for one in items if one.data(Qt.ItemDataRole.UserRole) == name)


def place_of_link(view, target):
    """Where a link stands on the widget."""
    for x in range(20, view.viewport().width() - 20, 6):
        for y in range(4, view.viewport().height(), 6):
            if view.anchorAt(QPoint(x, y)) == target:
                return QPoint(x, y)
    raise AssertionError(target)


@pytest.mark.parametrize("name", NAMES)
def test_every_page_opens_from_the_list(guide, qtbot, name):
    at = guide.pages.visualItemRect(row_of(guide, name)).center()
    qtbot.mouseClick(guide.pages.viewport(), LEFT_BUTTON, pos=at)
    assert guide.view.page == name
    assert [one.text() for one in heading_blocks(guide.view.document())] == [one.text for one in headings(name)]
    assert guide.windowTitle().startswith(headings(name)[0].text)


def test_the_arrow_keys_turn_pages_and_pass_over_heads(guide, qtbot):
    guide.pages.setFocus()
    for _ in range(6):
        qtbot.keyClick(guide.pages, Qt.Key.Key_Down)
    assert guide.view.page == "locked-rotor"


def test_a_link_leads_to_its_section_and_the_way_back_to_where_one_was(guide, qtbot):
    guide.open("the-sheet", "experiments")
    view = guide.view
    left_at = view.verticalScrollBar().value()
    assert left_at > 0
    qtbot.mouseClick(view.viewport(), LEFT_BUTTON, pos=place_of_link(view, "locked-rotor.md"))
    assert view.page == "locked-rotor"
    assert guide.pages.currentItem() is row_of(guide, "locked-rotor")
    qtbot.keyClick(view, Qt.Key.Key_Left, ALT)
    assert view.page == "the-sheet"
    assert view.verticalScrollBar().value() == left_at
    assert guide.forward.isEnabled()
    qtbot.keyClick(view, Qt.Key.Key_Right, ALT)
    assert view.page == "locked-rotor"
    assert not guide.forward.isEnabled()
    qtbot.mouseClick(guide.back, LEFT_BUTTON)
    assert view.page == "the-sheet"


def test_going_elsewhere_forgets_the_way_forward(guide):
    guide.open("words")
    guide.view.go_back()
    guide.open("keys")
    assert not guide.view.can_go_forward
    guide.view.go_forward()
    assert guide.view.page == "keys"


def test_a_section_is_brought_to_the_top(guide):
    guide.open("asking", "reach-map")
    assert guide.view.section_in_sight == "reach-map"
    with pytest.raises(KeyError):
        guide.open("asking", "none")
    assert guide.view.page == "asking"


def test_a_link_out_of_the_guide_leads_nowhere(guide):
    guide.view.anchorClicked.emit(QUrl("https://example.org/words.md"))
    guide.view.anchorClicked.emit(QUrl("none.md"))
    assert guide.view.page == FIRST


def test_words_are_found_in_the_page(guide, qtbot):
    guide.open("handover")
    qtbot.keyClick(guide.view, Qt.Key.Key_F, CTRL)
    assert guide.find_bar.words.hasFocus()
    qtbot.keyClicks(guide.find_bar.words, "EMERGENCY stop")
    assert guide.find_bar.told.text() == "1 of 2"
    assert guide.view.textCursor().block().text().startswith("First run")
    qtbot.keyClick(guide.find_bar.words, Qt.Key.Key_Return)
    assert guide.find_bar.told.text() == "2 of 2"
    qtbot.keyClick(guide.find_bar.words, Qt.Key.Key_F3)
    assert guide.find_bar.told.text() == "1 of 2"
    qtbot.keyClick(guide.find_bar.words, Qt.Key.Key_Return, SHIFT)
    assert guide.find_bar.told.text() == "2 of 2"
    assert len(guide.view.extraSelections()) == 2
    qtbot.keyClicks(guide.find_bar.words, " sign")
    assert guide.find_bar.told.text() == "not on this page"
    assert not guide.find_bar.after.isEnabled()
    qtbot.keyClick(guide.find_bar.words, Qt.Key.Key_Escape)
    assert guide.find_bar.isHidden()
    assert guide.view.extraSelections() == []
    assert guide.isVisible()
    qtbot.keyClick(guide.view, Qt.Key.Key_Escape)
    assert not guide.isVisible()


def test_a_search_goes_on_in_the_next_page(guide, qtbot):
    qtbot.mouseClick(guide.find, LEFT_BUTTON)
    qtbot.keyClicks(guide.find_bar.words, "speed")
    guide.open("keys")
    assert guide.find_bar.told.text() == "not on this page"
    guide.open("driven")
    assert guide.view.found > 0
    assert guide.find_bar.told.text() == f"{guide.view.found} on this page"


def test_it_looks_like_the_house_in_both_themes(guide, appearance):
    guide.open("the-sheet")
    document = guide.view.document()
    for theme in (LIGHT, DARK, LIGHT):
        appearance.show(theme)
        first = document.begin()
        assert first.begin().fragment().charFormat().font().pixelSize() == HEADING_PX[1]
        body = first.next().begin().fragment().charFormat()
        assert (body.font().pixelSize(), body.foreground().color()) == (13, QColor(theme.ink))
        assert guide.view.page == "the-sheet"
    tables = [one for one in document.rootFrame().childFrames() if isinstance(one, QTextTable)]
    assert [one.columns() for one in tables] == [2, 4]


def test_the_theme_may_change_before_there_is_a_page(qtbot, appearance):
    view = GuideView(appearance)
    qtbot.addWidget(view)
    appearance.show(DARK)
    assert view.page == ""


def test_everything_has_a_name(guide):
    for one in guide.findChildren(QPushButton):
        assert one.accessibleName() or one.text()
    assert guide.pages.accessibleName()
    assert guide.view.accessibleName()
    assert guide.find_bar.words.accessibleName()


# F1


def test_every_place_that_a_focus_leads_to_exists():
    for place in (*(place for _, place in PLACES), *VIEWS.values(), FIRST):
        page, _, section = place.partition("#")
        assert has_place(page, section), place


def test_f1_opens_the_page_that_speaks_of_what_has_the_focus(window, qtbot):
    resistance = window.on_bench.row("machine.resistance")
    for widget, page, section in (
        (resistance.box, "the-sheet", ""),
        (resistance.tolerance, "the-sheet", "tolerance"),
        (window.what_we_ask.speed.map, "asking", "reach-map"),
        (window.what_we_ask.speed.method, "asking", "methods"),
        (window.what_we_ask.current.row("crossover").slider, "asking", "sliders-and-boxes"),
        (window.what_we_ask.firmware.head, "asking", "firmware-form"),
        (window.what_we_ask.findings.row(0), "reading", "findings"),
        (window.what_it_does.spans.buttons["whole"], "reading", "time-plots"),
        (window.shelf.table, "shelf", ""),
        (window.top.save, "first-steps", ""),
    ):
        window.activateWindow()
        widget.setFocus()
        assert widget.hasFocus()
        qtbot.keyClick(widget, Qt.Key.Key_F1)
        view = window.guide.window.view
        assert view.page == page
        assert place_for(widget) == (f"{page}#{section}" if section else page)
    assert window.guide.window.isVisible()
    assert not window.guide.window.isModal()
    window.close()
    assert not window.guide.window.isVisible()


def test_the_view_that_is_chosen_has_its_own_section(window):
    third = window.what_it_does.third
    third.choose(PLANE)
    assert place_for(third.tabs.buttons[PLANE]) == "reading#operating-plane"


def test_the_evidence_page_opens_the_recipe_of_its_experiment(window):
    window.pages.show_evidence()
    page = window.pages.evidence
    assert place_for(page.recipe.area) == "driven"
    page.recipe.show_recipe(Experiment.COAST_DOWN)
    assert place_for(page) == "coast-down"
    window.pages.show_tuning()


def test_a_widget_may_say_where_it_is_spoken_of(window):
    window.what_we_ask.findings.setProperty(GUIDE, "driven#how-to-run-it")
    assert place_for(window.what_we_ask.findings.row(0)) == "driven#how-to-run-it"
    assert place_for(None) == FIRST


def test_the_menu_opens_it_too(window):
    window.menu_of_more.guide.trigger()
    assert window.guide.window.isVisible()
    window.close()
