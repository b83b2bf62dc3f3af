"""Edits leave everything else in the file alone."""

from __future__ import annotations

import difflib

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from gainbench.errors import SheetError
from gainbench.sheetfile import parse_sheet, split_path
from gainbench.sheetfile.tables import ENTRIES


def changed(before: str, after: str) -> tuple[list[str], list[str]]:
    """Lines taken out and lines put in."""
    lines = list(difflib.ndiff(before.splitlines(keepends=True), after.splitlines(keepends=True)))
    return [one[2:] for one in lines if one[0] == "-"], [one[2:] for one in lines if one[0] == "+"]


@pytest.mark.parametrize(
    ("path", "keys"),
    [
        ("machine.resistance", ["machine", "resistance"]),
        ("kept[0].speed.kp", ["kept", 0, "speed", "kp"]),
        ("evidence[12].columns.time", ["evidence", 12, "columns", "time"]),
        ('tolerance."machine.resistance"', ["tolerance", "machine.resistance"]),
        ("tolerance.machine.resistance", ["tolerance", "machine.resistance"]),
        ('a."b.c".d', ["a", "b.c", "d"]),
        ("title", ["title"]),
    ],
)
def test_split_path(path, keys):
    assert split_path(path) == keys


@pytest.mark.parametrize("path", sorted(ENTRIES))
def test_only_the_line_of_the_key_changes(demo_texts, path):
    text = demo_texts["label-unwinder"]
    document = parse_sheet(text, "x")
    example = {"duty.length": "400 ms", "duty.stop_at": "350 ms"}.get(path, ENTRIES[path].example.strip('"'))
    key = path.rpartition(".")[2]
    edited = document.with_value(path, example)
    assert edited.typed(path) == example
    out, new = changed(text, edited.text())
    assert len(out) == (0 if document.typed(path) is None else len(new))
    assert all(line.startswith(f"{key} = ") for line in (*out, *new))
    assert [line.partition("#")[2] for line in out] in ([line.partition("#")[2] for line in new], [])
    if document.typed(path) is None:
        assert len(new) == 1
        assert edited.with_value(path, None).text() == text
    else:
        back = edited.with_value(path, document.typed(path)).text()
        assert [line.split() for line in back.split("\n")] == [line.split() for line in text.split("\n")]


@pytest.mark.parametrize(
    ("path", "value", "line"),
    [
        ("machine.resistance", "1 ohm", 'resistance = "1 ohm"                   # brushed:'),
        ("train.ratio", "2", "ratio = 2                              # motor turns"),
        ("train.ratio", 2.5, "ratio = 2.5                            # motor turns"),
        ("train.ratio", ".5", "ratio = 0.5                            # motor turns"),
        ("stage.voltage_use", "0.9", "voltage_use = 0.9                      # share"),
        ("aims.firmware.back_emf_feedforward", "true", "back_emf_feedforward = true            # default"),
        ("aims.firmware.back_emf_feedforward", True, "back_emf_feedforward = true            # default"),
        ("title", 'a "b" \\ c', 'title = "a \\"b\\" \\\\ c"'),
        ("kept[0].speed.kp", "0.5", 'speed = { kp = 0.5, ki = "57.6 A/rad" }'),
        ('tolerance."machine.resistance"', "5 %", '"machine.resistance" = "5 %"'),
        ("tolerance.train.ratio", "0.1", '"train.ratio" = 0.1'),
    ],
)
def test_a_value_is_written_as_typed(demo, path, value, line):
    _, (new,) = changed(demo, parse_sheet(demo, "x").with_value(path, value).text())
    assert new.startswith(line)


@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
@pytest.mark.parametrize("last", [True, False])
@pytest.mark.parametrize(
    "path", ["title", "tolerance.machine.resistance", "aims.firmware.windup", "duty.load_step", "stage.speed_filter"]
)
def test_what_is_missing_is_put_into_its_table(elastic, path, last, line_end):
    text = (elastic if last else elastic.rstrip("\n")).replace("\n", line_end)
    value = {"title": "A", "aims.firmware.windup": "hold", "duty.load_step": "1 N*m", "stage.speed_filter": "1 ms"}
    edited = parse_sheet(text, "x").with_value(path, value.get(path, "1 %"))
    assert edited.typed(path) == value.get(path, "1 %")
    assert edited.text().count("\n") == edited.text().count(line_end)
    kept = iter(edited.text().splitlines())
    assert all(line in kept for line in text.splitlines())


def test_tables_in_any_order_can_be_edited(demo):
    parts = demo.split("\n[")
    order = [4, 1, 2, 5, 3, 7, 6, 8, 9]
    assert len(parts) == len(order) + 1
    text = "\n[".join([parts[0], *(parts[index] for index in order)])
    document = parse_sheet(text, "x")
    for path, value in {
        "aims.current.crossover": "900 Hz",
        "aims.speed.crossover": "50 Hz",
        "aims.firmware.windup": "back-calculation",
        "machine.resistance": "0.7 ohm",
    }.items():
        edited = document.with_value(path, value)
        out, new = changed(text, edited.text())
        assert len(out) == len(new) == 1
        assert edited.typed(path) == value


INLINE = """\
format = 1
machine = { kind = "brushed-dc", resistance = "1 ohm", inductance = "1 mH", torque_constant = "50 mN*m/A", \
rotor_inertia = "300 g*cm^2" }
train.kind = "rigid"
train.load_inertia = "0 kg*m^2"
duty = { reference_speed = "100 rpm", length = "1 s" }
aims.current.method = "magnitude-optimum"
aims.speed = { method = "symmetric-optimum", spread = 2.0 }
[stage]
bus_voltage = "48 V"
current_limit = "20 A"
pwm_frequency = "20 kHz"
current_rate = "20 kHz"
speed_rate = "2 kHz"
speed_sensor = "ideal"
"""


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("machine.resistance", "2 ohm"),
        ("machine.max_speed", "3000 rpm"),
        ("train.ratio", "2.0"),
        ("train.load_inertia", "1 kg*cm^2"),
        ("duty.load_step", "1 mN*m"),
        ("aims.current.damping", "0.7"),
        ("aims.speed.spread", "3"),
    ],
)
def test_tables_in_one_line_and_dotted_keys_can_be_edited(path, value):
    edited = parse_sheet(INLINE, "x").with_value(path, value)
    assert edited.typed(path) == value
    out, new = changed(INLINE, edited.text())
    assert len(new) == 1
    assert len(out) <= 1


@pytest.mark.parametrize(
    ("path", "value", "reason"),
    [
        ("aims.firmware.windup", "hold", "cannot be changed as it stands in the file; edit the file itself"),
        ("kept[0].name", "x", "cannot be reached"),
        ("machine.resistance.x", "1", "cannot be reached"),
        ("kept[0]", "x", "cannot be reached"),
        ("train.ratio", float("nan"), "must be finite"),
        ("machine.resistance", None, "is missing"),
        ("machine.resistnce", "1 ohm", "resistance is near"),
        ("nowhere.x", "1", "not known"),
        ("title", "a\nb", "control character"),
        ("train.ratio", "3 # x", "plain number"),
        ("train.ratio", '3\n[stage]\nbus_voltage = "1 V"', "plain number"),
    ],
)
def test_an_edit_is_refused(path, value, reason):
    with pytest.raises(SheetError, match=f"^.*{reason}"):
        parse_sheet(INLINE, "x").with_value(path, value)


def test_one_form_of_gains_becomes_another_in_one_edit(demo):
    document = parse_sheet(demo, "x")
    edited = document.with_values({"kept[0].current.ki": None, "kept[0].current.ti": "0.5 ms"})
    assert edited.sheet.kept[0].current.ti == 0.5e-3
    (line,) = changed(demo, edited.text())[1]
    assert line.replace(" ", "") == 'current={kp="2.66V/A",ti="0.5ms"}\n'


def test_taking_out_what_is_not_there_changes_nothing(demo):
    document = parse_sheet(demo, "x")
    assert document.with_values({"duty.stop_at": None, "tolerance.train.ratio": None}).text() == demo
    assert parse_sheet(INLINE, "x").with_value("tolerance.train.ratio", None).text() == INLINE


@given(
    path=st.sampled_from([*sorted(ENTRIES), "title", "kept[0].name", "kept[0].speed.ti", "tolerance.train.ratio"]),
    value=st.text(max_size=30) | st.integers() | st.floats() | st.booleans() | st.none(),
)
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=200)
def test_whatever_is_typed_is_taken_or_refused(demo, path, value):
    document = parse_sheet(demo, "x")
    try:
        edited = document.with_value(path, value)
    except SheetError:
        return
    out, new = changed(demo, edited.text())
    assert len(out) <= 1
    assert len(new) <= 1
    assert edited.with_value(path, document.typed(path)).sheet == document.sheet
