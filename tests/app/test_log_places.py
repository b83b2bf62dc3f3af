from pathlib import Path

import pytest

from gainbench.sheetfile import parse_sheet
from gainbench_app.log_places import carried_along, file_of, place_of, words_of


@pytest.mark.parametrize(
    ("log", "text"),
    [
        ("bench/run.csv", "run.csv"),
        ("bench/logs/run.csv", "logs/run.csv"),
        ("logs/run.csv", "../logs/run.csv"),
    ],
)
def test_a_log_with_the_sheet_is_named_relative_to_it(tmp_path, log, text):
    sheet = tmp_path / "bench" / "motor.bench.toml"
    place = place_of(tmp_path / log, sheet)
    assert place == text
    assert words_of(place, sheet) == ""
    assert file_of(place, sheet).resolve() == (tmp_path / log).resolve()


def test_a_log_elsewhere_is_named_by_its_whole_path(tmp_path):
    sheet = tmp_path / "a" / "b" / "motor.bench.toml"
    log = tmp_path / "c" / "run.csv"
    for place in (place_of(log, sheet), place_of(log, None)):
        assert Path(place) == log
    assert words_of(str(log), sheet).endswith("far from the sheet")
    assert words_of(str(log), None).endswith("no file yet")


def test_without_a_file_of_the_sheet_names_start_in_the_working_folder():
    assert file_of("run.csv", None) == Path("run.csv")
    assert "working folder" in words_of("run.csv", None)
    assert words_of("run.csv", Path("motor.bench.toml")) == ""


EVIDENCE = """
[[evidence]]
log = "{log}"
experiment = "driven"
[evidence.columns]
time = {{ column = "t", unit = "s" }}
current = {{ column = "i", unit = "A" }}
speed = {{ column = "n", unit = "rpm" }}
"""


@pytest.fixture
def sheet_of(demo_texts):
    return lambda log: parse_sheet(demo_texts["label-unwinder"] + EVIDENCE.format(log=log), "x.bench.toml")


def test_logs_are_found_from_another_folder_of_the_sheet(tmp_path, sheet_of):
    log = tmp_path / "bench" / "run.csv"
    log.parent.mkdir()
    log.write_text("t,i,n")
    before, beside, below = (tmp_path / one / "x.bench.toml" for one in ("bench", "other", "bench/older"))
    document = sheet_of("run.csv")
    for after, place in ((beside, "../bench/run.csv"), (below, "../run.csv")):
        moved = carried_along(document, before=before, after=after)
        assert moved.sheet.evidence[0].log == place
        assert file_of(place, after).resolve() == log
    assert carried_along(document, before=before, after=before.with_name("y.bench.toml")) is document


def test_a_log_that_is_not_there_keeps_its_name(tmp_path, sheet_of):
    document = sheet_of("run.csv")
    assert carried_along(document, before=tmp_path / "a" / "x.bench.toml", after=tmp_path / "b.bench.toml") is document


def test_the_first_file_of_a_sheet_lets_names_be_short(tmp_path, sheet_of):
    log = tmp_path / "run.csv"
    log.write_text("t,i,n")
    moved = carried_along(sheet_of(log.as_posix()), before=None, after=tmp_path / "x.bench.toml")
    assert moved.sheet.evidence[0].log == "run.csv"
