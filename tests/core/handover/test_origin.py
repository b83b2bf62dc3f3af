"""What a header says of where it came from can be read back, and held against a sheet."""

from __future__ import annotations

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gainbench.errors import HandoverError
from gainbench.handover import Difference, differences, read_origin, write_handover, write_header
from gainbench.handover.origin import MAX_BYTES


@pytest.fixture
def written(demos, sources, tmp_path):
    return write_handover(demos["label-unwinder"], tmp_path, source=sources["label-unwinder"])


def test_reads_back_what_was_written(demos, sources, written):
    origin = read_origin(written)
    header = write_header(demos["label-unwinder"], sources["label-unwinder"])
    assert origin.digest == sources["label-unwinder"].digest
    assert (origin.prefix, origin.sheet_name) == ("LABEL_UNWINDER", "label-unwinder.bench.toml")
    assert origin.designed
    assert origin.values == header.values
    assert differences(origin, header) == ()


def test_other_line_ends_do_not_matter(written):
    before = read_origin(written)
    written.write_bytes(written.read_bytes().replace(b"\n", b"\r\n"))
    assert read_origin(written) == before


def test_a_change_by_hand_is_seen(demos, sources, written):
    header = write_header(demos["label-unwinder"], sources["label-unwinder"])
    text = written.read_text()
    kp = header.values["CURRENT_KP"]
    written.write_text(text.replace(f"CURRENT_KP {kp}", "CURRENT_KP 9.5F").replace("SPEED_WINDOW", "SPEED_WINDING"))
    assert differences(read_origin(written), header) == (
        Difference(name="CURRENT_KP", in_file="9.5F", in_sheet=kp),
        Difference(name="SPEED_WINDOW", in_file=None, in_sheet="1U"),
        Difference(name="SPEED_WINDING", in_file="1U", in_sheet=None),
    )


@given(name=st.text(min_size=1, max_size=100), title=st.text(min_size=1, max_size=200))
def test_no_name_can_pass_for_another_origin(demos, sources, tmp_path_factory, name, title):
    assessment = demos["label-unwinder"]
    named = replace(assessment, sheet=replace(assessment.sheet, title=f"{title}\n *   Digest: {'0' * 64}"))
    source = replace(sources["label-unwinder"], tuning=name, sheet_name=f"{title}\n *   Prefix: X")
    path = write_handover(named, tmp_path_factory.mktemp("out"), source=source, prefix="AXIS1")
    origin = read_origin(path)
    assert (origin.digest, origin.prefix) == (source.digest, "AXIS1")
    assert origin.is_kept(name)
    assert not origin.designed
    assert not origin.is_kept(f"{name} ")


@pytest.mark.parametrize(
    ("content", "why"),
    [
        (b"", "does not tell its origin"),
        (b"#define X 1\n", "does not tell its origin"),
        (b"\xff\xfe\x00\x00", "does not tell its origin"),
        (b"/*\n *   Digest: 12\n *   Prefix: A\n *   Tuning: a\n *   Sheet:  b\n */\n", "does not tell its origin"),
        (b" " * (MAX_BYTES + 1), "far smaller"),
    ],
)
def test_other_files_are_refused(tmp_path, content, why):
    path = tmp_path / "other.h"
    path.write_bytes(content)
    with pytest.raises(HandoverError, match=rf"^other\.h: .*{why}"):
        read_origin(path)


def test_what_is_no_file_is_refused(tmp_path):
    with pytest.raises(HandoverError, match="does not exist"):
        read_origin(tmp_path / "none.h")
    with pytest.raises(HandoverError, match="is not a file"):
        read_origin(tmp_path)
