from gainbench_app.keep_dialog import KeepDialog, NamedTuning


def test_a_name_and_a_note_are_asked_for(qtbot):
    dialog = KeepDialog("tuning 2")
    qtbot.addWidget(dialog)
    assert dialog.named() == NamedTuning(name="tuning 2")
    dialog.name.selectAll()
    qtbot.keyClicks(dialog.name, " softer ")
    qtbot.keyClicks(dialog.note, "before the belt")
    assert dialog.named() == NamedTuning(name="softer", note="before the belt")
    dialog.name.clear()
    assert not dialog.keep.isEnabled()
