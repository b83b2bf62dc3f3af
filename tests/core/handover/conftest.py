"""Assessments of the demo sheets, and sheets changed in a few values, for the tests of the firmware files."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from gainbench.assess import Assessment, assess
from gainbench.handover import Source
from gainbench.sheetfile import digest, parse_sheet

Assessed = Callable[..., Assessment]


@pytest.fixture(scope="session")
def demos(demo_texts: dict[str, str]) -> dict[str, Assessment]:
    """Assessment of every demo sheet by its name."""
    return {name: assess(parse_sheet(text, f"{name}.bench.toml").sheet) for name, text in demo_texts.items()}


@pytest.fixture(scope="session")
def sources(demo_texts: dict[str, str]) -> dict[str, Source]:
    """What the header of every demo sheet says it is from."""
    return {name: Source(sheet_name=f"{name}.bench.toml", digest=digest(text)) for name, text in demo_texts.items()}


@pytest.fixture(scope="session")
def unwinder(demo_texts: dict[str, str]) -> Assessed:
    """The label unwinder with some values changed: ``unwinder({"stage.bus_voltage": "24 V"})``."""
    document = parse_sheet(demo_texts["label-unwinder"], "label-unwinder.bench.toml")

    def changed(values: dict[str, object] | None = None) -> Assessment:
        return assess((document.with_values(values) if values else document).sheet)

    return changed
