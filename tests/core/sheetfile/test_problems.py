"""Problems in words."""

from __future__ import annotations

import tomllib

import pytest

from gainbench.sheetfile.problems import example_line, example_of, missing, not_a_table, quoted_key, unknown_key
from gainbench.sheetfile.tables import ENTRIES


@pytest.mark.parametrize(
    ("path", "line"),
    [
        ("format", "format = 1"),
        ("title", 'title = "Label unwinder"'),
        ("machine", "[machine]"),
        ("machine.resistance", 'resistance = "0.60 ohm"'),
        ("kept", "[[kept]]"),
        ("kept[3].name", 'name = "first light"'),
        ("kept[3].current.kp", 'kp = "2.66 V/A"'),
        ("kept[3].current", 'current = { kp = "2.66 V/A", ki = "4681 V/(A*s)" }'),
        ("evidence[0].columns.speed", 'speed = { column = "t", unit = "rad/s" }'),
        ("evidence[0].columns.speed.unit", 'unit = "rad/s"'),
        ("tolerance", '"machine.resistance" = "10 %"'),
    ],
)
def test_example_line(path, line):
    assert example_line(path) == line
    assert tomllib.loads(line) is not None


def test_every_example_line_is_toml():
    for path, entry in ENTRIES.items():
        assert tomllib.loads(example_line(path)).keys() == {path.rpartition(".")[2]}
        assert example_of(path) == entry.example
    assert example_of("machine") == ""


def test_words():
    assert str(missing("duty.length")) == ('duty.length: is missing; it has no default (for example length = "450 ms")')
    assert str(missing("machine.pole_pairs", why='kind "pm-sine"')) == (
        'machine.pole_pairs: is missing; kind "pm-sine" needs it (for example pole_pairs = 4)'
    )
    assert str(not_a_table("stage", 3)) == "stage = 3: must be a table (for example [stage])"
    assert str(unknown_key("train", "rato", 3.0, ["kind", "ratio"])) == (
        "train.rato = 3.0: this key is not known; ratio is near (for example ratio = 3.0)"
    )


def test_a_key_is_quoted_where_it_is_no_bare_one():
    assert quoted_key("kp_1-x") == "kp_1-x"
    assert quoted_key("a b") == '"a b"'
    assert quoted_key("a\x1b") == r'"a\u001b"'
    assert quoted_key("") == '""'
    assert len(quoted_key("k" * 1000)) < 70
