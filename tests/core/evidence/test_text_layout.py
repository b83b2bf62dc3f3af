"""Separator, decimal mark, comments, header rows and the first row of data."""

from __future__ import annotations

from itertools import product

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.errors import LogError
from gainbench.evidence.text_layout import TextLayout, find_layout
from gainbench.evidence.text_source import TextSample


def layout(text: str, later: str = "") -> TextLayout:
    sample = TextSample(
        encoding="utf-8",
        lines=tuple(text.split("\n")),
        later=tuple(later.split("\n")) if later else (),
        old_line_ends=False,
        whole=True,
        line_bytes=10.0,
    )
    return find_layout(sample, "run.csv")


PAIRS = [pair for pair in product("\t;,| ", ".,") if pair != (",", ",")]


@pytest.mark.parametrize(("separator", "mark"), PAIRS)
@pytest.mark.parametrize("header", [True, False])
def test_separators_and_decimal_marks(separator, mark, header):
    rows = [separator.join([f"0{mark}{k}", f"-{k}{mark}5e-3", f"{k}"]) for k in range(9)]
    found = layout("\n".join([*([separator.join(["t", "i", "w"])] if header else []), *rows]))
    assert (found.separator, found.decimal_mark, found.columns) == (separator, mark, 3)
    assert found.head_lines == int(header)
    assert found.header == ((("t", "i", "w"),) if header else ())
    assert found.numbers == (True, True, True)


@given(
    pair=st.sampled_from(PAIRS),
    values=st.lists(
        st.lists(st.floats(min_value=-1e6, max_value=1e6), min_size=3, max_size=3), min_size=4, max_size=12
    ),
)
def test_any_numbers_are_laid_out_as_they_were_written(pair, values):
    separator, mark = pair
    # Two decimals at least in one of them, so that the mark is seen.
    values[0][0] = values[-1][1] = 0.25
    lines = [separator.join(f"{value:.6f}".replace(".", mark) for value in row) for row in values]
    found = layout("\n".join(["t" + separator + "i" + separator + "w", *lines]))
    assert (found.separator, found.decimal_mark, found.columns, found.head_lines) == (separator, mark, 3, 1)


@pytest.mark.parametrize(
    ("head", "header"),
    [
        ("t;i\ns;A", (("t", "i"), ("s", "A"))),
        ("Device;X1\nTrace rate;1000\n\nt;i", (("t", "i"),)),
        ("Recorded with care\nby someone\nt;i\n", (("t", "i"),)),
        ("# one; two; three\n# t;i", (("t", "i"),)),
        ("// t; i", (("t", "i"),)),
        ('"t";"i"', (("t", "i"),)),
        ("only one title", ()),
        ("a;b;c;d", ()),
        ("a\nb\nc", ()),
    ],
)
def test_header_rows(head, header):
    found = layout(head + "\n0,1;1\n0,2;2\n0,3;1\n0,4;5\n0,5;7")
    assert found.header == header
    assert found.head_lines == head.count("\n") + 1
    assert found.first_rows[0] == ("0,1", "1")


def test_a_header_between_blanks_keeps_its_units():
    found = layout("  time (s)   speed [rad/s] i\n" + "\n".join(f"{k}.5  {k}  {-k}.25" for k in range(9)))
    assert found.separator == " "
    assert found.header == (("time (s)", "speed [rad/s]", "i"),)


def test_rows_may_end_in_a_separator():
    found = layout("t;i\n" + "\n".join(f"0,{k};1,5;" for k in range(9)))
    assert found.columns == 3
    assert found.numbers == (True, True, False)
    assert found.header == (("t", "i", ""),)


def test_columns_of_words_and_missing_numbers_do_not_hide_the_data():
    rows = ["0.1,RUN,,NaN,1", "0.2,RUN,,--,2", "0.3,STOP,,5,", "0.4,RUN,,6,4"] * 3
    found = layout("t,state,spare,i,w\n" + "\n".join(rows))
    assert found.numbers == (True, False, False, True, True)
    assert found.head_lines == 1


def test_stamps_are_found():
    found = layout("when,i\n" + "\n".join(f"2024-05-03 12:00:0{k}.5,1.{k}" for k in range(9)))
    assert found.stamps == (True, False)
    assert found.numbers == (False, True)
    assert found.separator == ","


def test_decimals_further_on_decide_where_the_start_has_none():
    start = "t;i\n" + "\n".join("0;0" for _ in range(9))
    assert layout(start).decimal_mark == "."
    assert layout(start, later="1;0,5\n2;0,25").decimal_mark == ","


def test_quotes_and_padding():
    assert layout("t,i\n" + "\n".join(f'"0,{k}","1,5"' for k in range(9))).quoted
    assert layout("t;i\n" + "\n".join(f"0.{k} ; 1.5 " for k in range(9))).padded
    plain = layout("t;i\n" + "\n".join(f"0.{k}; 1.5" for k in range(9)))
    assert not plain.quoted
    assert not plain.padded


def test_a_long_preamble_does_not_outvote_the_data():
    preamble = [f"setting {k}: value, of, some, kind" for k in range(150)]
    rows = [f"{k}\t{np.sin(k):.4f}" for k in range(300)]
    found = layout("\n".join([*preamble, "t\ti", *rows]))
    assert (found.separator, found.head_lines, found.header) == ("\t", 151, (("t", "i"),))


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("", "no rows of numbers"),
        ("once upon a time\nthere was a motor\n", "no rows of numbers"),
        ("<html>\n<body>\n<p>1</p>\n</body>", "no rows of numbers"),
        ("t;i\n", "no rows of numbers"),
        ("t;i\n" + "1,234.5;1.0\n" * 9, "thousands separators, such as 1,234.5"),
        ("t;i\n" + "1.234,5;0,5\n" * 9, "thousands separators, such as 1.234,5"),
        ("t,i\n" + "0,1,2,5\n" * 9, "decimal commas and separators at once"),
    ],
)
def test_what_is_no_log(text, reason):
    with pytest.raises(LogError, match=rf"^run\.csv: .*{reason}"):
        layout(text)


@given(st.text(max_size=300))
def test_any_text_is_laid_out_or_refused(text):
    try:
        found = layout(text)
    except LogError as error:
        assert str(error).startswith("run.csv: ")  # noqa: PT017
        return
    assert found.columns == len(found.numbers) == len(found.stamps)
    assert any(found.numbers) or any(found.stamps)
    assert all(len(row) == found.columns for row in found.header)
