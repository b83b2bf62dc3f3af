from gainbench_app.theme import DARK, LIGHT, Scheme
from gainbench_app.themes import Themes


def test_themes_change_at_once(window, qapp, appearance):
    sheet, colours = qapp.styleSheet(), qapp.palette()
    themes = Themes(qapp, appearance, scheme=Scheme.DARK)
    themes.follow(window.menu_of_more)
    assert appearance.theme is DARK
    assert DARK.paper in qapp.styleSheet()
    window.menu_of_more.schemes[Scheme.LIGHT].trigger()
    assert themes.scheme is Scheme.LIGHT
    assert appearance.theme is LIGHT
    qapp.setStyleSheet(sheet)
    qapp.setPalette(colours)
