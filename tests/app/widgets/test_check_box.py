from PySide6.QtCore import Qt

from gainbench_app.theme import DARK
from gainbench_app.widgets.check_box import CheckBox


def test_it_is_ticked_by_mouse_and_keyboard(qtbot, appearance):
    box = CheckBox("hold gains", "hold the gains of the speed loop", appearance)
    qtbot.addWidget(box)
    heard = []
    box.clicked.connect(lambda on: heard.append(on))
    qtbot.mouseClick(box, Qt.MouseButton.LeftButton)
    qtbot.keyClick(box, Qt.Key.Key_Space)
    assert heard == [True, False]
    assert box.accessibleName() == "hold the gains of the speed loop"


def test_a_tick_tells_that_it_is_on(qtbot, appearance):
    box = CheckBox("hold gains", "hold", appearance)
    qtbot.addWidget(box)
    off = box.grab().toImage()
    box.setChecked(True)
    on = box.grab().toImage()
    assert on != off
    appearance.show(DARK)
    assert box.grab().toImage() != on
    box.setEnabled(False)
    assert not box.grab().isNull()


def test_its_words_fit(qtbot, appearance):
    box = CheckBox("hold gains", "hold", appearance)
    qtbot.addWidget(box)
    assert box.sizeHint().width() > box.fontMetrics().horizontalAdvance("hold gains") + 12
