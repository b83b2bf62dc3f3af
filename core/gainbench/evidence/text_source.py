"""A text log as bytes: its encoding, a sample of its lines, and a form of it that the table reader takes."""

from __future__ import annotations

import codecs
import io
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from gainbench.errors import LogError

SAMPLE_BYTES = 1 << 18
"""Read from the start of a file, and from two places further on, to find out how it is laid out."""
MOST_REWRITTEN = 1_000_000_000
"""Bytes of a text that has to be rewritten in memory before it can be read as a table."""
LONGEST_LINE = 1 << 16
_PIECE = 1 << 22
_MARKS: tuple[tuple[bytes, str], ...] = (
    (codecs.BOM_UTF32_LE, "utf-32"),
    (codecs.BOM_UTF32_BE, "utf-32"),
    (codecs.BOM_UTF8, "utf-8-sig"),
    (codecs.BOM_UTF16_LE, "utf-16"),
    (codecs.BOM_UTF16_BE, "utf-16"),
)


@dataclass(frozen=True, slots=True, kw_only=True)
class TextSample:
    """Whole lines from the start of a text, and some from further on."""

    encoding: str
    lines: tuple[str, ...]
    """From the start, without their ends."""
    later: tuple[str, ...]
    """From the middle and the end of a text that is longer than the sample; never the first line of a piece."""
    old_line_ends: bool
    """Whether lines end in a carriage return alone."""
    whole: bool
    """Whether ``lines`` are all there are."""
    line_bytes: float
    """The shortest mean length of a line in any part of the sample, its end included [bytes]."""


def sample_text(path: Path) -> TextSample:
    """The lines that a text log starts with, and some from further on.

    Parameters
    ----------
    path : Path
        The file.

    Returns
    -------
    TextSample
        Decoded lines.

    Raises
    ------
    LogError
        If the file holds no text.
    OSError
        If it cannot be read.
    """
    size = path.stat().st_size
    with path.open("rb") as file:
        head = file.read(SAMPLE_BYTES)
        later = []
        for start in (size // 2, size - SAMPLE_BYTES // 4):
            if start > SAMPLE_BYTES:
                file.seek(start - start % 4)
                later.append(file.read(SAMPLE_BYTES // 4 + 4))
    encoding = _encoding(head, path.name)
    wide = encoding.startswith(("utf-16", "utf-32"))
    if not wide and any(b"\0" in piece for piece in (head, *later)):
        raise LogError(f"{path.name}: not a log: it holds bytes that are no text; export it as csv, .mat or .parquet")
    text = _decoded(head, encoding).removeprefix("\ufeff")
    old = "\n" not in text and "\r" in text
    end = "\r" if old else "\n"
    lines = text.split(end)
    whole = size <= SAMPLE_BYTES
    if not whole:
        lines.pop()
    if not lines or max(map(len, lines)) > LONGEST_LINE:
        raise LogError(f"{path.name}: not a log: a line is longer than {LONGEST_LINE} characters")
    parts = [_decoded(piece, _endless(encoding, head)).split(end)[1:-1] for piece in later]
    means = [len(head if piece is None else piece) / max(1, count) for piece, count in _counts(lines, parts, later)]
    return TextSample(
        encoding=encoding,
        lines=tuple(line.rstrip("\r") for line in lines),
        later=tuple(line.rstrip("\r") for part in parts for line in part),
        old_line_ends=old,
        whole=whole,
        line_bytes=min(means),
    )


def _counts(lines: list[str], parts: list[list[str]], later: list[bytes]) -> Iterator[tuple[bytes | None, int]]:
    """Each piece of the sample with its number of lines; None is the first."""
    yield None, len(lines)
    for part, piece in zip(parts, later, strict=True):
        if part:
            yield piece, len(part)


def _encoding(head: bytes, name: str) -> str:
    """UTF-8 where it is that, UTF-16 or UTF-32 by their marks or their zero bytes, else the one of old loggers."""
    for mark, encoding in _MARKS:
        if head.startswith(mark):
            return encoding
    start = head[:4096]
    if len(start) >= 4 and b"\0" in start:
        for offset, encoding in ((1, "utf-16-le"), (0, "utf-16-be")):
            zeros = start[offset::2].count(0)
            if zeros > 0.9 * (len(start) // 2) and start[1 - offset :: 2].count(0) == 0:
                return encoding
    try:
        # A character may be cut at the end of the sample, which an incremental decoder waits for.
        codecs.getincrementaldecoder("utf-8")().decode(head)
    except UnicodeDecodeError:
        return "cp1252"
    return "utf-8"


def _endless(encoding: str, head: bytes) -> str:
    """The encoding of a piece from further on, which carries no mark."""
    if encoding in {"utf-16", "utf-32"}:
        big = head.startswith((codecs.BOM_UTF16_BE, codecs.BOM_UTF32_BE))
        return f"{encoding}-{'be' if big else 'le'}"
    return encoding


def _decoded(content: bytes, encoding: str) -> str:
    return content.decode(encoding, errors="replace")


def as_table_text(path: Path, sample: TextSample, *, blanks: bool) -> Path | io.BytesIO:
    """What the table reader takes: the file itself, or a rewritten copy in memory where it does not take the file.

    Parameters
    ----------
    path : Path
        The file, which stays as it is.
    sample : TextSample
        What was found out about it.
    blanks : bool
        Whether runs of blanks separate its columns: they become one space each.

    Returns
    -------
    Path or BytesIO
        UTF-8 or bytes that agree with it in every number.

    Raises
    ------
    LogError
        If the file would have to be rewritten and is too large for it.
    OSError
        If it cannot be read.
    """
    wide = sample.encoding.startswith(("utf-16", "utf-32"))
    if not (wide or blanks or sample.old_line_ends):
        return path
    size = path.stat().st_size
    if size > MOST_REWRITTEN:
        why = "UTF-16" if wide else "columns that runs of blanks separate" if blanks else "old line ends"
        raise LogError(
            f"{path.name}: a file with {why} is read up to {MOST_REWRITTEN / 1e9:.0f} GB, this one has"
            f" {size / 1e9:.1f} GB; export it as UTF-8 with semicolons, or as .parquet"
        )
    result = io.BytesIO()
    decoder = codecs.getincrementaldecoder(sample.encoding if wide else "latin-1")(errors="replace")
    kept = b""
    with path.open("rb") as file:
        while piece := file.read(_PIECE):
            content = decoder.decode(piece).encode("utf-8") if wide else piece
            if sample.old_line_ends:
                content = content.replace(b"\r", b"\n")
            if blanks:
                # Whole lines only: a run of blanks must not be cut in two.
                content, kept = _whole_lines(kept + content)
                content = _single_blanks(content)
            result.write(content)
    if kept:
        result.write(_single_blanks(kept).strip(b" "))
    result.seek(0)
    return result


def _single_blanks(lines: bytes) -> bytes:
    """Lines with one space for every run of blanks, and none at their ends; far quicker than an expression."""
    lines = lines.replace(b"\r\n", b"\n").replace(b"\t", b" ")
    while b"  " in lines:
        lines = lines.replace(b"  ", b" ")
    return lines.replace(b" \n", b"\n").replace(b"\n ", b"\n").removeprefix(b" ")


def _whole_lines(content: bytes) -> tuple[bytes, bytes]:
    """The content up to and with its last line end, and what is behind it."""
    end = content.rfind(b"\n") + 1
    return content[:end], content[end:]
