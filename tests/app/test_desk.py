import math

import pytest

from gainbench.errors import SheetError
from gainbench.model import DesignMethod, EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.sheetfile import SheetDocument, add_evidence, parse_sheet, read_sheet
from gainbench_app.desk import Desk
from gainbench_app.live import Readiness

CROSSOVER = "aims.current.crossover"
MARGIN = "aims.speed.phase_margin"


def drag(desk, path, *values):
    desk.begin_gesture(path)
    for value in values:
        desk.move(path, value)
        desk.compute_now()


def test_it_opens_assessed(desk):
    assert desk.assessment.current.figures.crossover_hz == pytest.approx(1000.0)
    assert desk.valid
    assert desk.unsaved_since is None
    assert not desk.can_undo
    assert desk.text("machine.resistance") == "0.60 ohm"
    assert desk.text("train.ratio") == "3.0"
    assert desk.text("duty.stop_at") is None


def test_a_typed_value_is_assessed_and_can_be_taken_back(desk, clock):
    clock[0] += 60.0
    desk.set_values({"machine.inductance": "0.9 mH"})
    desk.compute_now()
    assert desk.assessment.sheet.rig.machine.inductance == pytest.approx(0.9e-3)
    assert desk.unsaved_since == clock[0]
    desk.undo()
    desk.compute_now()
    assert desk.text("machine.inductance") == "0.45 mH"
    assert desk.assessment.sheet.rig.machine.inductance == pytest.approx(0.45e-3)
    assert desk.unsaved_since is None
    desk.redo()
    assert desk.text("machine.inductance") == "0.9 mH"


def test_a_drag_is_one_step_of_undo(desk):
    drag(desk, CROSSOVER, *(math.tau * hertz for hertz in (900.0, 800.0, 700.0)))
    desk.end_gesture()
    assert desk.text(CROSSOVER) == "0.7 kHz"
    assert desk.assessment.current.figures.crossover_hz == pytest.approx(700.0)
    desk.undo()
    assert desk.text(CROSSOVER) == "1 kHz"
    assert not desk.can_undo


def test_a_drag_can_be_taken_back(desk):
    drag(desk, CROSSOVER, math.tau * 700.0)
    desk.cancel_gesture()
    desk.compute_now()
    assert desk.text(CROSSOVER) == "1 kHz"
    assert desk.assessment.current.figures.crossover_hz == pytest.approx(1000.0)
    assert not desk.can_undo


def test_a_drag_that_goes_nowhere_is_no_step(desk):
    desk.begin_gesture(CROSSOVER)
    desk.end_gesture()
    assert not desk.can_undo


def test_one_move_without_a_drag_is_a_step(desk):
    desk.move(CROSSOVER, math.tau * 800.0)
    assert desk.can_undo
    assert desk.text(CROSSOVER) == "0.8 kHz"


@pytest.mark.parametrize(
    ("path", "value"),
    [(CROSSOVER, math.tau * 9000.0), (MARGIN, math.radians(89.9)), ("aims.speed.crossover", math.tau * 900.0)],
)
def test_a_slider_stops_at_the_edge_of_what_can_be_met(desk, path, value):
    drag(desk, path, value)
    desk.end_gesture()
    loop = desk.assessment.current if ".current." in path else desk.assessment.speed
    assert loop.refusal is None
    assert loop.figures.stable
    reached = (
        desk.sheet.aims.current.crossover if path == CROSSOVER else getattr(desk.sheet.aims.speed, path.split(".")[2])
    )
    assert reached < value
    # A hair further it cannot be met: this is the edge, not somewhere before it.
    further = Desk(desk.settled_document().with_value(path, f"{reached * 1.003!r} rad{'' if path == MARGIN else '/s'}"))
    further.compute_now()
    assert (further.assessment.current if ".current." in path else further.assessment.speed).refusal is not None


def test_words_follow_the_curves_of_a_drag_and_not_every_one(desk, qtbot):
    told = []
    desk.assessed.connect(lambda: told.append("curves"))
    desk.changed.connect(lambda: told.append("changed"))
    desk.words_due.connect(lambda: told.append("words"))
    desk.begin_gesture(CROSSOVER)
    desk.move(CROSSOVER, math.tau * 800.0)
    qtbot.waitUntil(lambda: "words" in told)
    assert told == ["curves", "changed", "words"]
    told.clear()
    for hertz in range(801, 811):
        desk.move(CROSSOVER, math.tau * hertz)
        qtbot.waitUntil(lambda hertz=hertz: desk.assessment.sheet.aims.current.crossover > math.tau * (hertz - 0.5))
    assert 0 < told.count("words") < told.count("curves") == 10


def test_the_end_of_a_drag_says_at_once_what_it_drew(desk):
    said = []
    desk.words_due.connect(lambda: said.append(desk.assessment.sheet.aims.current.crossover))
    desk.begin_gesture(CROSSOVER)
    desk.move(CROSSOVER, math.tau * 800.0)
    desk.end_gesture()
    assert said == [pytest.approx(math.tau * 800.0)]
    desk.set_values({CROSSOVER: "900 Hz"})
    desk.compute_now()
    assert said[1:] == [pytest.approx(math.tau * 900.0)]


def test_what_is_moved_beyond_the_edge_is_told_where_it_stopped(desk):
    moved = []
    desk.number_moved.connect(lambda path: moved.append((path, desk.text(path))))
    desk.begin_gesture(CROSSOVER)
    desk.move(CROSSOVER, math.tau * 9000.0)
    assert moved == [(CROSSOVER, "9 kHz")]
    desk.compute_now()
    assert moved[1:] == [(CROSSOVER, desk.text(CROSSOVER))]
    assert desk.text(CROSSOVER) != "9 kHz"


def test_from_a_refused_target_a_slider_moves_freely(desk):
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    desk.compute_now()
    assert desk.assessment.speed.refusal is not None
    drag(desk, "aims.speed.crossover", math.tau * 800.0)
    assert desk.text("aims.speed.crossover") == "800 Hz"
    drag(desk, "aims.speed.crossover", math.tau * 50.0)
    desk.end_gesture()
    assert desk.assessment.speed.refusal is None


def test_the_text_follows_when_the_hand_rests(desk, qtbot):
    drag(desk, CROSSOVER, math.tau * 700.0)
    qtbot.wait(500)
    assert desk.state.document.typed(CROSSOVER) == "1 kHz"
    desk.end_gesture()
    qtbot.waitUntil(lambda: desk.state.document.typed(CROSSOVER) == "0.7 kHz")
    assert not desk.state.live
    assert desk.sheet == desk.state.document.sheet


def test_a_wrong_entry_keeps_its_text_and_the_last_valid_assessment(desk):
    before = desk.assessment
    desk.set_values({"machine.resistance": "0.6 kg"})
    desk.compute_now()
    assert not desk.valid
    assert desk.text("machine.resistance") == "0.6 kg"
    assert "a resistance is meant" in desk.problem("machine.resistance")
    assert desk.assessment is before
    desk.undo()
    assert desk.valid


def test_a_method_starts_from_the_loop_as_it_is(desk):
    before = desk.assessment.current.gains
    desk.choose_method("current", DesignMethod.BY_HAND)
    desk.compute_now()
    assert desk.sheet.aims.current.method is DesignMethod.BY_HAND
    assert desk.assessment.current.gains.kp == pytest.approx(before.kp, rel=1e-4)
    assert desk.text(CROSSOVER) == "1 kHz"
    drag(desk, "aims.current.kp", 3.0)
    desk.end_gesture()
    assert desk.text("aims.current.kp") == "3 V/A"
    assert desk.assessment.current.gains.kp == pytest.approx(3.0)


def test_it_saves_what_is_in_force(desk, tmp_path):
    path = tmp_path / "mine.bench.toml"
    drag(desk, CROSSOVER, math.tau * 700.0)
    desk.end_gesture()
    desk.save(path)
    assert read_sheet(path).sheet == desk.sheet
    assert read_sheet(path).typed(CROSSOVER) == "0.7 kHz"
    assert desk.path == path
    assert desk.unsaved_since is None
    desk.undo()
    assert desk.unsaved_since is not None


def test_saved_in_another_folder_it_still_finds_its_logs(desk, tmp_path):
    here, there = tmp_path / "a" / "x.bench.toml", tmp_path / "b" / "x.bench.toml"
    for one in (here, there):
        one.parent.mkdir()
    here.with_name("run.csv").write_text("t,i,n")
    columns = tuple(
        LogColumn(signal=SignalName(name), column=name, unit=unit)
        for name, unit in (("time", "s"), ("current", "A"), ("speed", "rpm"))
    )
    log = EvidenceLog(log="run.csv", experiment=Experiment.DRIVEN, columns=columns)
    desk.edit(lambda document: add_evidence(document, log))
    desk.save(here)
    assert read_sheet(here).sheet.evidence[0].log == "run.csv"
    desk.save(there)
    assert read_sheet(there).sheet.evidence[0].log == desk.sheet.evidence[0].log == "../a/run.csv"
    assert desk.unsaved_since is None


def test_it_does_not_save_what_is_not_valid(desk, tmp_path):
    desk.set_values({"machine.resistance": "0.6 kg"})
    with pytest.raises(SheetError, match=r"machine\.resistance"):
        desk.save(tmp_path / "mine.bench.toml")
    assert not list(tmp_path.iterdir())


def test_it_does_not_save_to_nowhere(desk):
    with pytest.raises(SheetError, match="no file"):
        desk.save()


def test_opening_another_sheet_forgets_the_first(desk, demo_texts, tmp_path):
    desk.set_values({"machine.resistance": "0.6 kg"})
    path = tmp_path / "drum.bench.toml"
    path.write_text(demo_texts["sieve-drum"], encoding="utf-8")
    desk.open_path(path)
    desk.compute_now()
    assert desk.valid
    assert not desk.can_undo
    assert desk.assessment.plant.elastic
    assert desk.text("machine.resistance") == "0.28 ohm"
    desk.open_text(demo_texts["bottle-indexer"], "bottle-indexer.bench.toml")
    assert desk.path is None


def test_a_sheet_that_cannot_be_read_leaves_the_open_one(desk, tmp_path):
    with pytest.raises(SheetError):
        desk.open_path(tmp_path / "none.bench.toml")
    assert desk.sheet.title == "Label unwinder"


def test_margins_are_live_before_the_response_can_be_computed(qapp, demo_texts):
    desk = Desk(parse_sheet(demo_texts["label-unwinder"], "x.bench.toml"), readiness=Readiness.NOTHING)
    desk.compute_now()
    assert desk.assessment is None
    desk.reach(Readiness.LOOPS)
    desk.compute_now()
    assert desk.assessment.speed.figures.phase_margin_deg == pytest.approx(60.0)
    assert desk.assessment.response is None
    drag(desk, MARGIN, math.radians(50.0))
    desk.end_gesture()
    assert desk.assessment.speed.figures.phase_margin_deg == pytest.approx(50.0)
    desk.reach(Readiness.ALL)
    desk.compute_now()
    assert desk.assessment.response is not None


def test_a_text_that_cannot_be_edited_is_told(desk, qtbot, monkeypatch):
    def refuses(self, values):
        raise SheetError("this table cannot be changed")

    drag(desk, CROSSOVER, math.tau * 700.0)
    monkeypatch.setattr(SheetDocument, "with_values", refuses)
    with qtbot.waitSignal(desk.trouble) as told:
        desk.end_gesture()
    assert told.args == ["this table cannot be changed"]
    assert desk.text(CROSSOVER) == "0.7 kHz"
    with qtbot.waitSignal(desk.trouble):
        desk.set_values({"machine.resistance": "0.7 ohm"})
    assert desk.sheet.rig.machine.resistance == pytest.approx(0.6)


def test_a_drag_in_the_reach_map_moves_two_targets_as_one_step(desk):
    desk.begin_gesture("aims.speed")
    for hertz, degrees in ((50.0, 65.0), (40.0, 70.0)):
        values = {"aims.speed.crossover": math.tau * hertz, MARGIN: math.radians(degrees)}
        desk.move_all("aims.speed", values)
        desk.compute_now()
    desk.end_gesture()
    assert (desk.text("aims.speed.crossover"), desk.text(MARGIN)) == ("40 Hz", "70 deg")
    desk.undo()
    assert (desk.text("aims.speed.crossover"), desk.text(MARGIN)) == ("60 Hz", "60 deg")
    assert not desk.can_undo


@pytest.mark.parametrize(("hertz", "degrees"), [(60.0, 89.9), (900.0, 60.0)])
def test_a_drag_in_the_reach_map_stops_at_the_edge(desk, hertz, degrees):
    desk.begin_gesture("aims.speed")
    desk.move_all("aims.speed", {"aims.speed.crossover": math.tau * hertz, MARGIN: math.radians(degrees)})
    desk.compute_now()
    desk.end_gesture()
    assert desk.assessment.speed.refusal is None
    assert desk.assessment.sheet == desk.sheet


def test_gains_are_held_as_a_state_of_the_desk_that_can_be_taken_back(desk):
    gains = desk.assessment.current.gains
    desk.hold("current", True)
    assert desk.held("current")
    assert not desk.held("speed")
    assert desk.unsaved_since is None
    desk.set_values({"machine.inductance": "0.9 mH"})
    desk.compute_now()
    assert desk.held("current")
    assert desk.assessment.current.gains == gains
    assert desk.sheet.aims.current.method is DesignMethod.CROSSOVER_MARGIN
    assert "by-hand" not in desk.settled_document().text()
    desk.undo()
    desk.undo()
    desk.compute_now()
    assert not desk.held("current")
    assert not desk.can_undo
    desk.redo()
    assert desk.held("current")


def test_another_method_lets_go_of_held_gains(desk):
    desk.hold("speed", True)
    desk.choose_method("speed", DesignMethod.POLE_PLACEMENT)
    assert not desk.held("speed")
    desk.undo()
    assert desk.held("speed")
    assert desk.sheet.aims.speed.method is DesignMethod.CROSSOVER_MARGIN


def test_gains_that_are_not_there_are_not_held(desk):
    desk.set_values({"aims.speed.crossover": "900 Hz"})
    desk.compute_now()
    desk.hold("speed", True)
    desk.take_over("speed")
    assert not desk.held("speed")
    assert desk.sheet.aims.speed.method is DesignMethod.CROSSOVER_MARGIN


def test_gains_in_force_become_gains_by_hand_over_older_ones(desk):
    desk.set_values({"aims.speed.kp": "9 A*s/rad", "aims.speed.ti": "1 s"})
    desk.compute_now()
    gains = desk.assessment.speed.gains
    desk.hold("speed", True)
    desk.set_values({"train.load_inertia": "7.2 kg*cm^2"})
    desk.take_over("speed")
    desk.compute_now()
    assert desk.sheet.aims.speed.method is DesignMethod.BY_HAND
    assert desk.text("aims.speed.ti") is None
    assert desk.assessment.speed.gains.kp == pytest.approx(gains.kp, rel=1e-4)
    assert desk.assessment.speed.gains.ki == pytest.approx(gains.ki, rel=1e-4)
    assert not desk.held("speed")
