"""The package data can be found, and the demo sheets are sheets."""

from __future__ import annotations

import pytest

from gainbench.sheetfile import parse_sheet
from gainbench_resources import demo_sheet, demo_sheet_names


def test_the_sheet_that_opens_by_default_comes_first():
    names = demo_sheet_names()
    assert names[0] == "label-unwinder"
    assert len(set(names)) == len(names) >= 3


def test_demo_sheets_show_every_kind_of_machine_and_train():
    sheets = [parse_sheet(demo_sheet(name).read_text(encoding="utf-8"), name).sheet for name in demo_sheet_names()]
    assert {sheet.rig.machine.kind for sheet in sheets} == {"brushed-dc", "pm-sine", "pm-block"}
    assert {sheet.rig.train.kind for sheet in sheets} == {"rigid", "elastic"}
    assert len({sheet.title for sheet in sheets}) == len(sheets)


def test_there_is_no_other():
    with pytest.raises(KeyError, match="none"):
        demo_sheet("none")
    with pytest.raises(KeyError):
        demo_sheet("../sheets/label-unwinder")
