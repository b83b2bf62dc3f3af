import numpy as np
import pytest
from PySide6.QtCore import QPoint, QPointF, QRectF, Qt
from PySide6.QtGui import QColor, QImage, QPainter, QWheelEvent
from PySide6.QtWidgets import QApplication, QLineEdit, QVBoxLayout, QWidget

from gainbench.results import Level
from gainbench_app.theme import DARK, LIGHT
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.choice_box import ChoiceBox
from gainbench_app.widgets.entry_row import Entry, EntryRow
from gainbench_app.widgets.figure import Axes, Figure, paint_band, paint_dashed, paint_hatched, paint_line
from gainbench_app.widgets.level_mark import LevelMark
from gainbench_app.widgets.scales import Range
from gainbench_app.widgets.slim_slider import SlimSlider
from gainbench_app.widgets.value_box import ValueBox
from gainbench_app.widgets.words import Piece, WordLine

RETURN, ESCAPE = Qt.Key.Key_Return, Qt.Key.Key_Escape
LEFT_BUTTON = Qt.MouseButton.LeftButton


@pytest.fixture
def shown(qtbot):
    """Puts a widget above a line edit, so that focus has somewhere to go."""

    def show(widget):
        holder = QWidget()
        layout = QVBoxLayout(holder)
        layout.addWidget(widget)
        holder.other = QLineEdit()
        layout.addWidget(holder.other)
        holder.resize(300, 120)
        qtbot.addWidget(holder, before_close_func=lambda one: one.hide())
        with qtbot.waitExposed(holder):
            holder.show()
        holder.activateWindow()
        holder.other.setFocus()
        holders.append(holder)
        return holder

    holders = []
    yield show
    for holder in holders:
        holder.hide()


def colours(widget):
    image = widget.grab().toImage().convertToFormat(QImage.Format.Format_RGB32)
    data = np.frombuffer(image.constBits(), np.uint32).reshape(image.height(), -1)
    return set(np.unique(data & 0xFFFFFF).tolist())


def holds_near(widget, colour):
    """Whether a colour is painted, give or take smooth edges."""
    wanted = np.array(QColor(colour).getRgb()[:3])
    found = np.array([QColor(one).getRgb()[:3] for one in colours(widget)])
    return bool((np.abs(found - wanted).max(axis=1) <= 12).any())


def rgb(colour):
    return QColor(colour).rgb() & 0xFFFFFF


# Boxes


def test_a_box_hands_over_what_was_typed_once(shown, qtbot):
    box = ValueBox("resistance")
    shown(box)
    box.show_text("0.60 ohm")
    heard = []
    box.committed.connect(heard.append)
    box.setFocus()
    box.selectAll()
    qtbot.keyClicks(box, "0.7 ohm")
    assert heard == []
    qtbot.keyClick(box, RETURN)
    qtbot.keyClick(box, RETURN)
    box.clearFocus()
    assert heard == ["0.7 ohm"]


def test_leaving_a_box_hands_over(shown, qtbot):
    box = ValueBox("resistance")
    holder = shown(box)
    box.show_text("0.60 ohm")
    heard = []
    box.committed.connect(heard.append)
    box.setFocus()
    qtbot.keyClicks(box, "0")
    holder.other.setFocus()
    assert len(heard) == 1


def test_escape_takes_the_typing_back(shown, qtbot):
    box = ValueBox("resistance")
    shown(box)
    box.show_text("0.60 ohm")
    box.setFocus()
    qtbot.keyClicks(box, "9")
    qtbot.keyClick(box, ESCAPE)
    assert box.text() == "0.60 ohm"


def test_what_is_being_typed_is_not_overwritten(shown, qtbot):
    box = ValueBox("resistance")
    shown(box)
    box.show_text("0.60 ohm")
    box.setFocus()
    box.selectAll()
    qtbot.keyClicks(box, "0.7")
    box.show_text("0.8 ohm")
    assert box.text() == "0.7"


def test_a_mark_is_told_to_a_screen_reader(qtbot, appearance):
    box = ValueBox("resistance")
    qtbot.addWidget(box)
    box.mark("a resistance is meant")
    assert box.property("wrong") is True
    assert box.accessibleName() == "resistance"
    assert box.accessibleDescription() == "a resistance is meant"
    box.mark("")
    assert box.property("wrong") is False


def test_a_choice_is_heard_once(qtbot, appearance):
    box = ChoiceBox("kind", (("rigid", "rigid"), ("elastic", "elastic")), appearance)
    qtbot.addWidget(box)
    box.show_word("rigid")
    heard = []
    box.chosen.connect(heard.append)
    qtbot.keyClick(box, Qt.Key.Key_Down)
    assert heard == ["elastic"]
    box.show_word(None)
    assert box.currentIndex() == -1
    assert heard == ["elastic"]


def test_an_entry_row_says_why_its_text_is_refused(qtbot, appearance):
    row = EntryRow(Entry(path="machine.resistance", name="resistance", spread=True), appearance)
    qtbot.addWidget(row)
    row.show_entry("0.6 kg", "a resistance is meant", "10 %")
    assert row.box.text() == "0.6 kg"
    assert row.reason.text() == "a resistance is meant"
    assert not row.reason.isHidden()
    assert row.tolerance.text() == "±10 %"
    row.show_entry("0.6 ohm", None, None)
    assert row.reason.isHidden()
    assert row.tolerance.text() == ""


def test_an_emptied_entry_is_taken_out(qtbot, appearance):
    row = EntryRow(Entry(path="machine.max_speed", name="highest speed", default="not given"), appearance)
    qtbot.addWidget(row)
    row.show_entry("6000 rpm", None, None)
    heard = []
    row.edited.connect(lambda path, text: heard.append((path, text)))
    row.box.setText("")
    row.box.commit()
    assert heard == [("machine.max_speed", None)]
    assert row.box.placeholderText() == "not given"


# Sliders


@pytest.fixture
def slider(shown, appearance):
    found = SlimSlider("crossover", appearance, colour="speed", low=1.0, high=10_000.0, logarithmic=True)
    shown(found)
    found.show_number(100.0, "100 Hz")
    found.heard = []
    found.grabbed.connect(lambda: found.heard.append("grabbed"))
    found.moved.connect(found.heard.append)
    found.dropped.connect(lambda: found.heard.append("dropped"))
    found.taken_back.connect(lambda: found.heard.append("taken back"))
    return found


def test_a_logarithmic_slider_has_its_middle_at_the_geometric_mean(slider):
    assert slider.number_at(slider.width() / 2.0) == pytest.approx(100.0)
    assert slider.number_at(-5.0) == pytest.approx(1.0)
    assert slider.number_at(slider.width() + 5.0) == pytest.approx(10_000.0)
    assert slider.value() == 5000


def test_a_drag_begins_moves_and_ends(slider, qtbot):
    centre = QPoint(slider.width() // 2, slider.height() // 2)
    qtbot.mousePress(slider, LEFT_BUTTON, pos=centre)
    qtbot.mouseMove(slider, centre + QPoint(40, 0))
    qtbot.mouseRelease(slider, LEFT_BUTTON, pos=centre + QPoint(40, 0))
    assert slider.heard[0] == "grabbed"
    assert slider.heard[-1] == "dropped"
    moves = slider.heard[1:-1]
    assert len(moves) >= 2
    assert moves[-1] > moves[0]


def test_escape_takes_a_drag_back(slider, qtbot):
    slider.setFocus()
    qtbot.mousePress(slider, LEFT_BUTTON, pos=QPoint(80, 9))
    qtbot.keyClick(slider, ESCAPE)
    qtbot.mouseRelease(slider, LEFT_BUTTON, pos=QPoint(80, 9))
    assert slider.heard[-1] == "taken back"


@pytest.mark.parametrize(
    ("key", "modifier", "factor"),
    [
        (Qt.Key.Key_Right, Qt.KeyboardModifier.NoModifier, 1.01),
        (Qt.Key.Key_Left, Qt.KeyboardModifier.NoModifier, 0.99),
        (Qt.Key.Key_Up, Qt.KeyboardModifier.ShiftModifier, 1.001),
        (Qt.Key.Key_PageDown, Qt.KeyboardModifier.NoModifier, 0.9),
    ],
)
def test_keys_move_by_percent(slider, qtbot, key, modifier, factor):
    slider.setFocus()
    qtbot.keyClick(slider, key, modifier)
    assert slider.heard == ["grabbed", pytest.approx(100.0 * factor)]
    qtbot.waitUntil(lambda: slider.heard[-1] == "dropped")


def test_a_linear_slider_moves_from_zero(shown, appearance, qtbot):
    found = SlimSlider("weight", appearance, colour="speed", low=0.0, high=1.0, logarithmic=False)
    shown(found)
    found.show_number(0.0, "0 %")
    moved = []
    found.moved.connect(moved.append)
    found.setFocus()
    qtbot.keyClick(found, Qt.Key.Key_Right)
    assert moved == [pytest.approx(0.001)]


def turn_wheel(widget):
    at = QPointF(widget.rect().center())
    event = QWheelEvent(
        at, widget.mapToGlobal(at), QPoint(), QPoint(0, 120), LEFT_BUTTON & ~LEFT_BUTTON,
        Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(widget, event)


def test_the_wheel_acts_only_with_focus(slider):
    turn_wheel(slider)
    assert slider.heard == []
    slider.setFocus()
    turn_wheel(slider)
    assert slider.heard == ["grabbed", pytest.approx(101.0)]


def test_a_slider_says_its_value(slider):
    assert slider.accessibleName() == "crossover"
    assert slider.accessibleDescription() == "100 Hz"


# Marks and words


@pytest.mark.parametrize(
    ("level", "word", "token"),
    [
        (Level.HOLDS, "holds", "holds"),
        (Level.THIN, "thin", "thin"),
        (Level.BREAKS, "breaks", "breaks"),
        (None, "not judged", "muted"),
    ],
)
def test_a_level_has_a_colour_and_a_word(qtbot, appearance, level, word, token):
    mark = LevelMark(appearance, size=20)
    qtbot.addWidget(mark)
    mark.resize(mark.sizeHint())
    mark.show_level(level)
    assert mark.accessibleName() == word
    assert level is None or rgb(getattr(LIGHT, token)) in colours(mark)


def test_levels_differ_in_shape(qtbot, appearance):
    def painted(level):
        mark = LevelMark(appearance, size=20)
        qtbot.addWidget(mark)
        mark.resize(mark.sizeHint())
        mark.show_level(level)
        image = mark.grab().toImage()
        ground = image.pixelColor(0, 0)
        return {(x, y) for x in range(22) for y in range(22) if image.pixelColor(x, y) != ground}

    shapes = [painted(level) for level in Level]
    assert len(shapes[0] ^ shapes[1]) > 20
    assert len(shapes[0] ^ shapes[2]) > 20
    assert len(shapes[1] ^ shapes[2]) > 20


def test_words_break_where_they_may(shown, appearance):
    line = WordLine("headroom", appearance)
    holder = shown(line)
    holder.resize(900, 120)
    pieces = [Piece(text="voltage", gap=12.0, breaks=True), Piece(text="40 %", strong=True)] * 4
    line.show_pieces(tuple(pieces))
    low = line.height()
    line.resize(150, low)
    assert line.height() == 4 * low
    assert line.text == "voltage 40 % voltage 40 % voltage 40 % voltage 40 %"
    assert line.accessibleDescription() == line.text


def test_a_card_folds_to_what_follows(qtbot, appearance):
    card = Card("Machine", appearance)
    qtbot.addWidget(card)
    card.show_follows("electrical <b>0.75 ms</b>")
    qtbot.mouseClick(card.head, LEFT_BUTTON)
    assert card.body.isHidden()
    assert not card.follows.isHidden()
    qtbot.keyClick(card.head, Qt.Key.Key_Space)
    assert not card.body.isHidden()


def test_the_theme_changes_what_is_painted(qtbot, appearance):
    mark = LevelMark(appearance)
    qtbot.addWidget(mark)
    mark.show_level(Level.BREAKS)
    mark.resize(mark.sizeHint())
    assert rgb(LIGHT.breaks) in colours(mark)
    appearance.show(DARK)
    assert rgb(DARK.breaks) in colours(mark)


# Figures


class OnePanel(Figure):
    def panels(self):
        box = QRectF(10.0, 10.0, 180.0, 80.0)
        return [Axes(box=box, x=Range(low=0.0, high=1.0, step=0.5), y=Range(low=0.0, high=10.0, step=5.0))]

    def paint_axes(self, painter, panels):
        self.backgrounds = getattr(self, "backgrounds", 0) + 1
        self.paint_grid(painter, panels[0], across=[100.0], down=[50.0])

    def paint_curves(self, painter, panels):
        x = np.array([0.0, 1.0])
        paint_line(painter, panels[0], x=x, y=np.array([2.0, 2.0]), colour=self.theme.speed)


def test_axes_put_values_on_pixels():
    x, y = Range(low=0.0, high=3.0, step=1.0), Range(low=-1.0, high=1.0, step=1.0)
    axes = Axes(box=QRectF(100.0, 0.0, 300.0, 50.0), x=x, y=y, log_x=True)
    assert float(axes.across(10.0)) == pytest.approx(200.0)
    assert float(axes.down(0.0)) == pytest.approx(25.0)
    assert axes.x_at(300.0) == pytest.approx(100.0)
    assert axes.point(1000.0, 1.0) == QPointF(400.0, 0.0)


def test_the_background_is_painted_once(shown, appearance):
    figure = OnePanel(appearance)
    figure.setFixedSize(200, 100)
    shown(figure)
    assert holds_near(figure, LIGHT.speed)
    figure.grab()
    before = figure.backgrounds
    for _ in range(3):
        figure.grab()
    assert figure.backgrounds == before
    appearance.show(DARK)
    assert holds_near(figure, DARK.speed)
    assert not holds_near(figure, LIGHT.speed)
    assert figure.backgrounds == before + 1


def test_a_stale_figure_is_hatched_and_says_so(qtbot, appearance):
    figure = OnePanel(appearance)
    qtbot.addWidget(figure)
    figure.resize(200, 100)
    assert rgb(LIGHT.breaks) not in colours(figure)
    figure.show_stale("last valid sheet")
    assert figure.stale == "last valid sheet"
    assert rgb(LIGHT.breaks) in colours(figure)


def test_bands_and_dashes_are_painted(qapp):
    image = QImage(200, 100, QImage.Format.Format_RGB32)
    image.fill(QColor("#FFFFFF"))
    axes = Axes(
        box=QRectF(0.0, 0.0, 200.0, 100.0), x=Range(low=0.0, high=1.0, step=1.0), y=Range(low=0.0, high=1.0, step=1.0)
    )
    x = np.array([0.0, 1.0])
    with QPainter(image) as painter:
        paint_band(painter, axes, x=x, low=np.array([0.2, 0.2]), high=np.array([0.4, 0.4]), colour="#00FF00")
        paint_dashed(painter, axes, x=x, y=np.array([0.8, 0.8]), colour="#000000")
        paint_hatched(painter, QRectF(0.0, 0.0, 200.0, 10.0), theme=LIGHT)
    assert image.pixelColor(100, 70) == QColor("#00FF00")
    assert image.pixelColor(100, 50) == QColor("#FFFFFF")
    assert image.pixelColor(1, 5) != QColor("#FFFFFF")
    dark = [
        x for x in range(200) if image.pixelColor(x, 20).lightness() < 200 or image.pixelColor(x, 19).lightness() < 200
    ]
    assert 20 < len(dark) < 180
