"""What single entries may be: wrong values are refused with an example that works, values on the edge are taken."""

from __future__ import annotations

import math
import tomllib

import pytest

from gainbench.sheetfile import parse_sheet
from gainbench.sheetfile.entries import Choice, Count, Flag, Gain, Number, Quantity
from gainbench.sheetfile.tables import ENTRIES, LISTS, entry_at

WRONG = [
    # types
    ("format", "2", "reads format 1 only"),
    ("format", "1.0", "whole number"),
    ("format", "true", "whole number"),
    ("format", '"1"', "whole number"),
    ("title", "7", "text in quotes"),
    ("title", '""', "must not be empty"),
    ("title", '"   "', "must not be empty"),
    ("title", f'"{"x" * 201}"', "longer than 200"),
    ("title", r'"two\nlines"', "control character"),
    ("title", r'"tab\there"', "control character"),
    ("title", r'"bell\u0007"', "control character"),
    ("title", r'"delete\u007F"', "control character"),
    ("title", r'"next line\u0085"', "control character"),
    ("title", r'"line separator\u2028"', "control character"),
    ("title", r'"turned round\u202E"', "control character"),
    ("title", '"""two\nlines"""', "control character"),
    ("machine.kind", '"brushless"', "must be one of brushed-dc, pm-sine, pm-block"),
    ("machine.kind", '"Brushed-DC"', "brushed-dc is near"),
    ("machine.kind", "1", "must be one of"),
    ("machine.resistance", "0.6", "a plain number has no unit, a resistance is meant"),
    ("machine.resistance", "[1]", "a resistance in quotes"),
    ("machine.resistance", "true", "a resistance in quotes"),
    ("machine.resistance", "1979-05-27", "a resistance in quotes"),
    ("machine.resistance", '{ value = "1 ohm" }', "a resistance in quotes"),
    ("machine.resistance", '""', "a resistance is missing"),
    # numbers
    ("machine.resistance", '"nan ohm"', "must be finite"),
    ("machine.resistance", '"inf ohm"', "must be finite"),
    ("machine.resistance", '"1e999 ohm"', "too large"),
    ("machine.resistance", '"1e99999 ohm"', "not a plain decimal number"),
    ("machine.resistance", '"1e-999 ohm"', "too small"),
    ("machine.resistance", '"0 ohm"', "must be above 0"),
    ("machine.resistance", '"-1 ohm"', "must be above 0"),
    ("machine.resistance", '"1e-9 ohm"', "is too small"),
    ("machine.resistance", '"1e9 ohm"', "is too large"),
    ("machine.resistance", '"0,6 ohm"', "not as a comma"),
    ("train.ratio", "nan", "must be finite"),
    ("train.ratio", "inf", "must be finite"),
    ("train.ratio", "-inf", "must be finite"),
    ("train.ratio", "1" + "0" * 400, "must be finite"),
    ("train.ratio", "0", "must be above 0"),
    ("train.ratio", "-3", "must be above 0"),
    ("train.ratio", '"3.0"', "plain number, without quotes"),
    ("train.ratio", "true", "plain number"),
    ("machine.pole_pairs", "4.0", "whole number"),
    ("machine.pole_pairs", '"4"', "whole number"),
    ("machine.pole_pairs", "0", "at least 1"),
    ("machine.pole_pairs", "true", "whole number"),
    ("stage.encoder_counts", "4096.0", "whole number"),
    ("stage.encoder_counts", "-1", "at least 1"),
    ("stage.encoder_counts", "1" + "0" * 30, "at most"),
    ("stage.speed_window", "0", "at least 1"),
    ("stage.speed_window", "1001", "at most 1000"),
    ("stage.speed_window", "1e2", "whole number"),
    ("stage.speed_delay", "-1", "at least 0"),
    ("stage.update_delay", "2.1", "at most 2"),
    ("stage.update_delay", "-0.1", "at least 0"),
    ("stage.voltage_use", '"101 %"', "at most 100 %"),
    ("stage.voltage_use", '"0 %"', "must be above 0"),
    ("stage.voltage_use", "95", "at most 100 %"),
    ("train.efficiency", '"120 %"', "at most 100 %"),
    ("train.efficiency", '"-1 %"', "must be above 0"),
    ("train.load_inertia", '"-1 kg*m^2"', "at least 0"),
    ("machine.viscous_friction", '"-1 N*m*s/rad"', "at least 0"),
    ("machine.winding_temperature", '"-300 degC"', "is too small"),
    ("aims.current.phase_margin", '"91 deg"', "at most 90 deg"),
    ("aims.current.phase_margin", '"-1 deg"', "at least 0"),
    ("aims.current.damping", "0", "must be above 0"),
    ("aims.speed.spread", "1.0", "must be above 1"),
    ("aims.speed.spread", "0.5", "must be above 1"),
    ("aims.speed.reference_weight", "1.5", "at most 100 %"),
    ("aims.speed.reference_weight", "-0.5", "at least 0"),
    ("aims.current.crossover", '"0 Hz"', "must be above 0"),
    ("duty.reference_ramp", '"-1 rpm/s"', "at least 0"),
    # dimensions
    ("machine.resistance", '"0.6 V"', "this is a voltage, a resistance is meant"),
    ("machine.resistance", '"0.6 olm"', "ohm is near"),
    ("machine.rotor_inertia", '"310 g*cm"', "an inertia is meant"),
    ("machine.coulomb_friction", '"12 mJ"', "energy is not torque"),
    ("duty.load_step", '"60 J"', "energy is not torque"),
    ("machine.max_speed", '"6000 1/min"', "write Hz, rpm or rad/s"),
    ("machine.max_speed", '"6000 min^-1"', "write Hz, rpm or rad/s"),
    ("stage.pwm_frequency", '"20000 1/s"', "write Hz, rpm or rad/s"),
    ("aims.current.crossover", '"6283 1/s"', "write Hz, rpm or rad/s"),
    ("duty.reference_ramp", '"100 1/s^2"', "write rpm/s or rad/s^2"),
    ("machine.winding_temperature", '"25"', "degC"),
    ("machine.winding_temperature", '"25 C"', "degC"),
    ("machine.torque_constant", '"52 mN*m/Arms"', "current_values"),
    ("aims.firmware.speed_unit", '"1/min"', "write Hz, rpm or rad/s"),
    ("aims.firmware.speed_unit", '"m/s"', "a speed of rotation is meant"),
    ("aims.firmware.speed_unit", "1", "a unit in quotes"),
    ("aims.firmware.speed_output", '"Nm"', "must be one of A, N*m"),
    ("aims.firmware.back_emf_feedforward", '"true"', "must be true or false"),
    ("aims.firmware.back_emf_feedforward", "1", "must be true or false"),
    ("aims.current.kp", '"2.66 V/rad"', "a proportional gain of the current loop is meant"),
    ("aims.current.kp", '"-2.66 V/A"', "at least 0"),
    ("aims.current.kp", "inf", "must be finite"),
    ("aims.current.kp", "true", "or a plain number in SI"),
    ("aims.current.ti", '"0 ms"', "must be above 0"),
    ("aims.current.wi", '"100 1/s"', "write Hz, rpm or rad/s"),
    # texts that are meant to exhaust, or to run
    ("machine.resistance", '"1 ' + "(" * 60 + 'ohm"', "longer than"),
    ("machine.resistance", '"1 ((((ohm))))"', "too many brackets"),
    ("machine.resistance", '"1 ohm^9999999"', "is not among 1 to 4"),
    ("machine.resistance", '"9**9**9**9 ohm"', ""),
    ("machine.resistance", '"1 ohm**9**9**9"', ""),
    ("machine.resistance", f'"1 {"ohm*" * 15}ohm"', "longer than"),
    ("machine.resistance", """'1 __import__("os").system("id")'""", "does not belong"),
    ("machine.resistance", '"1 {0.__class__}"', "does not belong"),
    ("machine.resistance", f'"{"9" * 200} ohm"', "longer than"),
    ("duty.length", '"1e300 s"', "is too large"),
    ("duty.reference_at", '"-1 ms"', "at least 0"),
]


@pytest.mark.parametrize(("path", "toml", "reason"), WRONG)
def test_a_wrong_value_is_refused_and_the_example_is_taken(one_problem, demo, altered, path, toml, reason):
    problem = one_problem(altered(demo, path, toml))
    assert problem.path == path
    assert problem.value
    assert reason in problem.reason
    example = problem.example.removeprefix(f"{path} = ")
    assert parse_sheet(altered(demo, path, example), "bench").sheet


@pytest.mark.parametrize(
    "title",
    [
        r"'She said \"now\"'",
        '"*/ int main(void) { /*"',
        '"??/ ??= trigraphs"',
        "'back\\slash \\'",
        '"%s %n {0} ${HOME} `id`"',
        '"Zoë\'s 巻き戻し機 — размотчик ملفاف"',
        '"emoji \U0001f9f5"',
        f'"{"x" * 200}"',
    ],
)
def test_any_printable_title_is_taken(demo, altered, title):
    assert parse_sheet(altered(demo, "title", title), "bench").sheet.title == tomllib.loads(f"x = {title}")["x"]


@pytest.mark.parametrize(
    ("path", "toml", "found"),
    [
        ("stage.current_rate", '"40 kHz"', 40e3),
        ("stage.current_rate", '"6666.6666666667 Hz"', None),
        ("duty.load_at", '"450 ms"', None),
        ("duty.reference_at", '"0.45 s"', None),
        ("duty.stop_at", '"20 ms"', None),
        ("duty.length", '"100 s"', None),
        ("aims.current.phase_margin", '"90 deg"', math.pi / 2.0),
        ("aims.current.phase_margin", '"0 deg"', 0.0),
        ("aims.speed.reference_weight", '"50 %"', 0.5),
        ("aims.speed.reference_weight", "0", 0.0),
        ("stage.voltage_use", "1", 1.0),
        ("stage.voltage_use", '"95%"', 0.95),
        ("train.ratio", "3", 3.0),
        ("train.load_inertia", '"0 kg*m^2"', 0.0),
        ("train.load_torque", '"-2 N*m"', -2.0),
    ],
)
def test_values_on_the_edge_are_taken(demo, altered, path, toml, found):
    text = altered(demo, path, toml)
    if path == "stage.current_rate":
        text = altered(text, "stage.speed_rate", toml)
    sheet = parse_sheet(text, "bench").sheet
    if found is not None:
        table, _, key = path.rpartition(".")
        holder = {
            "stage": sheet.rig.stage,
            "train": sheet.rig.train,
            "aims.current": sheet.aims.current,
            "aims.speed": sheet.aims.speed,
        }[table]
        assert getattr(holder, key) == found


PATHS = sorted(ENTRIES)
QUANTITIES = [path for path in PATHS if isinstance(ENTRIES[path], Quantity)]
# 20 kHz as a PWM rate does not suit every demo rate, and the delay of 0 is the only one of a speed loop at full rate.
NEUTRAL = {"duty.length": '"450 ms"', "duty.stop_at": '"350 ms"'}


@pytest.mark.parametrize("path", PATHS)
def test_every_example_is_taken(demo, altered, path):
    assert parse_sheet(altered(demo, path, NEUTRAL.get(path, ENTRIES[path].example)), "bench").sheet


@pytest.mark.parametrize("path", PATHS)
@pytest.mark.parametrize("toml", ["[]", "[[1]]", "{}", '{ a = "b" }', "1979-05-27T07:32:00Z", "07:32:00"])
def test_no_entry_takes_what_is_no_single_value(demo, altered, one_problem, path, toml):
    assert one_problem(altered(demo, path, toml)).path == path


@pytest.mark.parametrize("path", [path for path in PATHS if not isinstance(ENTRIES[path], Flag)])
def test_no_entry_but_a_switch_takes_true(demo, altered, one_problem, path):
    assert one_problem(altered(demo, path, "true")).path == path


@pytest.mark.parametrize("path", QUANTITIES)
@pytest.mark.parametrize("text", ["3 kg", "3", "nan s", "inf s", "s", "", "1e308 kg", "3 xyz"])
def test_no_quantity_takes_another_dimension(demo, altered, one_problem, path, text):
    # A share is a pure number, so that a number without a unit is one.
    expected = "is too large" if (path.endswith(("voltage_use", "efficiency", "weight")) and text == "3") else ""
    problem = one_problem(altered(demo, path, f'"{text}"'))
    assert problem.path == path
    assert expected in problem.reason


@pytest.mark.parametrize("path", PATHS)
def test_limits_are_those_of_the_entry(demo, altered, refusal, path):
    entry = ENTRIES[path]
    if isinstance(entry, Quantity | Number | Gain):
        limits, unit = entry.limits, entry.dimension.unit
        if entry.dimension.name == "NUMBER" or isinstance(entry, Gain):
            outside = [f"{limits.high * 1.01!r}", f"{-limits.high * 1.01!r}"]
        else:
            outside = [f'"{limits.high * 1.01!r} {unit}"', f'"{-limits.high * 1.01!r} {unit}"']
    elif isinstance(entry, Count):
        outside = [str(entry.high + 1), str(entry.low - 1)]
    else:
        outside = ['"no such word"']
    for toml in outside:
        assert refusal(altered(demo, path, toml)).problems[0].path == path


def test_words_of_a_choice_are_all_taken():
    for path, entry in ENTRIES.items():
        if isinstance(entry, Choice):
            assert [entry.read(word.value) for word in entry.words] == list(entry.words), path


def test_entries_of_lists_are_found_by_their_place():
    assert entry_at("kept[0].speed.kp") is ENTRIES["aims.speed.kp"]
    assert entry_at("kept[12].name") is not None
    assert entry_at("evidence[3].columns.angle.unit") is not None
    assert entry_at("title") is not None
    assert entry_at("kept[0].speed") is entry_at("machine") is entry_at("nothing.here") is None
    assert set(LISTS) == {"kept", "evidence"}
