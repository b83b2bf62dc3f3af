from PySide6.QtWidgets import QLineEdit, QScrollArea, QVBoxLayout, QWidget

from gainbench_app.widgets.revealing import reveal


def test_what_was_scrolled_away_comes_into_sight_with_the_focus(qtbot):
    inner = QWidget()
    layout = QVBoxLayout(inner)
    boxes = [QLineEdit(f"{number} ohm") for number in range(40)]
    for box in boxes:
        layout.addWidget(box)
    area = QScrollArea()
    area.setWidgetResizable(True)
    area.setWidget(inner)
    area.resize(200, 150)
    qtbot.addWidget(area)
    with qtbot.waitExposed(area):
        area.show()
    area.activateWindow()
    assert boxes[30].visibleRegion().isEmpty()
    reveal(boxes[30])
    assert not boxes[30].visibleRegion().isEmpty()
    assert boxes[30].hasFocus()
    assert boxes[30].selectedText() == "30 ohm"
    area.hide()
