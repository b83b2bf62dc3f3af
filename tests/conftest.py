"""What every test stands on: the tree, the demo sheets, outside data where they are, a home of its own."""

from __future__ import annotations

import os
from collections.abc import Iterator
from pathlib import Path

import pytest
from hypothesis import settings

from gainbench.kernels.code_cache import code_cache
from qt_presence import qt_is_missing

TREE = Path(__file__).resolve().parents[1]
OUTSIDE_DATA = TREE.parent / "shared" / "data"

# Kernels that were compiled once are not compiled again for the folders that the tests give themselves.
os.environ.setdefault("NUMBA_CACHE_DIR", str(code_cache("linalg").parents[2]))
# Before anything imports Qt: a window that a test opens must never come up on the screen of the one who runs it.
os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")

# A deadline would be a timed test; the CI machine tries the same examples every time.
settings.register_profile("gainbench", deadline=None, derandomize=os.environ.get("CI", "").lower() == "true")
settings.load_profile("gainbench")


def pytest_addoption(parser: pytest.Parser, pluginmanager: pytest.PytestPluginManager) -> None:
    """Leave the plugin for Qt out where Qt cannot be imported: it would end the whole run while it is configured."""
    if pluginmanager.has_plugin("pytest-qt") and qt_is_missing():
        pluginmanager.unregister(name="pytest-qt")


@pytest.fixture(scope="session")
def qt_trouble() -> str:
    """Why Qt cannot be imported here; empty where it can, and always empty on the CI machine, where it must."""
    return qt_is_missing()


@pytest.fixture(scope="session")
def outside_data() -> Path:
    """The folder of measured data from outside the project, which are cited and not redistributed."""
    if not OUTSIDE_DATA.is_dir():
        pytest.skip("the measured data are not redistributed with the project, and ../shared/data is absent")
    return OUTSIDE_DATA


@pytest.fixture(scope="session", autouse=True)
def users_folders(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Path]:
    """Settings, caches and unsaved sheets of the tests go to a folder of their own, for child processes too."""
    home = tmp_path_factory.mktemp("user")
    with pytest.MonkeyPatch.context() as patch:
        for name in ("XDG_CACHE_HOME", "XDG_CONFIG_HOME", "XDG_DATA_HOME", "XDG_STATE_HOME"):
            folder = home / name.removeprefix("XDG_").lower()
            folder.mkdir()
            patch.setenv(name, str(folder))
        yield home


@pytest.fixture(scope="session")
def demo_texts() -> dict[str, str]:
    """Text of every demo sheet, by its name."""
    from gainbench_resources import demo_sheet, demo_sheet_names

    return {name: demo_sheet(name).read_text(encoding="utf-8") for name in demo_sheet_names()}
