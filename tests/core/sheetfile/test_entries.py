"""Single values: how they are shown, and how numbers are typed."""

from __future__ import annotations

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.sheetfile.entries import EntryError, Gain, GainUnit, Limits, Number, Text, shown, typed_number
from gainbench.units import Dimension


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (True, "true"),
        (1.5, "1.5"),
        (7, "7"),
        ("a", '"a"'),
        ("", '""'),
        ("a\nb\x1b[31m", r'"a\u000ab\u001b[31m"'),
        ("\u202eabc", r'"\u202eabc"'),
        ("x" * 61, f'"{"x" * 60}..."'),
        ([], "[]"),
        ([1], "[...]"),
        ({}, "{}"),
        ({"a": 1}, "{...}"),
        (10**100, "a very long number"),
        (float("nan"), "nan"),
    ],
)
def test_shown(value, text):
    assert shown(value) == text


@given(value=st.text() | st.integers() | st.floats() | st.booleans() | st.dates() | st.lists(st.integers()))
def test_what_is_shown_is_one_short_line(value):
    text = shown(value)
    assert len(text) <= 6 * 60 + 5
    assert len(text.splitlines()) <= 1
    assert not any(ord(character) < 32 for character in text)


@pytest.mark.parametrize(
    ("typed", "toml"),
    [
        ("3", "3"),
        (" 3.0 ", "3.0"),
        ("+3", "+3"),
        ("-0.5e-3", "-0.5e-3"),
        ("1_000", "1_000"),
        (".5", "0.5"),
        ("5.", "5.0"),
        ("007", "7"),
        ("00.5", "0.5"),
        ("", None),
        ("three", None),
        ("0x10", None),
        ("1,5", None),
        ("nan", None),
        ("inf", None),
        ("3 # 4", None),
        ("1\n2", None),
        ("\N{ARABIC-INDIC DIGIT FIVE}", None),
        ("1 %", None),
    ],
)
def test_typed_number(typed, toml):
    assert typed_number(typed) == toml


@given(text=st.text(alphabet="0123456789+-.eE_ ", max_size=20))
def test_a_typed_number_is_one_number_of_toml(text):
    import tomllib

    toml = typed_number(text)
    if toml is not None:
        assert list(tomllib.loads(f"x = {toml}")) == ["x"]
        assert tomllib.loads(f"x = {toml}")["x"] == float(text.strip())


@pytest.mark.parametrize(
    ("limits", "value", "reason"),
    [
        (Limits(low=1.0, high=2.0), 0.5, "is too small: it must be at least 1"),
        (Limits(low=1.0, high=2.0, above=True), 1.0, "is too small: it must be above 1"),
        (Limits(low=1.0, high=2.0), 3.0, "is too large: it must be at most 2"),
        (Limits(low=1.0, high=2.0), 0.0, "must be above 0"),
        (Limits(low=1.0, high=2.0), -1.0, "must be above 0"),
        (Limits(low=1.0, high=2.0, zero=True), -1.0, "must be at least 0"),
        (Limits(low=1.0, high=2.0, zero=True), 0.5, "is too small: it must be at least 1"),
        (Limits(low=1.0, high=2.0, signed=True), 0.0, "must not be 0"),
        (Limits(low=1.0, high=2.0, signed=True), -3.0, "is too large"),
        (Limits(low=0.0, high=2.0), -1.0, "must be at least 0"),
    ],
)
def test_beyond_limits(limits, value, reason):
    with pytest.raises(EntryError) as caught:
        limits.check(value, Dimension.NUMBER)
    assert caught.value.reason.startswith(reason)


@pytest.mark.parametrize(
    ("limits", "value"),
    [
        (Limits(low=1.0, high=2.0), 1.0),
        (Limits(low=1.0, high=2.0), 2.0),
        (Limits(low=1.0, high=2.0, zero=True), 0.0),
        (Limits(low=1.0, high=2.0, zero=True, signed=True), -2.0),
        (Limits(low=0.0, high=2.0), 0.0),
    ],
)
def test_within_limits(limits, value):
    assert limits.check(value, Dimension.NUMBER) == value


def test_minus_zero_becomes_zero():
    assert str(Number(limits=Limits(low=0.0, high=1.0)).read(-0.0)) == "0.0"


def test_a_gain_tells_what_its_unit_told():
    gain = Gain(
        units=(
            GainUnit(dimension=Dimension.SPEED_KI),
            GainUnit(dimension=Dimension.STIFFNESS, torque=True),
            GainUnit(dimension=Dimension.SPEED_KP, period=True),
        )
    )
    plain, typed, torque, period = (gain.read(value) for value in (2, "2 A/rad", "2 N*m/rad", "2 A*s/rad"))
    assert [one.value for one in (plain, typed, torque, period)] == [2.0] * 4
    assert [one.plain for one in (plain, typed, torque, period)] == [True, False, False, False]
    assert [one.torque for one in (plain, typed, torque, period)] == [False, False, True, False]
    assert [one.period for one in (plain, typed, torque, period)] == [False, False, False, True]


@pytest.mark.parametrize("character", ["\x00", "\n", "\t", "\x7f", "\x85", "\u2028", "\u2029", "\u202e", "\u2066"])
def test_no_text_holds_a_control_character(character):
    with pytest.raises(EntryError, match="control character"):
        Text(sample="x").read(f"a{character}b")
