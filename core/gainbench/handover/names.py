"""Names in C: what a title becomes, and which prefixes are taken.

Macros must be C identifiers, must not be reserved to the language or its library, and must be told apart by their
first 31 characters, which is all that some compilers look at (C90; MISRA C:2012 rules 5.1, 5.4, 21.1, 21.2, from
memory).
"""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterable

from gainbench.errors import HandoverError

SIGNIFICANT = 31
"""Characters by which two names must differ."""
LONGEST_PREFIX = 18
"""So that the longest pair of names that start alike still differs within ``SIGNIFICANT`` characters."""
_LONGEST_FILE = 60
_STAND_IN = "DRIVE"

_IDENTIFIER = re.compile(r"[A-Za-z][A-Za-z0-9_]*", re.ASCII)
_RESERVED = re.compile(r"_.*|E[0-9A-Z].*|(?:FE|FP|LC|ATOMIC|TIME)_.*|(?:PRI|SCN)[a-zX].*|SIG[A-Z_].*|.*__.*")
_UNIT_WORDS = (("°", "deg"), ("µ", "u"), ("\N{GREEK SMALL LETTER MU}", "u"), ("·", "*"), ("⋅", "*"))
_SPELLED_UNIT = re.compile(r"[A-Za-z*/() ]+", re.ASCII)


def is_reserved(name: str) -> bool:
    """Whether a name is kept for C or its library: a leading or a double underscore, ``E`` and a capital as in errno.h,
    and the families of fenv.h, math.h, locale.h, inttypes.h, signal.h, stdatomic.h and time.h (C99 7.26, C11 7.31).
    """
    return _RESERVED.fullmatch(name) is not None


def title_words(title: str) -> str:
    """The ASCII letters and digits of a title, joined by single underscores; accents are dropped."""
    plain = unicodedata.normalize("NFKD", title)
    ascii_only = "".join(one for one in plain if one.isascii() or not unicodedata.combining(one))
    return re.sub(r"[^A-Za-z0-9]+", "_", ascii_only).strip("_")


def header_name(title: str, *, stand_in: str = "") -> str:
    """The header's file name: the title as an identifier, and ``_gains.h``.

    Parameters
    ----------
    title : str
        Of the sheet.
    stand_in : str
        Used where the title holds no ASCII letter or digit; the sheet's file name.

    Returns
    -------
    str
        ``label_unwinder_gains.h``; the identifier is at most 60 characters.
    """
    words = (title_words(title) or title_words(stand_in) or _STAND_IN).lower()[:_LONGEST_FILE].strip("_")
    return f"{words if words[0].isalpha() else f'{_STAND_IN.lower()}_{words}'}_gains.h"


def title_prefix(title: str, *, stand_in: str = "") -> str:
    """The prefix of the macros that a title gives.

    Parameters
    ----------
    title : str
        Of the sheet.
    stand_in : str
        Used where the title holds no ASCII letter or digit.

    Returns
    -------
    str
        ``LABEL_UNWINDER``: capitals, at most ``LONGEST_PREFIX``, neither reserved nor starting with a digit.
    """
    words = (title_words(title) or title_words(stand_in) or _STAND_IN).upper()
    if not words[0].isalpha() or is_reserved(f"{words[:LONGEST_PREFIX]}_GAINS_H"):
        words = f"{_STAND_IN}_{words}"
    return words[:LONGEST_PREFIX].rstrip("_")


def checked_prefix(prefix: str) -> str:
    """A prefix that someone chose.

    Parameters
    ----------
    prefix : str
        As given, without the underscore that follows it.

    Returns
    -------
    str
        The same.

    Raises
    ------
    HandoverError
        If it is no identifier, reserved, or too long for its macros to be told apart.
    """
    shown = ascii(prefix if len(prefix) <= SIGNIFICANT else f"{prefix[:SIGNIFICANT]}...")
    if _IDENTIFIER.fullmatch(prefix) is None:
        raise HandoverError(
            f"prefix {shown}: a prefix is ASCII letters, digits and underscores, and starts with a letter "
            "(for example AXIS1)"
        )
    if prefix.endswith("_"):
        raise HandoverError(f"prefix {shown}: leave out the underscore at its end, it is added (for example AXIS1)")
    if len(prefix) > LONGEST_PREFIX:
        raise HandoverError(
            f"prefix {shown}: it has {len(prefix)} characters, with more than {LONGEST_PREFIX} the macros could not be "
            f"told apart by their first {SIGNIFICANT} (for example AXIS1)"
        )
    if is_reserved(f"{prefix}_GAINS_H"):
        raise HandoverError(
            f"prefix {shown}: names that start like this are reserved to C and its library "
            f"(for example AXIS_{prefix.strip('_')[:8]})"
        )
    return prefix


def unit_name(unit: str) -> str:
    """A unit as part of a macro's name: ``A/(rpm*s)`` gives ``A_PER_RPM_S``.

    Parameters
    ----------
    unit : str
        As a sheet spells it.

    Returns
    -------
    str
        Capitals; empty where the spelling has no plain letters for it.
    """
    for sign, word in _UNIT_WORDS:
        unit = unit.replace(sign, word)
    if _SPELLED_UNIT.fullmatch(unit) is None:
        return ""
    return re.sub(r"[^A-Z]+", "_", unit.upper().replace("/", " PER ")).strip("_")


def require_distinct(names: Iterable[str]) -> None:
    """See that names differ in their first ``SIGNIFICANT`` characters and are neither malformed nor reserved.

    Parameters
    ----------
    names : iterable of str
        All macros of a header.

    Raises
    ------
    HandoverError
        If they are not.
    """
    seen: dict[str, str] = {}
    for name in names:
        if _IDENTIFIER.fullmatch(name) is None or is_reserved(name):
            raise HandoverError(f"{name} cannot be the name of a macro: give another prefix (for example AXIS1)")
        start = name[:SIGNIFICANT]
        if start in seen:
            raise HandoverError(
                f"{seen[start]} and {name} are the same in their first {SIGNIFICANT} characters: give a shorter prefix "
                "(for example AXIS1)"
            )
        seen[start] = name
