from pathlib import Path

import pytest
from PySide6.QtWidgets import QFileDialog, QLabel

from gainbench.handover import CAUTIONS, NOT_MODELLED, SIGN_CONVENTION
from gainbench_app.handover_dialog import HandoverDialog, HandoverRequest


@pytest.fixture
def dialog(qtbot):
    request = HandoverRequest(
        title="<b>Label</b> unwinder", folder=Path("firmware"), prefix="LABEL_UNWINDER", remarks=("not saved <i>",)
    )
    found = HandoverDialog(request)
    qtbot.addWidget(found)
    return found


def test_every_caution_is_in_it(dialog):
    words = " ".join(dialog.cautions.toPlainText().split())
    for caution in (*CAUTIONS, *NOT_MODELLED, SIGN_CONVENTION):
        assert caution in words


def test_the_users_text_is_no_mark_up(dialog):
    labels = [label.text() for label in dialog.findChildren(QLabel)]
    assert "Hand over <b>Label</b> unwinder" in labels
    assert "not saved <i>" in labels
    assert all(label.textFormat().name == "PlainText" for label in dialog.findChildren(QLabel) if "<" in label.text())


def test_it_suggests_and_takes_what_is_typed(dialog, monkeypatch):
    assert dialog.prefix.placeholderText() == "LABEL_UNWINDER"
    assert dialog.choice().folder == Path("firmware")
    assert dialog.choice().prefix is None
    dialog.prefix.setText(" AXIS_ ")
    assert dialog.choice().prefix == "AXIS_"
    monkeypatch.setattr(QFileDialog, "getExistingDirectory", lambda *_: "elsewhere")
    dialog._browse()
    assert dialog.choice().folder == Path("elsewhere")
