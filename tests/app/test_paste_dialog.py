import pytest
from PySide6.QtCore import Qt

from gainbench_app.paste_dialog import PasteDialog

ROWS = "Resistance\t0.207\tohm\nNo load current\t137\tmA\nInductance\t0.169\tmH\n"


@pytest.fixture
def dialog(qtbot, desk):
    found = PasteDialog(desk, ROWS)
    qtbot.addWidget(found)
    return found


def test_what_rows_would_set_is_shown_beside_what_is(dialog):
    shown = [[dialog.table.item(row, column).text() for column in range(3)] for row in range(3)]
    assert shown == [
        ["resistance", "0.60 ohm", "0.207 ohm"],
        ["", "", "not recognised"],
        ["inductance", "0.45 mH", "0.169 mH"],
    ]
    assert dialog.take.text() == "Set 2 entries"


def test_only_what_is_ticked_is_set(dialog, desk):
    dialog.table.item(0, 0).setCheckState(Qt.CheckState.Unchecked)
    assert dialog.values() == {"machine.inductance": "0.169 mH"}
    assert dialog.take.text() == "Set 1 entry"
    dialog.table.item(2, 0).setCheckState(Qt.CheckState.Unchecked)
    assert not dialog.take.isEnabled()
    assert desk.text("machine.resistance") == "0.60 ohm"


def test_another_text_is_read_anew(dialog):
    dialog.text.setPlainText("Rotor inertia 1 kgcm2")
    assert dialog.values() == {"machine.rotor_inertia": "1 kg*cm^2"}
    dialog.text.setPlainText("")
    assert dialog.values() == {}


def test_the_conventions_of_the_sheet_are_minded(qtbot, desk, demo_texts):
    desk.open_text(demo_texts["bottle-indexer"], "bottle-indexer.bench.toml")
    said = desk.text("machine.winding_values")
    row = {"line-to-line": "Resistance per phase 1 ohm", "phase": "Resistance line to line 1 ohm"}[said]
    dialog = PasteDialog(desk, row)
    qtbot.addWidget(dialog)
    assert dialog.values() == {}
    assert f"is {said}" in dialog.table.item(0, 2).text()
