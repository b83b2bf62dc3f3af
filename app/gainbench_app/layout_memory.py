"""Which cards are folded and which words are chosen: read off the window when it closes, put back when it opens."""

from __future__ import annotations

from dataclasses import replace

from PySide6.QtCore import QByteArray
from PySide6.QtWidgets import QMainWindow

from gainbench_app.habits import Habits
from gainbench_app.widgets.card import Card
from gainbench_app.widgets.choices import Choices

_OF_THE_SHEET = ("span",)
"""Choices that belong to what is looked at just now begin with these words, and are not remembered."""


def with_layout(habits: Habits, window: QMainWindow) -> Habits:
    """What is remembered, with the window as it is laid out now."""
    return replace(
        habits,
        geometry=bytes(window.saveGeometry().data()),
        folded=tuple(name for name, card in _cards(window).items() if not card.head.isChecked()),
        choices=tuple((name, row.word) for name, row in _choices(window).items() if row.word),
    )


def lay_out(window: QMainWindow, habits: Habits) -> None:
    """Lay the window out as it was; what is not remembered, or not there any more, stays as usual."""
    if habits.geometry:
        window.restoreGeometry(QByteArray(habits.geometry))
        for name, card in _cards(window).items():
            card.head.setChecked(name not in habits.folded)
    rows = _choices(window)
    for name, word in habits.choices:
        button = rows[name].buttons.get(word) if name in rows else None
        if button is not None and not button.isChecked():
            button.click()


def _cards(window: QMainWindow) -> dict[str, Card]:
    return {one.accessibleName(): one for one in window.findChildren(Card) if hasattr(one, "head")}


def _choices(window: QMainWindow) -> dict[str, Choices]:
    found = {one.accessibleName(): one for one in window.findChildren(Choices)}
    return {name: one for name, one in found.items() if not name.startswith(_OF_THE_SHEET)}
