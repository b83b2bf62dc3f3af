"""Text that may stand in a C comment, whoever wrote it.

A title or a note is never trusted: it could close the comment, splice lines, open another comment or hide code from
the reader. What could do so is written out as its code point, ``[U+002A]``.
"""

from __future__ import annotations

import re
import textwrap

from gainbench.handover.figures import apart, joined

WIDTH = 110
"""Of a line of the header."""

_PLAIN = frozenset(" !\"#$%&'()+,-.0123456789:;<=>@ABCDEFGHIJKLMNOPQRSTUVWXYZ[]^_`abcdefghijklmnopqrstuvwxyz{|}~")
_BETWEEN = re.compile(r"[A-Za-z0-9()]")
_COMMENT = re.compile(r"/\*.*?\*/", re.DOTALL)
_DIRECTIVE = re.compile(
    r"#(?:ifndef [A-Za-z]\w*|define [A-Za-z]\w*(?: \d+U| \d+(?:\.\d+)?(?:e[+-]\d+)?F)?|endif)", re.ASCII
)


def comment_text(text: str) -> str:
    """One line of ASCII that is harmless anywhere inside a comment.

    ``*`` and ``/`` stay only between letters, digits and brackets, as in ``N*m/A``, so that no two of them meet and
    none stands at an end; ``?`` stays where no other follows or comes before; a backslash never stays.

    Parameters
    ----------
    text : str
        Any text.

    Returns
    -------
    str
        Printable ASCII; everything else as ``[U+....]``.
    """
    written = []
    for index, character in enumerate(text):
        before, after = text[index - 1 : index], text[index + 1 : index + 2]
        if character in "*/":
            harmless = _BETWEEN.fullmatch(before) is not None and _BETWEEN.fullmatch(after) is not None
        elif character == "?":
            harmless = "?" not in (before, after)
        else:
            harmless = character in _PLAIN
        written.append(character if harmless else f"[U+{ord(character):04X}]")
    return "".join(written)


def comment_lines(text: str, *, first: str = "", rest: str = "") -> tuple[str, ...]:
    """A text as the lines of a comment, wrapped.

    Parameters
    ----------
    text : str
        Any text.
    first : str
        Before the first line.
    rest : str
        Before the others.

    Returns
    -------
    tuple of str
        Without the comment's own marks.
    """
    wrapped = textwrap.wrap(
        joined(comment_text(text)),
        width=WIDTH - 3,
        initial_indent=first,
        subsequent_indent=rest,
        break_on_hyphens=False,
    )
    return tuple(apart(line) for line in wrapped)


def code_lines(header: str) -> tuple[str, ...]:
    """What a compiler sees of a header: its lines without comments and blank lines.

    Parameters
    ----------
    header : str
        A header as this package writes it.

    Returns
    -------
    tuple of str
        Directives, stripped.
    """
    return tuple(line for raw in _COMMENT.sub(" ", header).splitlines() if (line := raw.strip()))


def strange_code(header: str) -> str | None:
    """The first line outside comments that is none of the directives a header is made of; None where there is none."""
    return next((line for line in code_lines(header) if _DIRECTIVE.fullmatch(line) is None), None)
