from dataclasses import replace

import pytest
from PySide6.QtGui import QPageSize, QPdfWriter

from gainbench_app.printing import print_page
from gainbench_app.theme import DARK


@pytest.fixture
def writer(tmp_path):
    def make(name):
        found = QPdfWriter(str(tmp_path / name))
        found.setPageSize(QPageSize(QPageSize.PageSizeId.A4))
        return found

    return make


def pages(file):
    return file.read_bytes().count(b"/Type /Page\n")


def test_a_sheet_is_printed(window, writer, tmp_path):
    window.shelf.shelf.compute_now()
    print_page(writer("a.pdf"), window.printed())
    assert pages(tmp_path / "a.pdf") >= 1
    assert (tmp_path / "a.pdf").stat().st_size > 10_000


def test_what_does_not_fit_goes_to_the_next_page(window, writer, tmp_path):
    page = window.printed()
    print_page(writer("short.pdf"), page)
    print_page(writer("long.pdf"), replace(page, findings=page.findings * 30))
    assert pages(tmp_path / "long.pdf") > pages(tmp_path / "short.pdf")


def test_paper_is_always_light_and_the_screen_stays_as_it_is(window, appearance, writer):
    appearance.show(DARK)
    print_page(writer("dark.pdf"), window.printed())
    assert all(one.theme is DARK for one in window.figures())


def test_a_shelf_without_rows_is_left_out(window, writer, tmp_path):
    print_page(writer("bare.pdf"), replace(window.printed(), rows=(), figures=(), findings=()))
    assert pages(tmp_path / "bare.pdf") == 1
