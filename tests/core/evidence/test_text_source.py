"""Encodings, line ends and samples of text logs."""

from __future__ import annotations

import io

import pytest

from gainbench.errors import LogError
from gainbench.evidence import text_source
from gainbench.evidence.text_source import SAMPLE_BYTES, as_table_text, sample_text

TEXT = "Zeit;Strom\n0;1\n1;2\n"


def content(given) -> bytes:
    return given.getvalue() if isinstance(given, io.BytesIO) else given.read_bytes()


@pytest.mark.parametrize(
    ("encoding", "mark"),
    [
        ("utf-8", ""),
        ("utf-8-sig", ""),
        ("utf-16", ""),
        ("utf-16-le", "\ufeff"),
        ("utf-16-be", "\ufeff"),
        ("utf-16-le", ""),
        ("utf-16-be", ""),
        ("utf-32", ""),
        ("utf-32-be", "\ufeff"),
        ("cp1252", ""),
    ],
)
def test_encodings(written, encoding, mark):
    text = "Moment µ;Winkel °\n" + TEXT
    path = written(mark + text, encoding=encoding)
    before = path.read_bytes()
    sample = sample_text(path)
    assert sample.lines == tuple(text.split("\n"))
    assert sample.whole
    table = content(as_table_text(path, sample, blanks=False)).decode("cp1252" if encoding == "cp1252" else "utf-8-sig")
    assert table.removeprefix("\ufeff") == text
    assert path.read_bytes() == before


@pytest.mark.parametrize(("end", "old"), [("\n", False), ("\r\n", False), ("\r", True)])
def test_line_ends(written, end, old):
    path = written(TEXT.replace("\n", end))
    sample = sample_text(path)
    assert sample.lines[:3] == ("Zeit;Strom", "0;1", "1;2")
    assert sample.old_line_ends is old
    assert content(as_table_text(path, sample, blanks=False)).replace(b"\r\n", b"\n") == TEXT.encode()


def test_runs_of_blanks_become_one(written, monkeypatch):
    # Small pieces, so that every border between two of them is tried.
    monkeypatch.setattr(text_source, "_PIECE", 5)
    path = written("  t   i\n\n 0 \t 1 \r\n   1  -2\n  2   3")
    sample = sample_text(path)
    assert content(as_table_text(path, sample, blanks=True)) == b"t i\n\n0 1\n1 -2\n2 3"


def test_a_long_text_is_sampled_in_three_places(written):
    lines = [f"{index:07d};0,5" for index in range(200_000)]
    sample = sample_text(written("\n".join(lines)))
    assert not sample.whole
    assert sample.lines == tuple(lines[: len(sample.lines)])
    assert set(sample.later) <= set(lines)
    assert any(90_000 < int(line[:7]) < 120_000 for line in sample.later)
    assert any(int(line[:7]) > 195_000 for line in sample.later)
    assert sample.line_bytes == pytest.approx(12.0, rel=0.01)


@pytest.mark.parametrize(
    ("given", "reason"),
    [
        (b"t;i\n0;1\n\0\0\0\0", "bytes that are no text"),
        (b"t;i\n" + b"0;1\n" * SAMPLE_BYTES + b"\0", "bytes that are no text"),
        (b"1" * (SAMPLE_BYTES + 1), "longer than"),
        (b"1" * 70_000, "longer than"),
    ],
    ids=["zeros", "zeros at the end", "one endless line", "one long line"],
)
def test_what_is_no_text(written, given, reason):
    with pytest.raises(LogError, match=rf"^run\.csv: not a log: .*{reason}"):
        sample_text(written(given))


def test_a_text_that_must_be_rewritten_is_read_up_to_a_size(written, monkeypatch):
    monkeypatch.setattr(text_source, "MOST_REWRITTEN", 10)
    path = written("0 1\n" * 10)
    with pytest.raises(LogError, match=r"runs of blanks separate.*semicolons"):
        as_table_text(path, sample_text(path), blanks=True)
    wide = written("0;1\n" * 10, "wide.csv", encoding="utf-16")
    with pytest.raises(LogError, match="UTF-16 is read up to"):
        as_table_text(wide, sample_text(wide), blanks=False)
