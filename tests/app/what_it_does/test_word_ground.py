import numpy as np
from PySide6.QtCore import QRectF

from gainbench_app.what_it_does.word_ground import ENOUGH_PX, WordGround

BOX = QRectF(100.0, 50.0, 300.0, 200.0)


def ground(*curves):
    return WordGround(BOX, [(np.array([100.0, 400.0]), np.array(down, dtype=float)) for down in curves])


def best(one, *places):
    return one.best(places, width=40.0, height=16.0)


def test_the_first_place_with_room_enough_is_taken():
    spot = best(ground((150.0, 150.0)), (200.0, 150.0 + ENOUGH_PX), (200.0, 200.0))
    assert (spot.x, spot.y) == (200.0, 150.0 + ENOUGH_PX)
    assert spot.room == ENOUGH_PX


def test_where_no_place_has_enough_the_one_with_most_is_taken():
    spot = best(ground((150.0, 150.0), (170.0, 170.0)), (200.0, 153.0), (200.0, 160.0), (200.0, 166.0))
    assert spot.y == 160.0
    assert spot.room == 10.0


def test_a_curve_is_looked_for_all_along_the_words():
    # It falls from 60 to 240: at the middle of the words it is far, at their right end near.
    falling = ground((60.0, 240.0))
    at_right = 60.0 + 0.6 * (240.0 - 100.0)
    spot = best(falling, (200.0, at_right + 2.0))
    assert spot.room < 5.0


def test_what_is_taken_and_what_is_beyond_the_panel_is_no_place():
    one = ground((240.0, 240.0))
    one.take(QRectF(210.0, 95.0, 20.0, 10.0))
    assert best(one, (200.0, 100.0)).room == -1.0
    assert best(one, (90.0, 100.0)).room == -1.0
    assert best(one, (200.0, 52.0)).room == -1.0
    assert best(one, (200.0, 100.0), (240.0, 100.0)).x == 240.0


def test_words_beyond_the_right_edge_are_judged_where_they_are_moved_to():
    spot = best(ground((240.0, 240.0)), (390.0, 100.0))
    assert spot.x == 390.0
    assert spot.room == ENOUGH_PX


def test_without_curves_there_is_room():
    assert best(ground(), (200.0, 100.0)).room == ENOUGH_PX
