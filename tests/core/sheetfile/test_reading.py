"""Files that are no sheets: one message each, and never a traceback."""

from __future__ import annotations

import os

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.errors import SheetError
from gainbench.sheetfile import MAX_BYTES, parse_sheet, read_sheet
from gainbench.sheetfile.reading import default_title


def message(path) -> str:
    with pytest.raises(SheetError) as caught:
        read_sheet(path)
    assert caught.value.problems == ()
    assert "\n" not in str(caught.value)
    return str(caught.value)


def test_a_missing_file(tmp_path):
    text = message(tmp_path / "none.bench.toml")
    assert text.startswith("none.bench.toml: there is no such file")
    assert "check the path" in text


def test_a_folder(tmp_path):
    assert "this is a folder" in message(tmp_path)
    assert "this is a folder" in message(str(tmp_path))


@pytest.mark.parametrize(
    ("content", "reason"),
    [
        (b"", "the file is empty"),
        (b"\n  \n", "the file is empty"),
        (b"\xef\xbb\xbf", "the file is empty"),
        (b"\x7fELF\x02\x01\x01\0\0\0", "binary or not UTF-8"),
        (b"\x89PNG\r\n\x1a\n", "not UTF-8"),
        ("format = 1\n".encode("utf-16"), "is UTF-16; save it as UTF-8"),
        ("format = 1\n".encode("utf-16-be"), "binary or not UTF-8"),
        (b"\xfe\xff" + "format = 1\n".encode("utf-16-be"), "is UTF-16"),
        ("format = 1\ntitle = 'Zo\xeb'\n".encode("latin-1"), "not UTF-8 (line 2)"),
        (b"format = \n", "this is not TOML"),
        (b"format = 1\ntitle = oops\n", "(at line 2, column 9)"),
        (b"format = 1\nformat = 1\n", "this is not TOML"),
        (b"format = 1\n[machine\n", "this is not TOML"),
        (b"format = 1\ntitle = 'bell \x07'\n", "this is not TOML"),
        (b"format = 1\r", "this is not TOML"),
        (b"format = " + b"1" * 5000, "a number or a date in it cannot be read"),
        (b"format = 1\nx = 2020-02-31\n", "not TOML"),
        (b"x = " + b"[" * 5000, "nested too deeply"),
        (b"x = " + b"{a=" * 5000, "nested too deeply"),
        (b"format = 1\n" + b"a." * 400_000 + b"a = 1\n", "line 2 has more than"),
        (b"format = 1\n[" + b"a . " * 200_000 + b"a]\n", "line 2 has more than"),
        (b'format = 1\nx = [\n"""\n\'""", {' + b"a." * 200_000 + b'a="\'"}]\n', "line 4 has more than"),
    ],
)
def test_content_that_is_no_sheet(tmp_path, content, reason):
    path = tmp_path / "x.bench.toml"
    path.write_bytes(content)
    assert reason in message(path)


def test_a_file_of_50_megabytes_is_refused_unread(tmp_path):
    path = tmp_path / "large.bench.toml"
    with path.open("wb") as file:
        file.truncate(50_000_000)
    assert "the file has 50000000 bytes, a bench sheet has at most 1000000" in message(path)


def test_the_largest_sheet_is_read(tmp_path, demo):
    path = tmp_path / "x.bench.toml"
    content = demo.encode()
    path.write_bytes(content + b"#" * (MAX_BYTES - len(content)))
    assert read_sheet(path).sheet.title == "Label unwinder"
    path.write_bytes(content + b"#" * (MAX_BYTES - len(content) + 1))
    assert "at most 1000000" in message(path)


def test_the_largest_text_is_counted_in_bytes(demo):
    with pytest.raises(SheetError, match="longer than 1000000 bytes"):
        parse_sheet(demo + "#" + "é" * 499_999, "x")


def test_a_half_character_is_refused(demo):
    with pytest.raises(SheetError, match="half character"):
        parse_sheet(demo + "# \ud800", "x")


def test_names_that_are_no_files(tmp_path):
    assert "this is not the name of a file" in message("a\0b")
    assert "cannot be read" in message("x" * 5000)
    (tmp_path / "loop").symlink_to("loop")
    assert "cannot be read" in message(tmp_path / "loop")


@pytest.mark.skipif(not hasattr(os, "mkfifo"), reason="the system has no pipes with a name")
def test_a_pipe_is_not_waited_for(tmp_path):
    os.mkfifo(tmp_path / "pipe")
    assert "not a regular file" in message(tmp_path / "pipe")


@pytest.mark.skipif(not hasattr(os, "geteuid") or os.geteuid() == 0, reason="root may read every file")
def test_a_file_that_may_not_be_read(tmp_path):
    path = tmp_path / "x.bench.toml"
    path.write_text("format = 1")
    path.chmod(0)
    assert "cannot be read" in message(path)


@pytest.mark.parametrize("line_end", ["\n", "\r\n"])
@pytest.mark.parametrize("mark", [b"", b"\xef\xbb\xbf"])
def test_line_ends_and_byte_order_mark_of_other_systems(tmp_path, demo, line_end, mark):
    path = tmp_path / "x.bench.toml"
    path.write_bytes(mark + demo.replace("\n", line_end).encode())
    document = read_sheet(path)
    assert document.sheet == parse_sheet(demo, "x").sheet
    assert document.text() == demo.replace("\n", line_end)


def test_dots_in_texts_and_comments_are_no_keys(demo, altered):
    text = altered(demo, "title", f'"{"." * 100}" # {"." * 100}') + f"# {'.' * 1000}\n"
    assert parse_sheet(text, "x").sheet.title == "." * 100


@pytest.mark.parametrize(
    ("name", "title"),
    [
        ("motor.bench.toml", "motor"),
        ("motor.toml", "motor"),
        ("motor", "motor"),
        (".bench.toml", "sheet"),
        ("a\nb\x1b.bench.toml", "a?b?"),
        ("x" * 300, "x" * 200),
    ],
)
def test_the_title_defaults_to_the_name_of_the_file(name, title, elastic):
    assert default_title(name) == title
    assert parse_sheet(elastic, name).sheet.title == title


@given(text=st.text(max_size=200))
def test_no_text_raises_anything_else(text):
    with pytest.raises(SheetError):
        parse_sheet(text, "x")


@given(lines=st.lists(st.from_regex(r"[\[\]a-z.\"'{}=, 0-9#\\]{0,30}", fullmatch=True), max_size=8))
def test_nothing_that_looks_like_toml_raises_anything_else(lines):
    with pytest.raises(SheetError):
        parse_sheet("format = 1\n" + "\n".join(lines), "x")
