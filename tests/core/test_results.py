"""The one result with behaviour: a finding as sentences, made when they are read."""

from __future__ import annotations

import copy
import dataclasses
import pickle

import pytest

from gainbench.results import Finding, Level, Words


@pytest.mark.parametrize(
    ("advice", "text"),
    [
        ("lower the crossover", "Speed loop unstable. A pole lies at 1.02. Lower the crossover."),
        ("", "Speed loop unstable. A pole lies at 1.02."),
    ],
)
def test_a_finding_reads_as_sentences(advice, text):
    finding = Finding(
        code="speed-unstable",
        level=Level.BREAKS,
        subject="speed",
        title="speed loop unstable",
        reason="a pole lies at 1.02",
        advice=advice,
    )
    assert finding.text == text


def test_levels_are_the_words_of_the_findings():
    assert tuple(Level) == ("holds", "thin", "breaks")


class Teller:
    """Makes words and counts how often."""

    def __init__(self) -> None:
        self.asked = 0

    def __call__(self) -> Words:
        self.asked += 1
        return Words(title="a", reason="b")


def plain() -> Finding:
    return Finding(code="some", level=Level.THIN, subject="speed", title="a", reason="b")


def test_words_are_made_once_and_only_when_they_are_read():
    teller = Teller()
    finding = Finding.on("speed", "some", level=Level.THIN, words=teller)
    assert (finding.code, finding.level, finding.subject) == ("some", Level.THIN, "speed")
    assert teller.asked == 0
    assert (finding.title, finding.reason, finding.advice, finding.text) == ("a", "b", "", "A. B.")
    assert teller.asked == 1


@pytest.mark.parametrize(
    "use",
    [
        lambda finding: finding,
        copy.copy,
        copy.deepcopy,
        dataclasses.replace,
        lambda finding: pickle.loads(pickle.dumps(finding)),
        lambda finding: Finding(**dataclasses.asdict(finding)),
    ],
    ids=["itself", "copy", "deepcopy", "replace", "pickle", "dict"],
)
def test_a_finding_to_be_worded_is_the_same_finding(use):
    finding = use(Finding.on("speed", "some", level=Level.THIN, words=lambda: Words(title="a", reason="b")))
    assert finding == plain()
    assert hash(finding) == hash(plain())
    assert repr(finding) == repr(plain())


def test_a_finding_has_no_other_names_and_cannot_be_changed():
    finding = Finding.on("speed", "some", level=Level.THIN, words=Teller())
    with pytest.raises(AttributeError, match="'tilte'"):
        finding.tilte  # noqa: B018
    with pytest.raises(dataclasses.FrozenInstanceError):
        finding.title = "other"
    # One that was made with its words has nothing to make them of.
    assert not hasattr(plain(), "_words")


def test_words_that_fail_are_asked_for_again():
    def broken() -> Words:
        raise ZeroDivisionError

    finding = Finding.on("speed", "some", level=Level.THIN, words=broken)
    for _ in range(2):
        with pytest.raises(ZeroDivisionError):
            finding.title  # noqa: B018
