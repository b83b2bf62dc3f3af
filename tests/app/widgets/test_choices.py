from PySide6.QtCore import Qt

from gainbench_app.theme import DARK
from gainbench_app.widgets.choices import Choices


def test_one_word_is_chosen(qtbot):
    choices = Choices("span", ("whole", "step", "load"), tips={"step": "key 2"})
    qtbot.addWidget(choices)
    assert choices.word == "whole"
    qtbot.mouseClick(choices.buttons["load"], Qt.MouseButton.LeftButton)
    assert choices.word == "load"
    choices.choose("step")
    assert choices.word == "step"
    assert [button.isChecked() for button in choices.buttons.values()] == [False, True, False]
    assert choices.buttons["step"].toolTip() == "key 2"
    assert choices.buttons["step"].accessibleName() == "span: step"


def test_none_can_be_chosen(qtbot):
    choices = Choices("span", ("whole", "step"))
    qtbot.addWidget(choices)
    choices.clear()
    assert choices.word == ""
    qtbot.keyClick(choices.buttons["step"], Qt.Key.Key_Space)
    assert choices.word == "step"


def test_samples_follow_the_theme(qtbot, appearance):
    choices = Choices("loops", ("both", "speed"), appearance=appearance, samples={"speed": "speed"})
    qtbot.addWidget(choices)
    assert choices.buttons["both"].icon().isNull()
    light = choices.buttons["speed"].icon().pixmap(32, 24).toImage()
    appearance.show(DARK)
    assert choices.buttons["speed"].icon().pixmap(32, 24).toImage() != light
