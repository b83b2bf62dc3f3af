import math

import pytest

from gainbench.model import HandGains
from gainbench.sheetfile import parse_sheet
from gainbench.units import Dimension
from gainbench_app.sheet_edits import (
    METHOD_KEYS,
    gain_dimension,
    integral_key,
    loop_aims,
    unit_of,
    value_at,
    with_number,
    written,
)


@pytest.fixture
def sheet(demo_texts):
    return parse_sheet(demo_texts["label-unwinder"], "label-unwinder.bench.toml").sheet


@pytest.mark.parametrize(
    ("text", "unit"),
    [
        ("1 kHz", "kHz"),
        ("1.5e3Hz", "Hz"),
        ("-3 N*m", "N*m"),
        ("1.0", ""),
        ("95 %", "%"),
        ("2 1/s", "1/s"),
        ("kHz", None),
    ],
)
def test_the_unit_is_what_follows_the_number(text, unit):
    assert unit_of(text) == unit


def test_no_text_has_no_unit():
    assert unit_of(None) is None


def test_a_value_is_written_in_the_users_unit():
    assert written(math.tau * 1050.0, Dimension.FREQUENCY, like="1 kHz") == "1.05 kHz"
    assert written(math.tau * 1050.0, Dimension.FREQUENCY, like="6283 rad/s") == "6597 rad/s"
    assert written(math.radians(45.0), Dimension.ANGLE, like=None) == "45 deg"


def test_a_small_step_is_not_lost_in_the_digits():
    assert written(math.tau * 1000.01, Dimension.FREQUENCY, like="1 kHz", differs_from="1 kHz") == "1.00001 kHz"


def test_a_plain_number_stays_plain():
    assert written(0.25, Dimension.SHARE, like="1.0") == 0.25
    assert written(0.25, Dimension.SHARE, like="100 %") == "25 %"
    assert written(1.5, Dimension.NUMBER, like="1.0") == "1.5"
    assert written(2.5, Dimension.CURRENT_KP, like="2.66") == 2.5


@pytest.mark.parametrize(
    ("path", "text", "dimension"),
    [
        ("aims.speed.kp", "50 mA/rpm", Dimension.SPEED_KP),
        ("aims.speed.kp", "25 mN*m*s/rad", Dimension.VISCOUS_FRICTION),
        ("aims.speed.ki", "3 N*m/rad", Dimension.STIFFNESS),
        ("aims.current.ki", "0.23 V/A", Dimension.CURRENT_KP),
        ("aims.current.kp", "2.66", Dimension.CURRENT_KP),
        ("aims.current.kp", None, Dimension.CURRENT_KP),
    ],
)
def test_a_gain_is_of_the_dimension_it_was_typed_in(path, text, dimension):
    assert gain_dimension(path, text) is dimension


@pytest.mark.parametrize(
    ("path", "value"),
    [
        ("machine.resistance", 0.7),
        ("train.ratio", 4.0),
        ("stage.update_delay", 1.5),
        ("duty.reference_speed", -20.0),
        ("aims.current.crossover", 5000.0),
        ("aims.speed.reference_weight", 0.3),
    ],
)
def test_one_number_changes_and_nothing_else(sheet, path, value):
    changed = with_number(sheet, path, value)
    assert value_at(changed, path) == value
    before = value_at(sheet, path)
    assert before is not None
    assert with_number(changed, path, before) == sheet


def test_what_is_no_number_is_refused(sheet):
    with pytest.raises(KeyError):
        with_number(sheet, "title", 1.0)
    with pytest.raises(KeyError):
        with_number(sheet, "aims.current.kp", 1.0)
    assert value_at(sheet, "aims.current.kp") is None


def test_the_integral_key_is_the_one_that_was_given():
    assert integral_key(None) == "ki"
    assert integral_key(HandGains(kp=1.0, ti=0.1)) == "ti"
    assert integral_key(HandGains(kp=1.0, wi=10.0)) == "wi"


def test_every_method_has_keys_that_the_aims_know(sheet):
    known = set(dir(sheet.aims.speed)) | {"kp"}
    assert {key for keys in METHOD_KEYS.values() for key in keys} <= known
    assert loop_aims(sheet, "current") is sheet.aims.current
