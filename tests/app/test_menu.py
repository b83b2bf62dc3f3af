import pytest
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QWidget

from gainbench_app.menu import WindowMenu
from gainbench_app.theme import Scheme


@pytest.fixture
def menu(qtbot):
    parent = QWidget()
    qtbot.addWidget(parent)
    found = WindowMenu(("label-unwinder", "sieve-drum"), parent)
    yield found
    parent.close()


def test_demo_sheets_are_told_by_their_names(menu):
    heard = []
    menu.demo_chosen.connect(heard.append)
    menu.demos.actions()[1].trigger()
    assert menu.demos.actions()[1].text() == "Sieve drum"
    assert heard == ["sieve-drum"]


def test_one_theme_is_marked(menu):
    heard = []
    menu.scheme_chosen.connect(heard.append)
    menu.show_scheme(Scheme.DARK)
    assert [one for one, action in menu.schemes.items() if action.isChecked()] == [Scheme.DARK]
    menu.schemes[Scheme.FOLLOW].trigger()
    assert heard == [Scheme.FOLLOW]


def test_every_action_has_its_keys(menu):
    assert menu.undo.shortcut() == QKeySequence(QKeySequence.StandardKey.Undo)
    assert QKeySequence("Ctrl+Y") in menu.redo.shortcuts()
    assert {menu.undo, menu.redo, menu.save_as, menu.quit} <= set(menu.parentWidget().actions())


def test_recent_sheets_are_told_by_their_paths(menu):
    heard = []
    menu.recent_chosen.connect(heard.append)
    assert not menu.recent.isEnabled()
    menu.show_recent(["a/motor & fan.bench.toml", "b/x.bench.toml"])
    assert [action.text() for action in menu.recent.actions()] == ["motor && fan.bench.toml", "x.bench.toml"]
    menu.recent.actions()[0].trigger()
    assert heard == ["a/motor & fan.bench.toml"]


def test_one_size_is_marked(menu):
    heard = []
    menu.scale_chosen.connect(heard.append)
    menu.show_scale(125)
    assert [one for one, action in menu.scales.items() if action.isChecked()] == [125]
    menu.scales[200].trigger()
    assert heard == [200]
