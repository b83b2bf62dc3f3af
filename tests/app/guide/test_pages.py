"""The guide is true to the program: its links, keys, commands, words of the screen and names of the sheet exist."""

from __future__ import annotations

import re

import pytest
from PySide6.QtGui import QAction, QKeySequence
from PySide6.QtWidgets import QAbstractButton, QComboBox, QLabel, QMenu

from gainbench.cli import COMMANDS
from gainbench.errors import UnitError
from gainbench.handover import CAUTIONS, NOT_MODELLED
from gainbench.model import Experiment
from gainbench.sheetfile.tables import ENTRIES
from gainbench.units import Dimension, parse
from gainbench_app.guide.pages import GROUPS, has_place, headings, page_text, slug, title
from gainbench_app.paste_dialog import PasteDialog
from gainbench_app.paste_rows import recognised
from gainbench_app.shortcuts import GUIDE, SHEET, WITHIN, told
from gainbench_resources import guide_pages

NAMES = [name for names in GROUPS.values() for name in names]
OWN = [name for name in NAMES if name not in {one.value for one in Experiment}]
KEYS_OF_QT = {"Tab"}
"""What needs no shortcut of ours."""
WORDS = (
    "bench sheet", "machine", "train", "stage", "aims", "duty", "assessment", "finding", "kept tuning", "shelf",
    "reach map", "phase ledger", "operating plane", "headroom", "evidence", "handover", "origin",
)  # fmt: skip


BLOCKS = re.compile(r"```.*?```", re.DOTALL)
CODE = re.compile(r"`[^`]*`")


def pieces(pattern, names=OWN):
    """What is set in a hand of its own on the pages, with the page it is on; not within blocks of rows."""
    return [(name, found) for name in names for found in re.findall(pattern, BLOCKS.sub("", page_text(name)))]


def test_every_page_there_is_is_listed_once():
    assert sorted(NAMES) == sorted(guide_pages())
    assert {one.value for one in Experiment} <= set(NAMES)


@pytest.mark.parametrize("name", NAMES)
def test_a_page_has_a_title_and_sections_that_can_be_told_apart(name):
    found = headings(name)
    assert [one.level for one in found].count(1) == 1
    assert found[0].level == 1
    assert title(name) == found[0].text
    slugs = [one.slug for one in found]
    assert len(set(slugs)) == len(slugs)
    assert all(slugs)


def test_all_links_lead_to_a_page_and_a_section_of_it():
    links = pieces(r"\]\(([^)]+)\)", NAMES)
    assert len(links) > 15
    for name, target in links:
        page, _, section = target.partition("#")
        assert page.endswith(".md"), f"{name}: {target}"
        assert has_place(page.removesuffix(".md"), section), f"{name}: {target}"


def test_there_is_no_place_that_is_not_there():
    assert not has_place("none", "")
    assert not has_place("words", "none")
    with pytest.raises(KeyError):
        page_text("none")
    assert slug("What it cannot tell") == "what-it-cannot-tell"


def test_the_keys_named_do_something():
    known = {
        QKeySequence(keys)
        for one in (*SHEET.values(), *(one for shortcuts in WITHIN.values() for one in shortcuts))
        for keys in one.keys
    }
    named = [found for found in pieces(r"(?<!\*)\*\*([^*]+)\*\*") if found[0] != "keys"]
    assert len(named) > 15
    for name, keys in named:
        sequence = QKeySequence(keys)
        assert sequence.count() == 1, f"{name}: {keys}"
        assert keys in KEYS_OF_QT or sequence in known, f"{name}: {keys}"


def test_the_page_of_keys_has_every_shortcut_there_is():
    text = page_text("keys")
    assert "{" not in text
    for one in (*SHEET.values(), *GUIDE.values(), *(one for shortcuts in WITHIN.values() for one in shortcuts)):
        assert f"| **{told(one)}** | {one.does} |" in text
    assert all(f"## {where}" in text for where in WITHIN)


def test_commands_sheet_keys_and_quantities_are_ones_that_are_taken():
    keys = {path.rpartition(".")[2] for path in ENTRIES}
    tables = {path.rpartition(".")[0] for path in ENTRIES} | {"tolerance"}
    quantities = 0
    for name, code in pieces(r"`([^`]+)`"):
        where = f"{name}: {code}"
        if code.startswith("gainbench "):
            assert code.split()[1] in COMMANDS, where
        elif re.fullmatch(r"[a-z_]+(\.[a-z_]+)+", code):
            assert code in ENTRIES, where
        elif re.fullmatch(r"\[[a-z.]+\]", code):
            assert code[1:-1] in tables, where
        elif re.fullmatch(r"[a-z]+(_[a-z]+)+", code):
            assert code in keys, where
        elif code[0].isdigit():
            quantities += 1
            assert any(taken(code, one) for one in Dimension) == (code != "60 1/s"), where
        else:
            assert code in {"NAME.bench.toml", "--accept"}, where
    assert quantities > 10


def taken(text, dimension):
    if text == "60 1/s" and dimension not in {Dimension.FREQUENCY, Dimension.SPEED}:
        return False
    try:
        parse(text, dimension)
    except UnitError:
        return False
    return True


def test_words_of_the_screen_stand_on_the_screen(qtbot, window, desk):
    paste = PasteDialog(desk, "")
    qtbot.addWidget(paste)
    shown = {action.text() for one in (window, window.menu_of_more) for action in one.findChildren(QAction)}
    shown |= {menu.title() for menu in window.findChildren(QMenu)}
    for owner in (window, paste):
        shown |= {one.text() for kind in (QAbstractButton, QLabel) for one in owner.findChildren(kind)}
    for box in window.findChildren(QComboBox):
        shown |= {box.itemText(number) for number in range(box.count())}
    shown |= {one.name for one in every_entry()}
    named = [
        (name, words)
        for name in OWN
        for words in re.findall(r"(?<!\*)\*([^*\n]+)\*(?!\*)", CODE.sub("", BLOCKS.sub("", page_text(name))))
    ]
    assert len(named) > 30
    for name, words in named:
        assert words in shown or words == desk.sheet.title, f"{name}: {words}"


def every_entry():
    from gainbench_app.on_bench import entries

    for kind, _ in entries.MACHINE_KINDS:
        yield from entries.machine_entries(kind)


def test_the_rows_to_try_are_all_recognised():
    (rows,) = re.findall(r"```text\n(.*?)```", page_text("first-steps"), flags=re.DOTALL)
    found = recognised(rows)
    assert len(found) == 8
    assert all(one.usable for one in found)


def test_the_words_of_the_trade_are_all_explained():
    assert re.findall(r"^\| ([a-z ]+) \|", page_text("words"), flags=re.MULTILINE)[1:] == list(WORDS)


def test_the_cautions_are_said_in_full():
    text = page_text("handover").lower()
    said = " ".join(CAUTIONS).lower()
    for words in (
        "unloaded or guarded", "current limit set low", "emergency stop within reach", "dc link", "encoder direction",
        "current polarity", "commutation offset", "180 degrees off runs away", "runs away at full torque",
        "stop an inertia", "braking raises the bus", "vertical load falls", "holding brake", "permanent-magnet motor",
        "jumps when it is aligned", "locked rotor overheats in seconds", "coast down", "open terminals",
        "no overcurrent trip",
    ):  # fmt: skip
        assert words in text, words
        assert words in said, words
    for words in [one for line in NOT_MODELLED for one in re.split(r" and |limits of the ", line) if one]:
        assert words.lower() in text, words
    for words in ("iso 12100", "iec 60204-1", "iec 61800-5-1", "-5-2", "nfpa 79", "licensed practice"):
        assert words in text
