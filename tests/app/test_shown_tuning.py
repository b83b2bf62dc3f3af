from gainbench_app.shown_tuning import PATTERNS, ShownTuning


def test_lines_are_told_apart_by_their_pattern():
    assert len(set(PATTERNS)) == len(PATTERNS)
    assert all(len(one) % 2 == 0 and min(one) > 0.0 for one in PATTERNS)


def test_two_are_the_same_only_where_they_are_one(desk):
    one, other = (ShownTuning(name="a", assessment=desk.assessment, pattern=PATTERNS[0]) for _ in range(2))
    assert one == one
    assert one != other
