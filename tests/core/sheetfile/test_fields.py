"""Single entries for a window's boxes."""

from __future__ import annotations

import math

import pytest

from gainbench.errors import SheetError
from gainbench.sheetfile import parse_sheet, quantity_paths, read_entry
from gainbench.sheetfile.tables import ENTRIES
from gainbench.units import Dimension


def test_quantity_paths_have_their_dimension():
    paths = quantity_paths()
    assert paths["machine.resistance"] is Dimension.RESISTANCE
    assert paths["train.ratio"] is Dimension.NUMBER
    assert paths["aims.speed.kp"] is Dimension.SPEED_KP
    assert "machine.pole_pairs" not in paths
    assert "machine.kind" not in paths


@pytest.mark.parametrize(
    ("path", "text", "value"),
    [
        ("machine.resistance", "600 mohm", 0.6),
        ("train.ratio", " 3 ", 3.0),
        ("train.ratio", ".5", 0.5),
        ("machine.pole_pairs", "4", 4),
        ("machine.kind", "pm-sine", "pm-sine"),
        ("aims.firmware.back_emf_feedforward", "true", True),
        ("aims.firmware.speed_unit", " rpm ", "rpm"),
        ("aims.speed.reference_weight", "0.5", 0.5),
        ("aims.speed.reference_weight", "50 %", 0.5),
        ("aims.speed.kp", "60 mA/(turn/s)", 0.03 / math.pi),
        ("aims.speed.kp", "0.5", 0.5),
        ("kept", "x", None),
    ],
)
def test_read_entry(path, text, value):
    if value is None:
        with pytest.raises(SheetError, match="is not the path of an entry"):
            read_entry(path, text)
    else:
        assert read_entry(path, text) == value
        assert type(read_entry(path, text)) is type(value) or isinstance(value, str)


@pytest.mark.parametrize(
    ("path", "text"),
    [
        ("machine.resistance", "0.6"),
        ("train.ratio", "3 V"),
        ("train.ratio", "nan"),
        ("train.ratio", "1e999"),
        ("machine.pole_pairs", "4.0"),
        ("aims.firmware.back_emf_feedforward", "yes"),
        ("machine.kind", ""),
    ],
)
def test_refused_with_one_problem(path, text):
    with pytest.raises(SheetError) as caught:
        read_entry(path, text)
    (problem,) = caught.value.problems
    assert problem.path == path
    assert problem.example


@pytest.mark.parametrize("path", sorted(ENTRIES))
def test_what_a_box_refuses_the_sheet_refuses(demo, path):
    document = parse_sheet(demo, "bench")
    refused = 0
    for text in ("1", ".5", "007", "0.6 ohm", "true", "pm-sine", "nan", "", "1 %"):
        try:
            read_entry(path, text)
        except SheetError:
            refused += 1
            with pytest.raises(SheetError):
                document.with_value(path, text)
    assert refused


@pytest.mark.parametrize("path", sorted(ENTRIES))
def test_what_a_box_takes_the_sheet_reads_alike(demo, altered, path):
    example = ENTRIES[path].example.strip('"')
    value = read_entry(path, example)
    document = parse_sheet(altered(demo, path, ENTRIES[path].example), "bench")
    assert document.typed(path) == example
    table, _, key = path.rpartition(".")
    sheet = document.sheet
    holder = {
        "machine": sheet.rig.machine,
        "train": sheet.rig.train,
        "stage": sheet.rig.stage,
        "aims.current": sheet.aims.current,
        "aims.speed": sheet.aims.speed,
        "aims.firmware": sheet.aims.firmware,
        "duty": sheet.duty,
    }[table]
    if key not in {"kp", "ki", "ti", "wi"}:
        assert getattr(holder, key) == value
