import re

import pytest
from PySide6.QtCore import QPoint, QPointF, QRect
from PySide6.QtGui import QGuiApplication, QImage

from gainbench.errors import SheetError
from gainbench_app.pictures import copy_picture, drawing, picture, save_picture


@pytest.fixture
def figures(window):
    return window.figures()


def test_a_drawing_holds_lines_and_words(figures):
    text = drawing(figures, title="a <b> & c").decode("utf-8")
    assert "<polyline" in text
    assert "<image" not in text
    words = set(re.findall(r">([^<>]+)</text>", text))
    assert {"speed", "current", "voltage", "phase"} <= {one.strip() for one in words}
    assert "a <b>" not in text


def test_plots_stand_to_each_other_as_they_do_in_the_window(figures):
    image = picture(figures, pixels_per_point=1.0)
    places = [QRect(one.mapTo(one.window(), QPoint(0, 0)), one.size()) for one in figures]
    left, top = min(one.left() for one in places), min(one.top() for one in places)
    assert image.width() == max(one.right() for one in places) - left + 1
    assert image.height() == max(one.bottom() for one in places) - top + 1
    for number, place in enumerate(places):
        part = image.copy(place.translated(-left, -top)).convertToFormat(QImage.Format.Format_RGB32)
        assert part == picture(figures[number : number + 1], pixels_per_point=1.0)


def test_the_unit_on_a_button_is_in_it(figures):
    assert ">rpm</text>" in re.sub(r"\s+", "", drawing(figures[:1], title="x").decode("utf-8"))


def test_the_cursor_is_not_in_it(figures):
    before = picture(figures[:1])
    figures[0]._cursor = QPointF(figures[0].width() / 2.0, figures[0].height() / 2.0)
    assert picture(figures[:1]) == before
    assert figures[0].cursor_at is not None


def test_it_is_copied_and_saved(figures, tmp_path):
    copy_picture(figures)
    assert QGuiApplication.clipboard().image().size() == picture(figures).size()
    save_picture(figures, tmp_path / "a.png", title="x")
    assert QImage(str(tmp_path / "a.png")).size() == picture(figures).size()
    save_picture(figures, tmp_path / "a.SVG", title="x")
    assert (tmp_path / "a.SVG").read_bytes() == drawing(figures, title="x")


def test_another_ending_is_refused(figures, tmp_path):
    with pytest.raises(SheetError, match=r"as \.png or \.svg"):
        save_picture(figures, tmp_path / "a.bmp", title="x")
    with pytest.raises(SheetError, match="no folder"):
        save_picture(figures, tmp_path / "none" / "a.png", title="x")
    assert list(tmp_path.iterdir()) == []
