from __future__ import annotations

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.errors import UnitError
from gainbench.units import Dimension, format_quantity, parse, parse_difference, pretty, show, unit_size

UNITS = [
    (Dimension.RESISTANCE, "mohm"),
    (Dimension.INDUCTANCE, "mH"),
    (Dimension.TORQUE, "oz*in"),
    (Dimension.INERTIA, "g*cm^2"),
    (Dimension.SPEED, "rpm"),
    (Dimension.FREQUENCY, "Hz"),
    (Dimension.RATE, "kHz"),
    (Dimension.TEMPERATURE, "degF"),
    (Dimension.TEMPERATURE, "degC"),
    (Dimension.SHARE, "%"),
    (Dimension.SPEED_KP, "mA/rpm"),
    (Dimension.ANGLE, "deg"),
]


@pytest.mark.parametrize(
    ("text", "dimension", "value"),
    [
        ("0.45 mH", Dimension.INDUCTANCE, 0.00045),
        ("310 g*cm^2", Dimension.INERTIA, 3.1e-5),
        ("95 %", Dimension.SHARE, 0.95),
        ("95%", Dimension.SHARE, 0.95),
        ("0.95", Dimension.SHARE, 0.95),
        ("20 kHz", Dimension.RATE, 20000.0),
        ("20000 turn/s", Dimension.RATE, 20000.0),
        ("377 rad/s", Dimension.FREQUENCY, 377.0),
        ("60 Hz", Dimension.FREQUENCY, 120.0 * math.pi),
        ("1500 rpm", Dimension.SPEED, 50.0 * math.pi),
        ("90 deg", Dimension.ANGLE, math.pi / 2),
        ("1.5e-3s", Dimension.TIME, 0.0015),
        (".5 s", Dimension.TIME, 0.5),
        ("+5. V", Dimension.VOLTAGE, 5.0),
        ("\N{MINUS SIGN}5 V", Dimension.VOLTAGE, -5.0),
        ("5\N{NO-BREAK SPACE}V", Dimension.VOLTAGE, 5.0),
        ("25 degC", Dimension.TEMPERATURE, 25.0),
        ("25 °C", Dimension.TEMPERATURE, 25.0),
        ("298.15 K", Dimension.TEMPERATURE, 25.0),
        ("77 degF", Dimension.TEMPERATURE, 25.0),
        ("-40 degF", Dimension.TEMPERATURE, -40.0),
        ("0 K", Dimension.TEMPERATURE, -273.15),
    ],
)
def test_parse_gives_the_nearest_float(text: str, dimension: Dimension, value: float) -> None:
    assert parse(text, dimension) == value


def test_minus_zero_is_zero() -> None:
    assert math.copysign(1.0, parse("-0 V", Dimension.VOLTAGE)) == 1.0


@pytest.mark.parametrize(
    ("text", "dimension", "expected"),
    [
        ("0.6 V", Dimension.RESISTANCE, 'this is a voltage, a resistance is meant (for example "0.60 ohm")'),
        ("0.6", Dimension.RESISTANCE, "the unit is missing"),
        ("10 %", Dimension.RESISTANCE, "a pure number"),
        ("1 1/s", Dimension.SPEED, "write Hz, rpm or rad/s"),
        ("1 1/min", Dimension.RATE, "write Hz, rpm or rad/s"),
        ("60 1/s", Dimension.FREQUENCY, "write Hz, rpm or rad/s"),
        ("60 s^-1", Dimension.FREQUENCY, "write Hz, rpm or rad/s"),
        ("1500 min-1", Dimension.SPEED, "write Hz, rpm or rad/s"),
        ("60 1/s^2", Dimension.ACCELERATION, "write rpm/s or rad/s^2"),
        ("2 J", Dimension.TORQUE, "energy is not torque: write N*m"),
        ("2 N*m", Dimension.ENERGY, "torque is not energy"),
        ("2 N*m*s", Dimension.VISCOUS_FRICTION, "a viscous friction is in N*m*s/rad"),
        ("2 N*m", Dimension.STIFFNESS, "a stiffness is in N*m/rad"),
        ("2 V*s", Dimension.BACK_EMF_CONSTANT, "a back-EMF constant is in V*s/rad"),
        ("2 kg*cm", Dimension.TORQUE, "write kgf"),
        ("2 V", Dimension.SHARE, "this is a voltage, a share is meant"),
        ("2 V", Dimension.TEMPERATURE, "this is a voltage, a temperature is meant"),
        ("2", Dimension.TEMPERATURE, "degC"),
        ("40 degC", Dimension.TEMPERATURE_DIFFERENCE, "a difference is in K"),
        ("1,5 V", Dimension.VOLTAGE, "not as a comma"),
        ("1.000,5 V", Dimension.VOLTAGE, "not as a comma"),
        ("1,000 V", Dimension.VOLTAGE, "without thousands separators"),
        ("1 000 V", Dimension.VOLTAGE, "without thousands separators"),
        ("1'000 V", Dimension.VOLTAGE, "without thousands separators"),
        ("1_000 V", Dimension.VOLTAGE, "without thousands separators"),
        ("1.2.3 V", Dimension.VOLTAGE, "not a plain decimal number"),
        ("nan V", Dimension.VOLTAGE, "must be finite"),
        ("-inf V", Dimension.VOLTAGE, "must be finite"),
        ("1e400 V", Dimension.VOLTAGE, "too large"),
        ("1e-400 V", Dimension.VOLTAGE, "too small"),
        ("1e99999999 V", Dimension.VOLTAGE, "not a plain decimal number"),
        ("0x10 V", Dimension.VOLTAGE, '"x" is not known'),
        ("\N{ARABIC-INDIC DIGIT FIVE} V", Dimension.VOLTAGE, "a number must come first"),
        ("V", Dimension.VOLTAGE, "a number must come first"),
        ("", Dimension.VOLTAGE, "a voltage is missing"),
        ("1\nV", Dimension.VOLTAGE, "does not belong"),
        ("1" * 100 + " V", Dimension.VOLTAGE, "longer than"),
    ],
)
def test_refused_with_a_hint(text: str, dimension: Dimension, expected: str) -> None:
    with pytest.raises(UnitError) as caught:
        parse(text, dimension)
    assert expected in str(caught.value)
    assert "for example" in str(caught.value)


def test_difference_of_temperature_is_in_kelvin() -> None:
    assert parse_difference("40 K", Dimension.TEMPERATURE) == 40.0
    assert parse_difference("5 mohm", Dimension.RESISTANCE) == 0.005
    with pytest.raises(UnitError, match="difference is in K"):
        parse_difference("40 degC", Dimension.TEMPERATURE)


def test_temperature_has_no_size() -> None:
    with pytest.raises(UnitError, match="more than a factor"):
        unit_size("degF", Dimension.TEMPERATURE)


@pytest.mark.parametrize(
    ("value", "dimension", "text"),
    [
        (0.00045, Dimension.INDUCTANCE, "450 uH"),
        (0.6, Dimension.RESISTANCE, "600 mohm"),
        (2.0, Dimension.RESISTANCE, "2 ohm"),
        (50.0 * math.pi, Dimension.SPEED, "1500 rpm"),
        (2000.0 * math.pi, Dimension.FREQUENCY, "1 kHz"),
        (math.radians(60.0), Dimension.ANGLE, "60 deg"),
        (0.95, Dimension.SHARE, "95 %"),
        (0.0, Dimension.TORQUE, "0 N*m"),
        (-0.0123456, Dimension.TORQUE, "-12.35 mN*m"),
        (25.0, Dimension.TEMPERATURE, "25 degC"),
        (123456.0, Dimension.SPEED_KI, "123456 A/rad"),
        (0.9999999, Dimension.TIME, "1 s"),
        (1.5, Dimension.NUMBER, "1.5"),
    ],
)
def test_show_picks_a_handy_unit(value: float, dimension: Dimension, text: str) -> None:
    assert show(value, dimension) == text


def test_pretty_text_can_be_read_again() -> None:
    for text, dimension in [
        ("310 g*cm^2", Dimension.INERTIA),
        ("20 uN*m*s/rad", Dimension.VISCOUS_FRICTION),
        ("600 mohm", Dimension.RESISTANCE),
        ("25 degC", Dimension.TEMPERATURE),
        ("3 us", Dimension.TIME),
    ]:
        assert parse(pretty(text), dimension) == parse(text, dimension)
        assert "*" not in pretty(text)


def test_format_keeps_the_typed_spelling() -> None:
    assert format_quantity(0.6, "Ohm", Dimension.RESISTANCE) == "0.6 Ohm"
    assert format_quantity(math.radians(60.0), "deg", Dimension.ANGLE) == "60 deg"
    assert format_quantity(0.123456, "V", Dimension.VOLTAGE, digits=3) == "0.123 V"
    with pytest.raises(UnitError, match="a voltage"):
        format_quantity(1.0, "V", Dimension.RESISTANCE)
    with pytest.raises(UnitError, match="finite"):
        format_quantity(math.nan, "V", Dimension.VOLTAGE)
    with pytest.raises(UnitError, match="degC"):
        format_quantity(1.0, "V", Dimension.TEMPERATURE)


@given(
    value=st.floats(min_value=1e-9, max_value=1e9) | st.floats(min_value=-1e6, max_value=-1e-6),
    unit=st.sampled_from(UNITS),
)
def test_written_and_read_again_it_is_the_same(value: float, unit: tuple[Dimension, str]) -> None:
    dimension, name = unit
    # The unit's factor is rounded once on the way out and once on the way back: one or two units in the last place;
    # a scale of temperature with another zero loses what its offset takes from the digits.
    atol = 1e-12 if dimension is Dimension.TEMPERATURE else 0.0
    assert parse(format_quantity(value, name, dimension), dimension) == pytest.approx(value, rel=5e-16, abs=atol)


def assert_number_or_unit_error(text: str, dimension: Dimension) -> None:
    try:
        value = parse(text, dimension)
    except UnitError:
        return
    assert math.isfinite(value)


@given(text=st.text(max_size=100), dimension=st.sampled_from(list(Dimension)))
def test_no_text_raises_anything_else(text: str, dimension: Dimension) -> None:
    assert_number_or_unit_error(text, dimension)


@given(
    text=st.from_regex(r"[0-9.eE+\-]{1,6} ?[kmuMVANgHzrads*/^()²·0-9 \-]{0,12}", fullmatch=True),
    dimension=st.sampled_from(list(Dimension)),
)
def test_nothing_that_looks_like_a_quantity_raises_anything_else(text: str, dimension: Dimension) -> None:
    assert_number_or_unit_error(text, dimension)
