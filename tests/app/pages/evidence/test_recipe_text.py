from PySide6.QtGui import QTextDocument

from gainbench.model import Experiment
from gainbench_app.pages.evidence.recipe_card import recipe_and_cautions
from gainbench_app.pages.evidence.recipe_text import rich_recipe


def plain(rich):
    document = QTextDocument()
    document.setHtml(rich)
    return document.toPlainText()


def test_heads_lists_and_characters_come_through():
    rich = rich_recipe(
        "# Title\n\nOne < 2 & `v - R i`.\n\n## Steps\n1. first\n2. second\n- other\nEnd: [this](other.md), **Ctrl+L**\n"
    )
    assert plain(rich).splitlines() == [
        "One < 2 & v - R i.",
        "Steps",
        "first",
        "second",
        "other",
        "End: this, Ctrl+L",
    ]
    assert rich.count("<ol") == rich.count("</ol>") == rich.count("<ul") == rich.count("</ul>") == 1
    assert "Title" not in rich


def test_every_experiment_is_shown_with_the_cautions(qapp):
    for experiment in Experiment:
        words = plain(recipe_and_cautions(experiment))
        for wanted in ("How to run it", "What it cannot tell", "emergency stop", "ISO 12100", "dead time"):
            assert wanted in words
        assert "##" not in words
