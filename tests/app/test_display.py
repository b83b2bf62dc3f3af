"""Why no window can be opened, and what to install; found out without opening one."""

from __future__ import annotations

import socket
import sys

import pytest

from gainbench_app import display

linux = pytest.mark.skipif(not sys.platform.startswith("linux"), reason="displays are told by their variables on Linux")


@pytest.fixture
def nowhere(monkeypatch):
    for name in ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM", "XDG_RUNTIME_DIR"):
        monkeypatch.delenv(name, raising=False)
    return monkeypatch


@linux
def test_no_display_is_said(nowhere):
    assert display.trouble().startswith("there is no display")


@linux
@pytest.mark.parametrize("name", [":4242", "unix:4242", "localhost:4242", "nonsense", "host:99999", ":0x"])
def test_a_display_that_does_not_answer_is_said(nowhere, name):
    nowhere.setenv("DISPLAY", name)
    assert display.trouble() == f"no display answers at DISPLAY={name}"


@linux
def test_a_display_that_answers_is_found(nowhere, monkeypatch):
    # A server of X listens on port 6000 and the display's number.
    with socket.create_server(("127.0.0.1", 0)) as server:
        monkeypatch.setattr(display, "_FIRST_PORT", server.getsockname()[1])
        nowhere.setenv("DISPLAY", "127.0.0.1:0.0")
        assert display._no_display({"DISPLAY": "127.0.0.1:0.0"}) == ("", True)


@linux
def test_a_wayland_socket_is_a_display(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    with socket.socket(socket.AF_UNIX) as server:
        server.bind("wayland-7")
        environment = {"WAYLAND_DISPLAY": "wayland-7", "XDG_RUNTIME_DIR": "."}
        assert display._no_display(environment) == ("", False)
    (tmp_path / "wayland-8").touch()
    assert display._no_display({**environment, "WAYLAND_DISPLAY": "wayland-8"})[0]


@pytest.mark.parametrize(("library", "package"), [*display.PACKAGES.items(), *display.X_PACKAGES.items()])
def test_a_missing_library_names_its_package(monkeypatch, library, package):
    monkeypatch.setattr(display, "_loads", lambda _: True)
    message = f"{library}: cannot open shared object file: No such file or directory"
    assert display.missing_library(message) == (
        f"Qt needs system libraries that are not here ({library}); on Debian: apt install {package}"
    )


def test_all_that_is_missing_is_named_at_once(monkeypatch):
    monkeypatch.setattr(display, "_loads", lambda _: False)
    text = display.missing_library("libEGL.so.1: cannot open shared object file: No such file or directory")
    for package in display.PACKAGES.values():
        assert package in text
    assert text.count("libglib2.0-0") == 1


def test_other_trouble_is_told_as_it_is():
    assert display.missing_library("libodd.so.3: cannot open shared object file: gone").startswith(
        "Qt cannot be loaded"
    )
    assert display.missing_library("undefined symbol: x") == "Qt cannot be loaded: undefined symbol: x"


@pytest.mark.parametrize(
    ("error", "says"),
    [
        (ModuleNotFoundError("No module named 'PySide6'", name="PySide6"), "PySide6 is not installed"),
        (ImportError("libGL.so.1: cannot open shared object file: No such file"), "apt install libgl1"),
    ],
)
def test_what_keeps_qt_from_being_imported_is_said(monkeypatch, error, says):
    def fails(_):
        raise error

    monkeypatch.setenv("QT_QPA_PLATFORM", "offscreen")
    monkeypatch.setattr(display, "import_module", fails)
    assert says in display.trouble()


@linux
def test_missing_libraries_of_x_are_said_before_qt_ends_the_process(nowhere, monkeypatch):
    monkeypatch.setattr(display, "_answers", lambda _: True)
    monkeypatch.setattr(display, "import_module", lambda _: None)
    monkeypatch.setattr(display, "_loads", lambda name: name != "libxcb-cursor.so.0")
    nowhere.setenv("DISPLAY", ":0")
    assert display.trouble().endswith("apt install libxcb-cursor0")


def test_offscreen_needs_no_display(nowhere, qt_trouble):
    if qt_trouble:
        pytest.skip(qt_trouble)
    nowhere.setenv("QT_QPA_PLATFORM", "offscreen")
    assert display.trouble() == ""
