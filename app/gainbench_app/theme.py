"""Colours and type: quiet paper and ink, one hue per quantity, and colour for trouble only.

What is told by colour is told by shape or by words as well.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from functools import lru_cache
from importlib.resources import files

from PySide6.QtCore import QByteArray
from PySide6.QtGui import QColor, QFont, QFontDatabase, QPalette

BODY_PX = 13
SMALL_PX = 12
LARGE_PX = 17
"""Heads: the verdict and the margins."""
MARGIN_PX = 16
_FAMILIES = ("Inter", "Segoe UI", "Helvetica Neue", "Noto Sans", "Cantarell", "DejaVu Sans")


class Scheme(StrEnum):
    """Which of the two themes is shown."""

    FOLLOW = "system"
    LIGHT = "light"
    DARK = "dark"


@dataclass(frozen=True, slots=True, kw_only=True)
class Theme:
    """One set of colours, each as ``#RRGGBB``."""

    dark: bool
    paper: str
    card: str
    ink: str
    muted: str
    outline: str
    """Of controls."""
    rule: str
    grid: str
    speed: str
    current: str
    voltage: str
    breaks: str
    """Trouble, and the bands of limits."""
    thin: str
    holds: str

    def mixed(self, colour: str, share: float) -> str:
        """An opaque tint: that share of a colour on the card, since translucent paint costs ten times as much."""
        return _mixed(colour, self.card, share)


@lru_cache(maxsize=64)
def _mixed(colour: str, card: str, share: float) -> str:
    top, below = QColor(colour), QColor(card)
    channels = (
        (top.red(), below.red()),
        (top.green(), below.green()),
        (top.blue(), below.blue()),
    )
    parts = (round(share * above + (1.0 - share) * under) for above, under in channels)
    return "#{:02X}{:02X}{:02X}".format(*parts)


LIGHT = Theme(
    dark=False,
    paper="#F6F4EF",
    card="#FFFFFF",
    ink="#20262A",
    muted="#5E6468",
    outline="#8A8578",
    rule="#D9D4C8",
    grid="#ECE8DF",
    speed="#0A7468",
    current="#A84A00",
    voltage="#4A2396",
    breaks="#7E1428",
    thin="#8A5E00",
    holds="#4A5257",
)

DARK = Theme(
    dark=True,
    paper="#191E1F",
    card="#22292B",
    ink="#E9E5DC",
    muted="#A3A9AD",
    outline="#6F787B",
    rule="#3A4345",
    grid="#2C3436",
    speed="#62C9BA",
    current="#EA9440",
    voltage="#AD92F2",
    breaks="#E3688E",
    thin="#E3B23C",
    holds="#E9E5DC",
)


def body_font() -> QFont:
    """The font of the window, with figures of one width; needs a running application."""
    _load_fonts()
    # Only families that are there are asked for: a search for others takes long.
    installed = set(QFontDatabase.families())
    found = [family for family in _FAMILIES if family in installed]
    font = QFont()
    if found:
        font.setFamilies(found)
    font.setPixelSize(BODY_PX)
    font.setFeature(QFont.Tag("tnum"), 1)
    return font


def _load_fonts() -> None:
    """Bring our own font along, unless the system has it."""
    if _FAMILIES[0] in QFontDatabase.families():
        return
    for file in (files("gainbench_resources") / "fonts").iterdir():
        if file.name.endswith(".otf"):
            QFontDatabase.addApplicationFontFromData(QByteArray(file.read_bytes()))


def sized(font: QFont, pixels: int, *, bold: bool = False) -> QFont:
    """The same family in another size."""
    other = QFont(font)
    other.setPixelSize(pixels)
    other.setWeight(QFont.Weight.DemiBold if bold else QFont.Weight.Normal)
    return other


def strong(text: str) -> str:
    """In the weight that our font has, as rich text."""
    return f"<span style='font-weight:600'>{text}</span>"


def palette(theme: Theme) -> QPalette:
    """The colours that Qt's own widgets ask a palette for."""
    found = QPalette()
    role = QPalette.ColorRole
    for one, colour in (
        (role.Window, theme.paper),
        (role.Base, theme.card),
        (role.AlternateBase, theme.paper),
        (role.Button, theme.card),
        (role.WindowText, theme.ink),
        (role.Text, theme.ink),
        (role.ButtonText, theme.ink),
        (role.PlaceholderText, theme.muted),
        (role.ToolTipBase, theme.card),
        (role.ToolTipText, theme.ink),
        (role.Highlight, theme.speed),
        (role.HighlightedText, theme.card),
        (role.Link, theme.speed),
    ):
        found.setColor(one, QColor(colour))
    return found


def style_sheet(theme: Theme) -> str:
    """What Qt's own widgets look like."""
    hover = theme.mixed(theme.outline, 0.14)
    return f"""
QWidget {{ color: {theme.ink}; background: transparent; }}
QMainWindow, QDialog, QMessageBox, #paper {{ background: {theme.paper}; }}
QToolTip {{ background: {theme.card}; color: {theme.ink}; border: 1px solid {theme.rule}; padding: 4px; }}
#topBar {{ background: {theme.paper}; border-bottom: 1px solid {theme.rule}; }}
#shelf {{ background: {theme.paper}; border-top: 1px solid {theme.rule}; }}
#shelf QTableView {{ background: transparent; border: 0; }}
#shelf QHeaderView {{ background: transparent; border: 0; }}
#shelf QPushButton[flat="true"] {{ font-size: {SMALL_PX}px; }}
QPushButton[flat="true"]:disabled {{ color: {theme.outline}; border: 0; }}
#sideLeft {{ border-right: 1px solid {theme.rule}; }}
#sideRight {{ border-left: 1px solid {theme.rule}; }}
#card {{ background: {theme.card}; border: 1px solid {theme.rule}; border-radius: 6px; }}
QLabel[role="muted"] {{ color: {theme.muted}; }}
QLabel[role="small"] {{ color: {theme.muted}; font-size: {SMALL_PX}px; }}
QLabel[role="column"] {{ color: {theme.muted}; font-size: {SMALL_PX}px; font-weight: 600; }}
QLabel[role="head"] {{ font-weight: 600; }}
QLabel[role="large"] {{ font-size: {LARGE_PX}px; font-weight: 600; }}
QLabel[role="problem"] {{ color: {theme.breaks}; font-size: {SMALL_PX}px; }}
QLineEdit {{ border: 0; border-bottom: 1px solid {theme.outline}; padding: 1px 3px 1px 3px;
  selection-background-color: {theme.speed}; selection-color: {theme.card}; }}
QLineEdit {{ placeholder-text-color: {theme.muted}; }}
QLineEdit:hover {{ background: {hover}; }}
QLineEdit:focus {{ border-bottom: 2px solid {theme.ink}; padding-bottom: 0; }}
QLineEdit[wrong="true"] {{ border: 2px solid {theme.breaks}; padding: 0 2px 0 2px; border-radius: 3px; }}
QPushButton {{ background: {theme.card}; border: 1px solid {theme.outline}; border-radius: 5px; padding: 3px 12px; }}
QPushButton:hover {{ background: {hover}; }}
QPushButton:focus {{ border: 2px solid {theme.ink}; padding: 2px 11px; }}
QPushButton:disabled {{ color: {theme.muted}; border: 1px dashed {theme.outline}; }}
QPushButton[flat="true"] {{ background: transparent; border: 0; padding: 2px 4px; color: {theme.muted}; }}
QPushButton[flat="true"]:hover {{ color: {theme.ink}; }}
QPushButton[flat="true"]:checked {{ color: {theme.ink}; text-decoration: underline; }}
QPushButton[flat="true"]:focus {{ border: 1px solid {theme.ink}; border-radius: 3px; padding: 1px 3px; }}
#verdictMore {{ text-align: left; }}
QComboBox {{ background: {theme.card}; border: 1px solid {theme.outline}; border-radius: 4px;
  padding: 2px 20px 2px 8px; }}
QComboBox:hover {{ background: {hover}; }}
QComboBox:focus {{ border: 2px solid {theme.ink}; padding: 1px 19px 1px 7px; }}
QComboBox::drop-down {{ border: 0; width: 0; }}
QComboBox[quiet="true"] {{ border: 0; border-bottom: 1px solid {theme.outline}; border-radius: 0;
  padding: 1px 18px 1px 3px; }}
QComboBox[quiet="true"]:focus {{ border-bottom: 2px solid {theme.ink}; padding-bottom: 0; }}
QComboBox[wrong="true"] {{ border: 2px solid {theme.breaks}; border-radius: 3px; }}
QLineEdit[spread="true"] {{ border-bottom: 1px solid transparent; color: {theme.muted}; font-size: {SMALL_PX}px; }}
QLineEdit[spread="true"]:hover {{ border-bottom: 1px solid {theme.outline}; }}
QLineEdit[spread="true"]:focus {{ border-bottom: 2px solid {theme.ink}; color: {theme.ink}; }}
QLineEdit[spread="true"][wrong="true"] {{ border: 2px solid {theme.breaks}; }}
#title {{ border-bottom: 1px solid transparent; }}
#title:focus {{ border-bottom: 2px solid {theme.ink}; }}
QPushButton::menu-indicator {{ width: 0; image: none; }}
QAbstractItemView {{ background: {theme.card}; }}
QComboBox QAbstractItemView {{ background: {theme.card}; color: {theme.ink}; border: 1px solid {theme.outline};
  selection-background-color: {hover}; selection-color: {theme.ink}; outline: 0; padding: 2px; }}
QMenu {{ background: {theme.card}; border: 1px solid {theme.outline}; padding: 4px; }}
QMenu::item {{ padding: 4px 26px 4px 22px; border-radius: 3px; }}
QMenu::item:selected {{ background: {hover}; }}
QMenu::item:disabled {{ color: {theme.muted}; }}
QMenu::separator {{ height: 1px; background: {theme.rule}; margin: 4px 6px; }}
#guideList {{ background: transparent; border: 0; outline: 0; }}
#guideList::item {{ padding: 2px 8px; border-radius: 4px; color: {theme.ink}; border: 1px solid transparent; }}
#guideList::item:hover {{ background: {theme.mixed(theme.outline, 0.08)}; }}
#guideList::item:selected {{ background: {hover}; }}
#guideList::item:focus {{ border: 1px solid {theme.ink}; }}
#guideList::item:disabled {{ color: {theme.muted}; background: transparent; padding-left: 0; }}
QProgressBar {{ background: {theme.rule}; border: 0; border-radius: 4px; }}
QProgressBar::chunk {{ background: {theme.ink}; border-radius: 4px; }}
QScrollArea {{ border: 0; }}
QScrollBar:vertical {{ width: 8px; margin: 0; }}
QScrollBar::handle:vertical {{ background: {theme.outline}; border-radius: 2px; min-height: 28px;
  margin: 1px 2px; }}
QScrollBar::add-line, QScrollBar::sub-line {{ height: 0; background: none; }}
QScrollBar::add-page, QScrollBar::sub-page {{ height: 0; background: none; }}
QPlainTextEdit, QTextBrowser {{ background: {theme.card}; border: 1px solid {theme.rule}; border-radius: 4px; }}
"""
