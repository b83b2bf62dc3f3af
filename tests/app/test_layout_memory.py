from gainbench_app.habits import Habits
from gainbench_app.layout_memory import lay_out, with_layout


def test_cards_and_choices_come_back(window):
    window.on_bench.duty.head.setChecked(False)
    window.what_it_does.spans.buttons["load"].click()
    habits = with_layout(Habits(), window)
    assert "Duty" in habits.folded
    assert "Machine" not in habits.folded
    assert not [name for name, _ in habits.choices if name.startswith("span")]
    window.on_bench.duty.head.setChecked(True)
    lay_out(window, habits)
    assert not window.on_bench.duty.head.isChecked()
    assert with_layout(Habits(), window).choices == habits.choices


def test_every_word_that_is_remembered_can_be_chosen_again(window):
    name, word = with_layout(Habits(), window).choices[0]
    row = next(one for one in window.findChildren(type(window.what_it_does.spans)) if one.accessibleName() == name)
    other = next(one for one in row.buttons if one != word)
    lay_out(window, Habits(choices=((name, other), ("none of ours", "x"), (name, "no such word"))))
    assert row.word == other


def test_nothing_remembered_leaves_all_as_it_is(window):
    before = with_layout(Habits(), window)
    lay_out(window, Habits())
    assert with_layout(Habits(), window) == before
