"""Names in C.

MISRA C:2012 rules 5.4, 5.5, 21.1 and 21.2, read in a third party's checker documents: macro names differ within 63
characters (C99) or 31 (C90) and are not reserved to the implementation.
"""

from __future__ import annotations

import re

import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from gainbench.errors import HandoverError
from gainbench.handover.names import (
    LONGEST_PREFIX,
    checked_prefix,
    header_name,
    is_reserved,
    require_distinct,
    title_prefix,
    unit_name,
)

IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]*", re.ASCII)


@given(title=st.text(max_size=200), stand_in=st.text(max_size=50))
@example(title="*/", stand_in="")
@example(title="Elevator", stand_in="")
@example(title="ﬁ ß ﷺ", stand_in="")
def test_every_title_gives_a_prefix_and_a_file_name(title, stand_in):
    prefix = title_prefix(title, stand_in=stand_in)
    assert IDENTIFIER.fullmatch(prefix)
    assert len(prefix) <= LONGEST_PREFIX
    assert checked_prefix(prefix) == prefix
    name = header_name(title, stand_in=stand_in)
    assert re.fullmatch(r"[a-z][a-z0-9_]{0,80}_gains\.h", name, re.ASCII)


@pytest.mark.parametrize(
    ("title", "prefix", "name"),
    [
        ("Label unwinder", "LABEL_UNWINDER", "label_unwinder_gains.h"),
        ("Ölkühler-Lüfter", "OLKUHLER_LUFTER", "olkuhler_lufter_gains.h"),
        ("3rd axis", "DRIVE_3RD_AXIS", "drive_3rd_axis_gains.h"),
        ("Elevator", "DRIVE_ELEVATOR", "elevator_gains.h"),
        ("__x__", "X", "x_gains.h"),
        ("Signal arm", "DRIVE_SIGNAL_ARM", "signal_arm_gains.h"),
        ("../../etc", "DRIVE_ETC", "etc_gains.h"),
    ],
)
def test_titles_become_names(title, prefix, name):
    assert (title_prefix(title), header_name(title)) == (prefix, name)


def test_a_title_without_latin_letters_takes_the_files_name():
    assert title_prefix("巻出し", stand_in="unwinder") == "UNWINDER"
    assert header_name("巻出し", stand_in="unwinder") == "unwinder_gains.h"
    assert title_prefix("巻出し", stand_in="軸") == "DRIVE"


@pytest.mark.parametrize("prefix", ["AXIS1", "axis_1", "X", "A" * LONGEST_PREFIX, "E", "e_1"])
def test_good_prefixes_are_taken_as_they_are(prefix):
    assert checked_prefix(prefix) == prefix


@pytest.mark.parametrize(
    "prefix",
    ["", "1A", "_A", "A_", "A-B", "A B", "Ä", "A" * (LONGEST_PREFIX + 1), "E1", "ERR", "SIGX", "LC", "FE", "PRIX",
     "A__B", "A\nB", "A/*", "int x; //", "\u202eA"],
)  # fmt: skip
def test_bad_prefixes_are_refused_with_an_example(prefix):
    with pytest.raises(HandoverError, match=r"^prefix .*AXIS") as caught:
        checked_prefix(prefix)
    assert str(caught.value).isascii()
    assert "\n" not in str(caught.value)


# The families of C99 7.26 and C11 7.31, from memory.
@pytest.mark.parametrize("name", ["_A", "EINVAL", "E2BIG", "SIGINT", "SIG_DFL", "LC_ALL", "FE_X", "FP_NAN", "PRIX32",
                                  "SCNd8", "ATOMIC_X", "TIME_UTC", "A__B"])  # fmt: skip
def test_reserved_names_are_known(name):
    assert is_reserved(name)


@pytest.mark.parametrize("name", ["E_CURRENT_KP", "AXIS_CURRENT_KP", "PRINT_X", "Error", "LCD_X"])
def test_free_names_are_free(name):
    assert not is_reserved(name)


def test_distinct_in_thirty_one_characters():
    start = "A" * 30
    require_distinct([f"{start}B_LONG", f"{start}C_LONG"])
    with pytest.raises(HandoverError, match="first 31 characters"):
        require_distinct([f"{start}BC", f"{start}BD"])
    with pytest.raises(HandoverError, match="cannot be the name"):
        require_distinct(["_A"])


@pytest.mark.parametrize(
    ("unit", "name"),
    [
        ("A/(rpm*s)", "A_PER_RPM_S"),
        ("V/(A*s)", "V_PER_A_S"),
        ("N*m*s/rad", "N_M_S_PER_RAD"),
        ("A/(°/s)", "A_PER_DEG_PER_S"),
        ("A/(turn·s⁻¹)", ""),
    ],
)
def test_units_become_names(unit, name):
    assert unit_name(unit) == name
