"""Guesses from names and units; the names are common practice among loggers, drives and oscilloscopes."""

from __future__ import annotations

import pytest

from gainbench.evidence.guessing import guess_column, read_header, spelled, split_name, suggested
from gainbench.model import LogColumn, SignalName


@pytest.mark.parametrize(
    ("text", "name", "unit"),
    [
        ("t [s]", "t", "s"),
        ("speed (rpm)", "speed", "rpm"),
        ("I / A", "I", "A"),
        ("torque, N*m", "torque", "N*m"),
        ("u in V", "u", "V"),
        ("time_ms", "time", "ms"),
        ("i_q", "i_q", ""),
        ("speed", "speed", ""),
        ("battery (spare)", "battery", "spare"),
        ("", "", ""),
    ],
)
def test_name_and_unit_of_a_header(text, name, unit):
    found = split_name(text)
    assert (found.name, found.unit) == (name, unit)


@pytest.mark.parametrize(
    ("unit", "expected"),
    [
        ("Volts", "V"),
        ("Seconds", "s"),
        ("U/min", "rpm"),
        ("1/min", "rpm"),
        ("min-1", "rpm"),
        ("Nm", "N*m"),
        ("mA", "mA"),
        ("rad/s", "rad/s"),
        ("ticks", ""),
        ("Arms", ""),
        ("", ""),
        ("x" * 100, ""),
    ],
)
def test_units_as_loggers_spell_them(unit, expected):
    assert spelled(unit) == expected


@pytest.mark.parametrize(
    ("header", "signal", "unit"),
    [
        ("t", "time", ""),
        ("Time (ms)", "time", "ms"),
        ("Zeit [s]", "time", "s"),
        ("Drehzahl [U/min]", "speed", "rpm"),
        ("Drehzahl Soll [1/min]", "speed_reference", "rpm"),
        ("Sollstrom [mA]", "current_reference", "mA"),
        ("Strom [A]", "current", "A"),
        ("setVelocity", "speed_reference", ""),
        ("iq_ref", "current_reference", ""),
        ("iq", "current", ""),
        ("motorSpeed", "speed", ""),
        ("MOTOR_VOLTAGE", "voltage", ""),
        ("pos (deg)", "angle", "deg"),
        ("1st motor position (ticks)", "angle", ""),
        ("CH1 (V)", "voltage", "V"),
        ("channel 2 [A]", "current", "A"),
        ("moment [Nm]", "torque", "N*m"),
        ("v (rpm)", None, ""),
        ("speed (V)", None, ""),
        ("temperature", None, ""),
        ("voltage reference (V)", None, ""),
        ("state", None, ""),
    ],
)
def test_what_a_column_may_hold(header, signal, unit):
    found = guess_column(header, split_name(header).unit)
    assert (found and found.signal) == signal
    assert found is None or found.unit == unit


def test_other_header_rows_help():
    assert guess_column("channel 7", "", others=["x7"]) is None
    found = guess_column("channel 7", "", others=["m1vel"])
    assert found is not None
    assert found.signal is SignalName.SPEED


def test_header_rows_are_sorted():
    rows = [("Time", "Motor speed", "State"), ("ms", "rad/s", ""), ("t", "w", "z")]
    header = read_header(rows, 3)
    assert [(one.name, one.unit) for one in header.names] == [("Time", "ms"), ("Motor speed", "rad/s"), ("State", "")]
    assert header.others == (("t",), ("w",), ("z",))


def test_a_single_row_is_names_even_where_they_look_like_units():
    header = read_header([("s", "A", "V")], 3)
    assert [one.name for one in header.names] == ["s", "A", "V"]


def test_columns_without_a_name_are_called_by_their_place():
    assert [one.name for one in read_header([], 2).names] == ["column 1", "column 2"]
    assert [one.name for one in read_header([("t [s]", "")], 2).names] == ["t [s]", "column 2"]


def test_the_suggestion_takes_the_first_of_each_signal_and_no_unknown_unit():
    names = ["t [s]", "w", "speed [rpm]", "speed 2 [rpm]", "x"]
    guesses = [guess_column(name, split_name(name).unit) for name in names]
    assert suggested(names, guesses) == (
        LogColumn(signal=SignalName.TIME, column="t [s]", unit="s"),
        LogColumn(signal=SignalName.SPEED, column="speed [rpm]", unit="rpm"),
    )
