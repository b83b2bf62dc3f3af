from pathlib import Path

import pytest

from gainbench_app.pages.evidence.paths import file_of, place_of, words_of


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
