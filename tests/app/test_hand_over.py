import math

import pytest

from gainbench.errors import HandoverError
from gainbench.handover import read_origin
from gainbench.sheetfile import digest
from gainbench_app.hand_over import hand_over
from gainbench_app.handover_dialog import HandoverChoice


def test_the_header_is_of_what_is_shown(desk, answers, tmp_path):
    desk.save(tmp_path / "mine.bench.toml")
    desk.move("aims.current.crossover", math.tau * 700.0)
    answers.choice = HandoverChoice(folder=tmp_path / "firmware", prefix=None)
    hand_over(None, desk, answers)
    header = tmp_path / "firmware" / "label_unwinder_gains.h"
    origin = read_origin(header)
    assert origin.digest == digest(desk.state.document)
    assert float(origin.values["CURRENT_KP"].rstrip("F")) == pytest.approx(desk.assessment.current.gains.kp, rel=1e-6)
    assert str(header) in answers.told[0][1]


def test_it_says_what_to_know_before(desk, answers, tmp_path):
    hand_over(None, desk, answers)
    request = answers.requests[0]
    assert request.title == "Label unwinder"
    assert any("not saved" in one for one in request.remarks)
    desk.save(tmp_path / "mine.bench.toml")
    desk.set_values({"duty.reference_speed": "9000 rpm"})
    desk.compute_now()
    desk.save()
    hand_over(None, desk, answers)
    assert answers.requests[1].folder == tmp_path
    assert answers.requests[1].remarks
    assert all(one.startswith("Breaks: ") for one in answers.requests[1].remarks)
    assert answers.told == []


def test_a_file_that_is_there_is_replaced_only_when_asked(desk, answers, tmp_path):
    answers.choice = HandoverChoice(folder=tmp_path, prefix="AXIS")
    header = tmp_path / "label_unwinder_gains.h"
    header.write_text("mine", encoding="utf-8")
    hand_over(None, desk, answers)
    assert header.read_text(encoding="utf-8") == "mine"
    answers.replace = True
    hand_over(None, desk, answers)
    assert "AXIS" in header.read_text(encoding="utf-8")
    assert answers.asked == ["replace label_unwinder_gains.h"] * 2


def test_a_prefix_that_will_not_do_writes_nothing(desk, answers, tmp_path):
    answers.choice = HandoverChoice(folder=tmp_path, prefix="9 lives")
    with pytest.raises(HandoverError):
        hand_over(None, desk, answers)
    assert not list(tmp_path.iterdir())
