import json

import pytest

from gainbench_app.habits import MOST_RECENT, Habits, Memory, with_recent, without_recent
from gainbench_app.theme import Scheme

EVERYTHING = Habits(
    scheme=Scheme.DARK,
    scale=150,
    geometry=bytes(range(256)),
    folded=("Machine", "Duty"),
    choices=(("loops", "speed"),),
    recent=("a", "b"),
)


def test_all_of_it_comes_back(tmp_path):
    memory = Memory(tmp_path / "not" / "there" / "window.json")
    assert memory.habits() == Habits()
    assert memory.change(lambda _: EVERYTHING) == EVERYTHING
    assert memory.habits() == EVERYTHING


def test_two_windows_share_it(tmp_path):
    one, other = (Memory(tmp_path / "window.json") for _ in range(2))
    one.change(lambda habits: with_recent(habits, tmp_path / "a"))
    other.change(lambda habits: with_recent(habits, tmp_path / "b"))
    assert one.habits().recent == (str(tmp_path / "b"), str(tmp_path / "a"))


def test_the_latest_comes_first_and_none_twice(tmp_path):
    habits = Habits()
    for number in [*range(20), 15]:
        habits = with_recent(habits, tmp_path / str(number))
    assert len(habits.recent) == MOST_RECENT
    assert habits.recent[:2] == (str(tmp_path / "15"), str(tmp_path / "19"))
    assert str(tmp_path / "15") not in without_recent(habits, tmp_path / "15").recent


@pytest.mark.parametrize(
    "text",
    ["", "[", "[]", "null", '{"scheme": 3, "scale": "big", "geometry": "?", "folded": 1, "choices": [], "recent": {}}'],
)
def test_a_damaged_file_is_the_usual(tmp_path, text):
    file = tmp_path / "window.json"
    file.write_text(text, encoding="utf-8")
    assert Memory(file).habits() == Habits()


def test_a_size_that_there_is_not_is_the_usual(tmp_path):
    file = tmp_path / "window.json"
    file.write_text(json.dumps({"scale": 400, "scheme": "dark"}), encoding="utf-8")
    assert Memory(file).habits() == Habits(scheme=Scheme.DARK)


def test_where_it_cannot_be_written_nothing_else_suffers(tmp_path):
    (tmp_path / "gainbench").write_text("a file is in the way", encoding="utf-8")
    memory = Memory(tmp_path / "gainbench" / "window.json")
    assert memory.change(lambda _: EVERYTHING) == EVERYTHING
    assert memory.habits() == Habits()
