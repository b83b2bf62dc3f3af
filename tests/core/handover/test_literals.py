"""C literals: read back, by an exact reader and by way of double, they are the value rounded to single precision."""

from __future__ import annotations

import math
import re

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.errors import HandoverError
from gainbench.handover.literals import count_literal, float_literal

# A floating constant of C99 6.4.4.2 with the suffix of type float.
FLOATING = re.compile(r"-?(?:\d+\.\d+|\d+(?:\.\d+)?e[+-]\d+)F")


@given(st.floats(min_value=1.2e-38, max_value=3.4e38) | st.floats(min_value=-3.4e38, max_value=-1.2e-38) | st.just(0.0))
def test_reads_back_to_the_rounded_value(value):
    literal = float_literal(value)
    assert FLOATING.fullmatch(literal)
    assert np.float32(float(literal[:-1])) == np.float32(value)
    assert len(literal) <= 18


@given(st.integers(min_value=0x00800000, max_value=0x7F7FFFFF))
def test_every_single_is_written_back_to_itself(bits):
    single = np.array([bits], dtype=np.uint32).view(np.float32)[0]
    assert np.float32(float(float_literal(float(single))[:-1])) == single


@pytest.mark.parametrize(
    ("value", "literal"),
    [(0.0, "0.0F"), (20000.0, "20000.0F"), (2.66, "2.66F"), (1.0 / 3.0, "0.333333343F"), (5e-5, "5e-05F")],
)
def test_is_short_and_plain(value, literal):
    found = float_literal(value)
    assert len(found) <= len(literal)
    assert np.float32(found[:-1]) == np.float32(literal[:-1])


@pytest.mark.parametrize("value", [1e39, -1e39, 1e-39, 1e-60, math.inf, math.nan])
def test_what_single_precision_cannot_hold_is_refused(value):
    with pytest.raises(HandoverError, match="single precision"):
        float_literal(value)


def test_counts_are_unsigned():
    # MISRA C:2012 rule 7.2, read in a third party's checker documents.
    assert count_literal(4096) == "4096U"
