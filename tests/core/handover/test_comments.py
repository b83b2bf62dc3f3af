"""Text for C comments: whatever it was, it cannot end the comment, splice lines or start another one.

MISRA C:2012 rule 3.1 (required), read in a third party's checker documents: neither ``/*`` nor ``//`` inside a comment.
"""

from __future__ import annotations

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from gainbench.handover.comments import WIDTH, code_lines, comment_lines, comment_text, strange_code

hostile = st.text(alphabet=st.sampled_from("*/?\\ab \"'\n\r\tÄµ漢\u2028\u202e"), max_size=40) | st.text(max_size=60)


@given(hostile)
@example("*/ int evil; /*")
@example("??/")
@example("http://example.org/*")
@example("\\")
@example("*??/\n/")
def test_text_is_harmless_anywhere_in_a_comment(text):
    written = comment_text(text)
    assert written.isascii()
    assert "\\" not in written
    assert written.isprintable() or not written
    for danger in ("*/", "/*", "//", "??"):
        assert danger not in written
    # Nor may a neighbour complete one of them.
    assert not written.startswith(("*", "/"))
    assert not written.endswith(("*", "/"))


@given(hostile)
@example("a/b " * 60)
@example("x" * 400 + "/" + "y" * 400)
def test_wrapped_lines_are_harmless_too(text):
    lines = comment_lines(text, first="   ", rest="     ")
    assert all(len(line) <= WIDTH and "\\" not in line for line in lines)
    block = "/*\n" + "".join(f" *{line}\n" for line in lines) + " */\n"
    assert block.count("*/") == 1
    assert block.count("/*") == 1
    assert "//" not in block


@pytest.mark.parametrize("text", ["2.66 V/A", "N*m*s/rad", "V/(A*s)", "why?", "it's 10 % of [x]", "#1 (a|b) <c> & d;"])
def test_plain_technical_text_stays(text):
    assert comment_text(text) == text


@pytest.mark.parametrize(
    ("text", "written"),
    [
        ("Ä", "[U+00C4]"),
        ("*/", "[U+002A][U+002F]"),
        ("a//b", "a[U+002F][U+002F]b"),
        ("??/", "[U+003F][U+003F][U+002F]"),
        ("a\\", "a[U+005C]"),
        ("\U0001f600", "[U+1F600]"),
    ],
)
def test_the_rest_is_written_as_code_points(text, written):
    assert comment_text(text) == written


def test_number_and_unit_stay_on_one_line():
    text = "x" * (WIDTH - 8) + " 45.6 V"
    assert comment_lines(text)[-1] == "45.6 V"


def test_code_is_what_is_outside_comments():
    text = "/* a\n * #define B 1\n */\n#ifndef A\n#define A_B 2U /* c */\n\n#endif\n"
    assert code_lines(text) == ("#ifndef A", "#define A_B 2U", "#endif")
    assert strange_code(text) is None


@pytest.mark.parametrize(
    "line",
    [
        "int evil;",
        "#include <stdio.h>",
        "#define A_B (system())",
        "#define A_B 1 /",
        "#define _A 1U",
        "#define A(x) 1U",
        "#undef A",
        "#define A_B 1U \\",
        "*/",
        "#define Ä 1U",
    ],
)
def test_strange_code_is_seen(line):
    assert strange_code(f"/* head */\n#define A_C 1.5F\n{line}\n") == line
