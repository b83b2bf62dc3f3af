import math
from dataclasses import replace

import pytest

from gainbench.model import DesignMethod, HandGains
from gainbench.sheetfile import parse_sheet
from gainbench_app.desk_state import State, as_text, moved, settled, typed

CROSSOVER = "aims.current.crossover"


@pytest.fixture
def state(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "label-unwinder.bench.toml")
    return State(document=document, sheet=document.sheet)


def test_what_is_taken_goes_into_the_text_as_typed(state):
    after = typed(state, {"machine.resistance": "700 mohm"})
    assert after.state.valid
    assert after.state.document.typed("machine.resistance") == "700 mohm"
    assert after.state.sheet.rig.machine.resistance == pytest.approx(0.7)
    assert after.taken == {"machine.resistance": "700 mohm"}


def test_what_is_refused_keeps_its_text_and_the_last_valid_sheet(state):
    after = typed(state, {"machine.resistance": "0.6 kg"}).state
    assert not after.valid
    assert after.sheet == state.sheet
    assert after.wrong == {"machine.resistance": "0.6 kg"}
    assert "a resistance is meant" in after.problems["machine.resistance"]
    assert "0.60 ohm" in after.problems["machine.resistance"]


def test_an_entry_that_is_taken_out_and_needed_is_missing(state):
    after = typed(state, {"machine.resistance": None}).state
    assert "is missing" in after.problems["machine.resistance"]


def test_other_entries_are_taken_while_one_is_wrong(state):
    wrong = typed(state, {"machine.resistance": "0.6 kg"}).state
    after = typed(wrong, {"machine.inductance": "0.5 mH"}).state
    assert after.sheet.rig.machine.inductance == pytest.approx(0.5e-3)
    assert after.wrong == wrong.wrong
    assert after.problems.keys() == {"machine.resistance"}


def test_two_entries_that_are_right_only_together_are_taken_together(state):
    first = typed(state, {"stage.pwm_frequency": "16 kHz"}).state
    assert first.problems.keys() == {"stage.current_rate"}
    second = typed(first, {"stage.current_rate": "16 kHz"}).state
    assert second.valid
    assert second.sheet.rig.stage.pwm_frequency == second.sheet.rig.stage.current_rate == 16_000.0


def test_a_right_text_replaces_a_wrong_one(state):
    wrong = typed(state, {"machine.resistance": "0.6 kg"}).state
    assert typed(wrong, {"machine.resistance": "0.6 ohm"}).state.valid


def test_a_slider_moves_the_sheet_and_the_text_follows(state):
    after = moved(state, CROSSOVER, math.tau * 1050.0)
    assert after.live == {CROSSOVER: "1.05 kHz"}
    assert after.document is state.document
    text = settled(after)
    assert text.document.typed(CROSSOVER) == "1.05 kHz"
    assert text.sheet == after.sheet
    assert not text.live


def test_a_number_the_sheet_would_refuse_moves_nothing(state):
    assert moved(state, "aims.current.phase_margin", 4.0) is state


def test_typing_takes_along_what_a_slider_moved(state):
    after = typed(moved(state, CROSSOVER, math.tau * 1050.0), {"machine.inductance": "0.5 mH"})
    assert after.state.document.typed(CROSSOVER) == "1.05 kHz"
    assert after.taken == {CROSSOVER: "1.05 kHz", "machine.inductance": "0.5 mH"}


def test_a_slider_replaces_a_wrong_text(state):
    wrong = typed(state, {CROSSOVER: "fast"}).state
    assert moved(wrong, CROSSOVER, math.tau * 900.0).valid
    both = typed(wrong, {"machine.resistance": "0.6 kg"}).state
    after = moved(both, CROSSOVER, math.tau * 900.0)
    assert after.problems.keys() == {"machine.resistance"}


def test_comments_and_order_survive(state):
    after = typed(moved(state, CROSSOVER, math.tau * 1050.0), {"machine.resistance": "0.7 ohm"}).state
    before, now = (one.document.text().splitlines() for one in (state, after))
    assert len(before) == len(now)
    changed = [line for line, other in zip(before, now, strict=True) if line != other]
    assert len(changed) == 2
    assert "# brushed: terminal to terminal, at winding_temperature" in after.document.text()


def test_entries_stand_in_a_box_as_in_the_sheet():
    assert [as_text(one) for one in (True, False, 0.5, 3, "1 kHz")] == ["true", "false", "0.5", "3", "1 kHz"]


def test_held_gains_are_assessed_and_not_in_the_sheet(demo_texts):
    document = parse_sheet(demo_texts["label-unwinder"], "x.bench.toml")
    free = State(document=document, sheet=document.sheet)
    assert free.assessed_sheet is free.sheet
    hand = HandGains(kp=0.3, ki=20.0)
    held = replace(free, held={"speed": hand})
    assert held.assessed_sheet.aims.speed.method is DesignMethod.BY_HAND
    assert held.assessed_sheet.aims.speed.hand == hand
    assert held.assessed_sheet.aims.current == free.sheet.aims.current
    assert held.sheet == free.sheet
    for values in ({"machine.inductance": "0.9 mH"}, {"machine.inductance": "0.9 kg"}):
        assert typed(held, values).state.held == held.held
    assert moved(held, "aims.current.crossover", 5000.0).held == held.held
