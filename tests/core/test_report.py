"""The report: the JSON that scripts rely on, and the text that people read."""

from __future__ import annotations

import io
import json

import pytest
from rich.console import Console

from gainbench.assess import assess
from gainbench.report import assessment_json, breaks, print_assessment
from gainbench.sheetfile import parse_sheet

FIGURES = {
    "crossover_hz", "phase_margin_deg", "delay_margin_s", "gain_margin_db", "gain_reduction_db", "peak_sensitivity",
    "bandwidth_hz",
}  # fmt: skip
SPEED_KEYS = {"kp", "ki", "stable", "units", "firmware", *FIGURES}
CURRENT_KEYS = {*SPEED_KEYS, "step_rise_s", "step_overshoot_percent"}
RESPONSE_KEYS = {
    "overshoot_percent", "rise_time_s", "settling_time_s", "load_dip_rad_s", "recovery_time_s", "peak_current_a",
    "rms_current_a", "peak_voltage_v", "current_limited_s", "voltage_limited_s", "returned_energy_j",
}  # fmt: skip
DEMOS = ["label-unwinder", "bottle-indexer", "sieve-drum"]


@pytest.fixture(scope="module")
def demos(demo_texts):
    return {name: assess(parse_sheet(text, f"{name}.bench.toml").sheet) for name, text in demo_texts.items()}


@pytest.fixture
def changed(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "label-unwinder.bench.toml")
    return lambda values: assess(document.with_values(values).sheet)


def printed(assessment, width=100):
    out = io.StringIO()
    print_assessment(assessment, Console(file=out, width=width, highlight=False, markup=False, emoji=False))
    return out.getvalue()


@pytest.mark.parametrize("name", DEMOS)
def test_json_has_the_shape_of_the_contract(demos, name):
    found = json.loads(json.dumps(assessment_json(demos[name]), allow_nan=False))
    assert list(found) == ["format", "title", "current", "speed", "response", "findings"]
    assert found["format"] == 1
    assert found["current"].keys() == CURRENT_KEYS
    assert found["speed"].keys() == SPEED_KEYS
    assert found["response"].keys() == RESPONSE_KEYS
    assert found["current"]["units"] == {"kp": "V/A", "ki": "V/(A*s)"}
    assert found["speed"]["units"] == {"kp": "A*s/rad", "ki": "A/rad"}
    for finding in found["findings"]:
        assert list(finding) == ["code", "level", "subject", "text"]
        assert finding["level"] in {"holds", "thin", "breaks"}


def test_json_holds_the_values_themselves(demos):
    assessment = demos["label-unwinder"]
    found = json.loads(json.dumps(assessment_json(assessment)))
    for name, loop in (("current", assessment.current), ("speed", assessment.speed)):
        assert (found[name]["kp"], found[name]["ki"]) == (loop.gains.kp, loop.gains.ki)
        assert {key: found[name][key] for key in FIGURES} == {key: getattr(loop.figures, key) for key in FIGURES}
        assert found[name]["stable"] is True
    assert found["current"]["step_rise_s"] == assessment.locked_step.rise_s
    assert {key: getattr(assessment.response.figures, key) for key in RESPONSE_KEYS} == found["response"]


def test_json_has_the_gains_in_the_firmwares_form(demos):
    found = assessment_json(demos["bottle-indexer"])
    gains = demos["bottle-indexer"].speed.gains
    assert found["speed"]["firmware"]["ti"] == {"value": gains.kp / gains.ki, "unit": "s"}
    assert found["speed"]["firmware"]["kp"]["unit"] == "A/rpm"
    assert found["current"]["firmware"]["kp"]["unit"] == "V/A"


def test_a_refused_loop_is_null_throughout(changed):
    assessment = changed({"aims.speed.crossover": "900 Hz"})
    found = assessment_json(assessment)
    assert found["speed"].keys() == SPEED_KEYS
    assert {found["speed"][key] for key in ("kp", "ki", "stable", *FIGURES)} == {None}
    assert found["speed"]["firmware"] == {
        "kp": {"value": None, "unit": "A*s/rad"},
        "ki": {"value": None, "unit": "A/rad"},
    }
    assert found["response"] is None
    assert found["current"]["stable"] is True
    assert breaks(assessment)


def test_an_unstable_loop_keeps_its_gains_and_no_figures(changed):
    by_hand = {"method": "by-hand", "kp": "30 V/A", "ki": "4681 V/(A*s)"}
    assessment = changed({f"aims.current.{key}": value for key, value in by_hand.items()})
    found = assessment_json(assessment)["current"]
    assert (found["kp"], found["ki"], found["stable"]) == (30.0, 4681.0, False)
    assert {found[key] for key in (*FIGURES, "step_rise_s", "step_overshoot_percent")} == {None}
    text = printed(assessment)
    assert "not stable" in text
    assert "Do not run these gains" in text


@pytest.mark.parametrize("name", DEMOS)
@pytest.mark.parametrize("width", [80, 100])
def test_text_is_aligned_and_within_the_width(demos, name, width):
    lines = printed(demos[name], width).splitlines()
    assert all(len(line) <= width and line == line.rstrip() for line in lines)
    values = [line.index(word) for line in lines for word in ("60.00 deg",) if word in line]
    assert len(set(values)) == 1


def test_text_says_findings_and_units(demos):
    text = " ".join(printed(demos["bottle-indexer"]).split())
    for finding in demos["bottle-indexer"].findings:
        assert finding.text in text
    assert "V/A, peak amperes" in text
    assert "A/rpm" in text
    assert "Ti in the firmware's form" in text


def test_the_si_form_is_not_said_twice(demos):
    assert "firmware's form" not in printed(demos["label-unwinder"])


def test_a_title_is_not_taken_for_markup(changed):
    assert printed(changed({"title": "[red]x[/red] :smile:"})).splitlines()[0] == "[red]x[/red] :smile:"


def test_nothing_breaks_in_the_demos(demos):
    assert not any(breaks(one) for one in demos.values())
