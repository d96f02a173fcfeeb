"""Why no window opens, said before Qt aborts."""

from __future__ import annotations

import ctypes
import importlib.util
import os
import re
import shutil
import socket
import subprocess
import sys
import tempfile
from collections.abc import Mapping
from pathlib import Path

import pytest

from app import screen_check
from app.screen_check import Probe, screen_trouble

REPOSITORY = Path(__file__).resolve().parent.parent.parent
ON_LINUX = pytest.mark.skipif(not sys.platform.startswith("linux"), reason="only Linux is asked")
COMMANDS = ("smallsquare grid", "smallsquare values", "smallsquare annotate")


def probe(missing: tuple[str, ...] = (), *, x11: bool = True, wayland: bool = True) -> Probe:
    """A machine that lacks some libraries, and whose displays answer or not."""
    return Probe(lambda name: name not in missing, lambda _: x11, lambda _: wayland)


def trouble(environment: Mapping[str, str], machine: Probe | None = None) -> str:
    said = screen_trouble(environment, machine or probe(), "linux")
    # One sentence, for somebody at a terminal.
    assert said == "" or (said.endswith(".") and "\n" not in said and ". " not in said)
    return said


def test_with_a_screen_that_answers_there_is_no_trouble() -> None:
    assert trouble({"DISPLAY": ":0"}) == ""
    assert trouble({"WAYLAND_DISPLAY": "wayland-0"}) == ""


def test_without_a_screen_the_commands_that_need_none_are_named() -> None:
    for environment in ({}, {"DISPLAY": ""}, {"QT_QPA_PLATFORM": "xcb"}):
        said = trouble(environment)
        assert "no screen" in said
        assert all(command in said for command in COMMANDS)


def test_other_systems_are_not_asked() -> None:
    assert screen_trouble({}, probe(("libGL.so.1",)), "darwin") == ""
    assert screen_trouble({}, probe(("libGL.so.1",)), "win32") == ""


@pytest.mark.parametrize("platform", ["offscreen", "minimal", "vnc:size=800x600", "xcb;offscreen"])
def test_qt_told_to_draw_elsewhere_needs_no_screen(platform: str) -> None:
    assert trouble({"QT_QPA_PLATFORM": platform}, probe(x11=False)) == ""
    assert "libegl1" in trouble({"QT_QPA_PLATFORM": platform}, probe(("libEGL.so.1",)))


@pytest.mark.parametrize(
    ("library", "package"),
    [
        ("libxcb-cursor.so.0", "libxcb-cursor0"),
        ("libxcb-icccm.so.4", "libxcb-icccm4"),
        ("libxcb-image.so.0", "libxcb-image0"),
        ("libxcb-keysyms.so.1", "libxcb-keysyms1"),
        ("libxcb-render-util.so.0", "libxcb-render-util0"),
        ("libxkbcommon-x11.so.0", "libxkbcommon-x11-0"),
        ("libEGL.so.1", "libegl1"),
        ("libGL.so.1", "libgl1"),
        ("libglib-2.0.so.0", "libglib2.0-0"),
    ],
)
def test_a_missing_library_is_named_by_its_package(library: str, package: str) -> None:
    said = trouble({"DISPLAY": ":0"}, probe((library,)))
    assert re.search(rf"apt-get install {re.escape(package)}'", said)
    assert all(command in said for command in COMMANDS)


def test_all_missing_libraries_are_named_at_once_each_package_once() -> None:
    missing = ("libxcb-cursor.so.0", "libgthread-2.0.so.0", "libglib-2.0.so.0")
    said = trouble({"DISPLAY": ":0"}, probe(missing))
    assert "apt-get install libglib2.0-0 libxcb-cursor0'" in said


def test_one_kind_of_screen_that_works_is_enough() -> None:
    both = {"DISPLAY": ":0", "WAYLAND_DISPLAY": "wayland-0"}
    assert trouble(both, probe(("libxcb-cursor.so.0",))) == ""
    assert trouble(both, probe(("libwayland-client.so.0",))) == ""
    assert trouble(both, probe(x11=False)) == ""
    assert "libxcb-cursor0" in trouble(
        {**both, "QT_QPA_PLATFORM": "xcb"}, probe(("libxcb-cursor.so.0",))
    )


def test_a_screen_that_does_not_answer_is_named() -> None:
    said = trouble({"DISPLAY": "elsewhere:3"}, probe(x11=False))
    assert "'elsewhere:3'" in said
    assert "does not answer" in said
    assert "'wayland-7'" in trouble({"WAYLAND_DISPLAY": "wayland-7"}, probe(wayland=False))


@ON_LINUX
def test_this_machine_is_asked_where_nothing_else_is_said() -> None:
    assert screen_check._loads("libc.so.6")
    assert not screen_check._loads("libnothing-of-that-name.so.0")


@ON_LINUX
def test_an_unreachable_x_server_does_not_answer() -> None:
    try:
        ctypes.CDLL("libxcb.so.1")
    except OSError:
        pytest.skip("needs libxcb1")
    assert not screen_check._reaches_x11({"DISPLAY": ":64999"})
    assert not screen_check._reaches_x11({"DISPLAY": "no display at all"})


@ON_LINUX
def test_a_wayland_socket_answers_or_not() -> None:
    # The path of a socket must be short, shorter than pytest's own folders.
    with tempfile.TemporaryDirectory() as folder, socket.socket(socket.AF_UNIX) as server:
        server.bind(f"{folder}/wayland-9")
        server.listen()
        environment = {"XDG_RUNTIME_DIR": folder, "WAYLAND_DISPLAY": "wayland-9"}
        assert screen_check._reaches_wayland(environment)
        assert screen_check._reaches_wayland({"WAYLAND_DISPLAY": f"{folder}/wayland-9"})
        assert not screen_check._reaches_wayland({**environment, "WAYLAND_DISPLAY": "wayland-8"})


@ON_LINUX
def test_every_library_that_qts_plug_in_needs_has_its_package() -> None:
    spec = importlib.util.find_spec("PySide6")
    if spec is None or not spec.submodule_search_locations or shutil.which("ldd") is None:
        pytest.skip("needs PySide6 and ldd")
    qt = Path(spec.submodule_search_locations[0]) / "Qt"
    plug_in = qt / "plugins" / "platforms" / "libqxcb.so"
    listed = subprocess.run(
        ["ldd", str(plug_in)], capture_output=True, text=True, timeout=20, check=True
    ).stdout
    needed = set(re.findall(r"^\s*(lib(?:xcb|xkb|X11)[\w-]*\.so\.\d+)", listed, re.MULTILINE))
    known = {*screen_check._FOR_EVERY_KIND, *screen_check._FOR_X11}
    assert len(needed) >= 10
    assert needed <= known


def run_window(**environment: str) -> subprocess.CompletedProcess[str]:
    """`smallsquare` in a fresh interpreter with these screens and no others."""
    screens = ("DISPLAY", "WAYLAND_DISPLAY", "QT_QPA_PLATFORM", "XDG_SESSION_TYPE")
    plain = {name: value for name, value in os.environ.items() if name not in screens}
    return subprocess.run(
        [sys.executable, "-m", "app.command_line", "scan.png"],
        cwd=REPOSITORY,
        env={**plain, **environment},
        capture_output=True,
        text=True,
        timeout=30,
        check=False,
    )


@ON_LINUX
def test_the_program_says_so_where_there_is_no_screen() -> None:
    ended = run_window()
    assert ended.returncode == 2
    assert ended.stdout == ""
    assert ended.stderr.count("\n") == 1
    assert "There is no screen here" in ended.stderr


@ON_LINUX
def test_the_program_says_so_where_the_screen_does_not_answer() -> None:
    ended = run_window(DISPLAY=":64999")
    assert ended.returncode == 2
    assert ended.stderr.count("\n") == 1
    assert "does not answer" in ended.stderr or "apt-get install" in ended.stderr
