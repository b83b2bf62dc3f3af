"""What holds between entries: rates that divide, times that fit, keys that a kind needs, gains that fit together."""

from __future__ import annotations

import pytest

from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import parse_sheet

WRONG = [
    ("stage.speed_delay", "10", "below current_rate/speed_rate, which is 10"),
    ("stage.current_rate", '"12 kHz"', "twice stage.pwm_frequency"),
    ("stage.current_rate", '"60 kHz"', "twice stage.pwm_frequency"),
    ("stage.speed_rate", '"3 kHz"', "over a whole number"),
    ("stage.speed_rate", '"40 kHz"', "over a whole number"),
    ("stage.speed_rate", '"2000.001 Hz"', "over a whole number"),
    ("duty.length", '"101 s"', "2020000 ticks of the current loop, at most 2000000"),
    ("duty.length", '"50000 s"', "1000000000 ticks"),
    ("duty.load_at", '"451 ms"', "is beyond duty.length"),
    ("duty.reference_at", '"1 s"', "is beyond duty.length"),
    ("duty.stop_at", '"500 ms"', "is beyond duty.length"),
    ("duty.stop_at", '"10 ms"', "is before duty.reference_at"),
]


@pytest.mark.parametrize(("path", "toml", "reason"), WRONG)
def test_a_wrong_value_is_refused_and_the_example_is_taken(one_problem, demo, altered, path, toml, reason):
    problem = one_problem(altered(demo, path, toml))
    assert problem.path == path
    assert problem.value
    assert reason in problem.reason
    example = problem.example.removeprefix(f"{path} = ")
    assert parse_sheet(altered(demo, path, example), "bench").sheet


def test_a_length_below_one_period_is_refused(one_problem, elastic, altered):
    problem = one_problem(altered(elastic, "duty.length", '"1 us"'))
    assert "shorter than one period" in problem.reason
    assert parse_sheet(altered(elastic, "duty.length", problem.example), "bench").sheet


@pytest.mark.parametrize(
    ("changes", "path", "needs"),
    [
        ({"machine.kind": '"pm-sine"'}, "machine.pole_pairs", 'kind "pm-sine"'),
        ({"machine.kind": '"pm-sine"'}, "machine.winding_values", 'kind "pm-sine"'),
        ({"machine.kind": '"pm-sine"'}, "machine.current_values", 'kind "pm-sine"'),
        ({"machine.kind": '"pm-block"'}, "machine.pole_pairs", 'kind "pm-block"'),
        ({"machine.kind": '"pm-block"'}, "machine.winding_values", 'kind "pm-block"'),
        (
            {"machine.kind": '"pm-sine"', "machine.back_emf_constant": '"5 V/krpm"'},
            "machine.back_emf_values",
            'kind "pm-sine"',
        ),
        (
            {"machine.kind": '"pm-sine"', "machine.torque_constant": None, "machine.speed_constant": '"180 rpm/V"'},
            "machine.torque_constant",
            "a speed_constant is not used for pm-sine",
        ),
        ({"train.kind": '"elastic"'}, "train.shaft_stiffness", 'kind "elastic"'),
        ({"train.kind": '"elastic"'}, "train.shaft_damping", 'kind "elastic"'),
        ({"aims.current.method": '"bandwidth-margin"'}, "aims.current.bandwidth", 'method "bandwidth-margin"'),
        ({"aims.current.method": '"pole-placement"'}, "aims.current.natural_frequency", 'method "pole-placement"'),
        ({"aims.current.method": '"pole-placement"'}, "aims.current.damping", 'method "pole-placement"'),
        ({"aims.current.method": '"by-hand"'}, "aims.current.kp", 'method "by-hand"'),
        ({"aims.current.method": '"by-hand"'}, "aims.current.ki", "give one of ki, ti and wi"),
        ({"aims.speed.method": '"symmetric-optimum"'}, "aims.speed.spread", 'method "symmetric-optimum"'),
        ({"aims.speed.method": '"by-hand"'}, "aims.speed.kp", 'method "by-hand"'),
    ],
)
def test_a_kind_or_method_misses_its_keys(refusal, demo, altered, changes, path, needs):
    text = demo
    for key, toml in changes.items():
        text = altered(text, key, toml)
    found = {problem.path: problem for problem in refusal(text).problems}
    assert needs in found[path].reason
    assert found[path].example


@pytest.mark.parametrize(
    ("path", "method"),
    [("aims.current.method", "symmetric-optimum"), ("aims.speed.method", "magnitude-optimum")],
)
def test_a_method_of_the_other_loop_is_refused(one_problem, demo, altered, path, method):
    assert "must be one of" in one_problem(altered(demo, path, f'"{method}"')).reason


def test_an_elastic_train_needs_a_body_behind_its_shaft(one_problem, elastic, altered):
    problem = one_problem(altered(elastic, "train.load_inertia", '"0 kg*m^2"'))
    assert "above 0 behind an elastic shaft" in problem.reason


BY_HAND = {
    "aims.current": {"kp": '"2.66 V/A"', "ki": '"4681 V/(A*s)"'},
    "aims.speed": {"kp": '"0.481 A*s/rad"', "ki": '"57.6 A/rad"'},
}


def by_hand(altered, text, loop, **keys):
    """The text with a loop by hand; a key that is None is taken out."""
    text = altered(text, f"{loop}.method", '"by-hand"')
    for key, toml in (BY_HAND[loop] | keys).items():
        text = altered(text, f"{loop}.{key}", toml)
    return text


def kept(altered, text, loop, **keys):
    """The text with a kept tuning of these gains in one loop."""
    pairs = ", ".join(f"{key} = {toml}" for key, toml in (BY_HAND[loop] | keys).items() if toml is not None)
    return altered(text, f"kept[0].{loop.removeprefix('aims.')}", f"{{ {pairs} }}")


@pytest.fixture(params=[by_hand, kept], ids=["by-hand", "kept"])
def with_gains(request):
    return request.param


@pytest.mark.parametrize("loop", ["aims.current", "aims.speed"])
@pytest.mark.parametrize(
    ("keys", "at", "reason"),
    [
        ({"ki": None}, "ki", "give one of ki, ti and wi"),
        ({"ti": '"0.5 ms"'}, "ti", "ki is given as well"),
        ({"ki": None, "ti": '"0.5 ms"', "wi": '"2000 rad/s"'}, "wi", "ti is given as well"),
        ({"kp": "0", "ki": "0"}, "kp", "must not both be 0"),
        ({"kp": "0", "ki": None, "ti": '"0.5 ms"'}, "kp", "must be above 0 where ti is given"),
        ({"kp": "0", "ki": None, "wi": '"2000 rad/s"'}, "kp", "must be above 0 where wi is given"),
        ({"kp": "-1"}, "kp", "at least 0"),
        ({"ki": "-1"}, "ki", "at least 0"),
        ({"kp": '"1 V*s"'}, "kp", "is meant"),
        ({"ki": '"1 V"'}, "ki", "is meant"),
    ],
)
def test_gains_that_do_not_fit_together(demo, altered, one_problem, with_gains, loop, keys, at, reason):
    problem = one_problem(with_gains(altered, demo, loop, **keys))
    assert problem.path.endswith(f"{loop.removeprefix('aims.')}.{at}")
    assert problem.path.startswith(("aims.", "kept[0]."))
    assert reason in problem.reason


@pytest.mark.parametrize("loop", ["aims.current", "aims.speed"])
def test_back_calculation_needs_a_proportional_part(demo, altered, one_problem, with_gains, loop):
    text = with_gains(altered, demo, loop, kp="0")
    assert parse_sheet(text, "bench").sheet
    problem = one_problem(altered(text, "aims.firmware.windup", '"back-calculation"'))
    assert problem.path.endswith(".kp")
    assert 'windup is "back-calculation"' in problem.reason


@pytest.mark.parametrize(
    ("loop", "unit"),
    [("aims.current", "V/A"), ("aims.current", "ohm"), ("aims.speed", "A*s/rad"), ("aims.speed", "N*m*s/rad")],
)
def test_the_unit_of_ki_times_the_period_needs_the_switch(demo, altered, one_problem, with_gains, loop, unit):
    text = with_gains(altered, demo, loop, ki=f'"0.2 {unit}"')
    problem = one_problem(text)
    assert problem.path.endswith(".ki")
    assert "ki_includes_period is not true" in problem.reason
    assert parse_sheet(altered(text, "aims.firmware.ki_includes_period", "true"), "bench").sheet


def test_gains_of_another_method_may_be_incomplete(demo, altered):
    sheet = parse_sheet(altered(altered(demo, "aims.current.kp", "0"), "aims.current.ti", '"1 ms"'), "bench").sheet
    assert sheet.aims.current.hand is not None
    assert parse_sheet(altered(demo, "aims.current.kp", "1"), "bench").sheet.aims.current.hand is None


def test_names_on_the_shelf_differ(demo, one_problem):
    shelf = demo[demo.index("[[kept]]") :]
    problem = one_problem(f"{demo}\n{shelf}")
    assert problem.path == "kept[1].name"
    assert "kept[0] has this name as well" in problem.reason


EVIDENCE = """
[[evidence]]
log = "run-07.csv"
experiment = "driven"
[evidence.columns]
time = { column = "t", unit = "s" }
angle = { column = "qm", unit = "rad" }
torque = { column = "vir", unit = "N*m", scale = -35.15 }
"""


def test_evidence_is_taken(demo):
    (evidence,) = parse_sheet(demo + EVIDENCE, "bench").sheet.evidence
    assert evidence == EvidenceLog(
        log="run-07.csv",
        experiment=Experiment.DRIVEN,
        columns=(
            LogColumn(signal=SignalName.TIME, column="t", unit="s"),
            LogColumn(signal=SignalName.TORQUE, column="vir", unit="N*m", scale=-35.15),
            LogColumn(signal=SignalName.ANGLE, column="qm", unit="rad"),
        ),
    )
    assert parse_sheet(demo, "bench").sheet.evidence == ()


@pytest.mark.parametrize(
    ("old", "new", "path", "reason"),
    [
        ('"driven"', '"drivn"', "evidence[0].experiment", "driven is near"),
        ('unit = "rad"', 'unit = "1/s"', "evidence[0].columns.angle.unit", "an angle is meant"),
        ('unit = "s"', 'unit = "rpm"', "evidence[0].columns.time.unit", "a time is meant"),
        ("-35.15", "0", "evidence[0].columns.torque.scale", "must not be 0"),
        ("-35.15", "nan", "evidence[0].columns.torque.scale", "must be finite"),
        (', unit = "rad"', "", "evidence[0].columns.angle.unit", "is missing"),
        ('{ column = "t", unit = "s" }', '"t"', "evidence[0].columns.time", "must be a table"),
        ("angle =", "angel =", "evidence[0].columns.angel", "angle is near"),
        ('log = "run-07.csv"\n', "", "evidence[0].log", "is missing"),
        ('column = "qm"', "column = 3", "evidence[0].columns.angle.column", "text in quotes"),
        (EVIDENCE[EVIDENCE.index("time =") :], "", "evidence[0].columns", "names no signal"),
        (EVIDENCE[EVIDENCE.index("[evidence.col") :], "", "evidence[0].columns", "is missing"),
    ],
)
def test_evidence_is_refused(demo, one_problem, old, new, path, reason):
    assert old in EVIDENCE
    problem = one_problem(demo + EVIDENCE.replace(old, new))
    assert problem.path == path
    assert reason in problem.reason
