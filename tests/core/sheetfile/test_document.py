"""An open sheet: what was typed is what is shown and saved."""

from __future__ import annotations

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from gainbench.errors import SheetError
from gainbench.model import EvidenceLog, Experiment, LogColumn, SignalName
from gainbench.results import Gains
from gainbench.sheetfile import add_evidence, add_kept, digest, move_kept, parse_sheet, remove_evidence, remove_kept

FIRST = Gains(kp=1.0 / 3.0, ki=1e4 / 7.0)
SECOND = Gains(kp=0.1, ki=2e2 / 3.0)


def test_the_text_is_the_users(demo_texts):
    for name, text in demo_texts.items():
        assert parse_sheet(text, name).text() == text


@given(data=st.data())
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_comments_blanks_and_spacing_come_back_as_they_were(demo, data):
    words = st.text(alphabet=st.characters(exclude_categories=["Cc", "Cs"]), max_size=20)
    lines = demo.split("\n")
    for _ in range(data.draw(st.integers(min_value=0, max_value=5))):
        place = data.draw(st.integers(min_value=0, max_value=len(lines) - 1))
        line = lines[place]
        change = data.draw(st.sampled_from(["comment", "blank", "indent", "space", "tail"]))
        if change in {"comment", "blank"}:
            lines.insert(place, f"# {data.draw(words)}" if change == "comment" else " \t")
        elif change == "indent":
            lines[place] = "  " + line
        elif change == "space" and not line.startswith(("#", "[")):
            lines[place] = line.replace(" = ", "=", 1)
        elif change == "tail" and line and "#" not in line:
            lines[place] = f"{line}\t # {data.draw(words)}"
    text = "\n".join(lines)
    document = parse_sheet(text, "x")
    assert document.text() == text
    assert digest(document) == digest(demo)


@pytest.mark.parametrize(
    ("path", "typed"),
    [
        ("machine.resistance", "0.60 ohm"),
        ("train.ratio", "3.0"),
        ("stage.speed_delay", "0"),
        ("aims.firmware.back_emf_feedforward", "false"),
        ("aims.current.method", "crossover-margin"),
        ("kept[0].speed.kp", "0.481 A*s/rad"),
        ("kept[0].name", "first light"),
        ('tolerance."machine.resistance"', "10 %"),
        ("tolerance.machine.resistance", "10 %"),
        ("title", "Label unwinder"),
        ("duty.stop_at", None),
        ("kept[1].name", None),
        ("nothing.here", None),
        ("machine", None),
        ("kept", None),
        ("kept[0].speed", None),
    ],
)
def test_typed(demo, path, typed):
    assert parse_sheet(demo, "x").typed(path) == typed


@pytest.mark.parametrize("toml", ["1e0", "+1", "0x1", "1_0.0", "1.0E+0"])
def test_a_number_is_shown_as_it_is_spelled(demo, altered, toml):
    assert parse_sheet(altered(demo, "train.ratio", toml), "x").typed("train.ratio") == toml


@pytest.mark.parametrize("path", ["", ".", "a..b", "kept[", "kept[x].name", "a]b"])
def test_what_is_no_path(demo, path):
    document = parse_sheet(demo, "x")
    with pytest.raises(SheetError, match="is not the path of an entry"):
        document.typed(path)
    with pytest.raises(SheetError, match="is not the path of an entry"):
        document.with_value(path, "1")


def test_an_edit_gives_a_new_document(demo):
    document = parse_sheet(demo, "x")
    other = document.with_values({"machine.resistance": "0.7 ohm", "train.ratio": 2.0})
    assert (document.text(), document.sheet.rig.machine.resistance) == (demo, 0.6)
    assert (other.sheet.rig.machine.resistance, other.sheet.rig.train.ratio) == (0.7, 2.0)
    assert other.name == "x"


def test_a_refused_edit_leaves_the_document(demo):
    document = parse_sheet(demo, "x")
    with pytest.raises(SheetError) as caught:
        document.with_values({"machine.resistance": "0.7 ohm", "stage.bus_voltage": "0 V"})
    assert [one.path for one in caught.value.problems] == ["stage.bus_voltage"]
    assert document.text() == demo


def test_a_new_name_is_the_title_of_a_sheet_without_one(elastic):
    document = parse_sheet(elastic, "one.bench.toml")
    other = document.renamed("two.bench.toml")
    assert (document.sheet.title, other.sheet.title, other.name) == ("one", "two", "two.bench.toml")
    assert other.text() == document.text()


def test_the_shelf_takes_a_tuning_with_the_very_same_gains(demo_texts, elastic):
    for text in (*demo_texts.values(), elastic, elastic.rstrip("\n"), elastic.replace("\n", "\r\n")):
        document = parse_sheet(text, "x")
        kept = add_kept(document, 'a "new" one', current=FIRST, speed=SECOND, note="a # note")
        kept = add_kept(kept, "another", current=SECOND, speed=FIRST)
        one, two = kept.sheet.kept[-2:]
        assert (one.name, one.note, two.note) == ('a "new" one', "a # note", "")
        assert (one.current.kp, one.current.ki, two.speed.kp, two.speed.ki) == (FIRST.kp, FIRST.ki) * 2
        assert (one.speed.kp, one.speed.ki, two.current.kp, two.current.ki) == (SECOND.kp, SECOND.ki) * 2
        assert kept.text().startswith(text.rstrip("\r\n"))
        assert ("\r\n" in kept.text()) == ("\r\n" in text)
        bare = remove_kept(remove_kept(kept, 'a "new" one'), "another")
        assert bare.sheet == document.sheet
        assert bare.text().rstrip("\r\n") == text.rstrip("\r\n")


@given(
    numbers=st.lists(st.floats(min_value=1e-12, max_value=1e12), min_size=4, max_size=4),
    name=st.text(alphabet=st.characters(exclude_categories=["Cc", "Cs", "Zl", "Zp", "Cf"]), min_size=1, max_size=30),
)
@settings(suppress_health_check=[HealthCheck.function_scoped_fixture], max_examples=40)
def test_any_gains_come_back_from_the_shelf(elastic, numbers, name):
    current, speed = Gains(kp=numbers[0], ki=numbers[1]), Gains(kp=numbers[2], ki=numbers[3])
    document = parse_sheet(elastic, "x")
    if not name.strip():
        with pytest.raises(SheetError, match="must not be empty"):
            add_kept(document, name, current=current, speed=speed)
        return
    (kept,) = add_kept(document, name, current=current, speed=speed).sheet.kept
    assert [kept.current.kp, kept.current.ki, kept.speed.kp, kept.speed.ki] == numbers
    assert kept.name == name


@pytest.mark.parametrize(
    ("name", "gains", "reason"),
    [
        ("first light", FIRST, "has this name as well"),
        ("", FIRST, "must not be empty"),
        ("two\nlines", FIRST, "control character"),
        ("x", Gains(kp=-1.0, ki=1.0), "at least 0"),
        ("x", Gains(kp=0.0, ki=0.0), "must not both be 0"),
        ("x", Gains(kp=float("nan"), ki=1.0), "must be finite"),
        ("x", Gains(kp=1.0, ki=float("inf")), "must be finite"),
    ],
)
def test_the_shelf_refuses(demo, name, gains, reason):
    with pytest.raises(SheetError, match=reason):
        add_kept(parse_sheet(demo, "x"), name, current=gains, speed=FIRST)


def test_a_tuning_that_is_not_there(demo):
    with pytest.raises(SheetError, match='holds no tuning "second"'):
        remove_kept(parse_sheet(demo, "x"), "second")


def test_taking_one_off_leaves_the_others(demo):
    document = add_kept(parse_sheet(demo, "x"), "second", current=FIRST, speed=SECOND)
    left = remove_kept(document, "first light")
    assert [one.name for one in left.sheet.kept] == ["second"]
    assert left.text().startswith(demo[: demo.index("[[kept]]")])


TIME = LogColumn(signal=SignalName.TIME, column='t "raw" [s]', unit="ms")
FIRST_LOG = EvidenceLog(log="run-07.csv", experiment=Experiment.DRIVEN, columns=(TIME,))
SECOND_LOG = EvidenceLog(
    log="logs/läuft aus.parquet",
    experiment=Experiment.COAST_DOWN,
    columns=(TIME, LogColumn(signal=SignalName.ANGLE, column="#3", unit="turn", scale=-1.0 / 4096.0)),
    note="second day",
)


def test_logs_are_added_behind_those_that_are_there(demo_texts):
    for name, text in demo_texts.items():
        document = parse_sheet(text, name)
        one = add_evidence(document, FIRST_LOG)
        both = add_evidence(one, SECOND_LOG)
        assert both.sheet.evidence == (FIRST_LOG, SECOND_LOG)
        assert both.text().startswith(one.text())
        assert one.text().startswith(text)
        assert "\n\n[[evidence]]\n" in one.text()
        assert both.typed("evidence[1].columns.angle.unit") == "turn"
        assert digest(both) == digest(document)


def test_a_mapping_is_corrected_and_a_log_taken_out(demo):
    both = add_evidence(add_evidence(parse_sheet(demo, "x"), FIRST_LOG), SECOND_LOG)
    corrected = both.with_values({"evidence[1].columns.angle.column": "qm", "evidence[1].columns.angle.scale": 0.5})
    assert corrected.sheet.evidence[1].columns[1] == LogColumn(
        signal=SignalName.ANGLE, column="qm", unit="turn", scale=0.5
    )
    assert remove_evidence(both, 0).sheet.evidence == (SECOND_LOG,)
    bare = remove_evidence(remove_evidence(both, 1), 0)
    assert bare.sheet == parse_sheet(demo, "x").sheet
    assert bare.text().rstrip("\n") == demo.rstrip("\n")


def test_a_tuning_is_kept_above_the_logs(demo):
    kept = add_kept(add_evidence(parse_sheet(demo, "x"), FIRST_LOG), "second", current=FIRST, speed=SECOND)
    assert kept.sheet.evidence == (FIRST_LOG,)
    assert kept.text().index('name = "second"') < kept.text().index("\n\n[[evidence]]")


@pytest.mark.parametrize(
    ("log", "reason"),
    [
        (EvidenceLog(log="a.csv", experiment=Experiment.DRIVEN, columns=()), "names no signal"),
        (EvidenceLog(log="", experiment=Experiment.DRIVEN, columns=(TIME,)), "must not be empty"),
        (EvidenceLog(log="a.csv", experiment=Experiment.DRIVEN, columns=(TIME, TIME)), "more than one column"),
        (
            EvidenceLog(
                log="a.csv",
                experiment=Experiment.DRIVEN,
                columns=(LogColumn(signal=SignalName.SPEED, column="w", unit="V"),),
            ),
            "a speed of rotation is meant",
        ),
    ],
)
def test_a_log_is_refused(demo, log, reason):
    with pytest.raises(SheetError, match=reason):
        add_evidence(parse_sheet(demo, "x"), log)


@pytest.mark.parametrize("index", [-1, 1, 7])
def test_a_log_that_is_not_there(demo, index):
    document = add_evidence(parse_sheet(demo, "x"), FIRST_LOG)
    with pytest.raises(SheetError, match=f"holds no log {index + 1}; it holds 1"):
        remove_evidence(document, index)


def names(document):
    return [one.name for one in document.sheet.kept]


def test_a_kept_tuning_is_moved_with_its_spelling_and_comments(demo):
    text = (
        demo
        + '\n[[kept]] # mine\nname = "z"\ncurrent = {kp = 1, ki=2}\nspeed = { kp = "1 A*s/rad", ki = 2 }\n# behind z\n'
    )
    document = add_kept(parse_sheet(text, "bench"), "last", current=FIRST, speed=SECOND)
    assert names(document) == ["first light", "z", "last"]
    moved = move_kept(document, "z", to=0)
    assert names(moved) == ["z", "first light", "last"]
    assert '[[kept]] # mine\nname = "z"\ncurrent = {kp = 1, ki=2}\n' in moved.text()
    assert "# behind z\n" in moved.text()
    assert "# the shelf\n" in moved.text()
    assert {one.name: one for one in moved.sheet.kept} == {one.name: one for one in document.sheet.kept}
    back = move_kept(moved, "z", to=1)
    assert back.sheet == document.sheet
    assert sorted(back.text().split()) == sorted(document.text().split())
    assert move_kept(document, "last", to=0).text().endswith("\n")
    assert not move_kept(document, "last", to=0).text().endswith("\n\n")


def test_a_move_that_leads_nowhere_is_refused(demo):
    document = parse_sheet(demo, "bench")
    with pytest.raises(SheetError, match='no tuning "none"'):
        move_kept(document, "none", to=0)
    for to in (-1, 1):
        with pytest.raises(SheetError, match="no place"):
            move_kept(document, "first light", to=to)
