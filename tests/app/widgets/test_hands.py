from gainbench_app.theme import SMALL_PX, body_font
from gainbench_app.widgets.hands import Hands


def test_a_hand_is_made_once_for_a_size_and_weight(qapp):
    hands, font = Hands(), body_font()
    plain = hands.of(font, SMALL_PX)
    assert hands.of(font, SMALL_PX) is plain
    assert plain.font.pixelSize() == SMALL_PX
    bold = hands.of(font, SMALL_PX, bold=True)
    assert bold.font.weight() > plain.font.weight()
    assert bold.width("margin") == bold.metrics.horizontalAdvance("margin") > 0.0


def test_another_font_has_other_hands(qapp):
    hands, font = Hands(), body_font()
    before = hands.of(font, SMALL_PX)
    hands.forget()
    assert hands.of(font, SMALL_PX) is not before


def test_many_words_do_not_stay(qapp):
    hand = Hands().of(body_font(), SMALL_PX)
    for number in range(1200):
        assert hand.width(f"{number}") == hand.metrics.horizontalAdvance(f"{number}")
    assert len(hand._widths) <= 500
