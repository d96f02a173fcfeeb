"""Can a window be opened here? Asked before Qt is loaded, because Qt aborts where it cannot.

Only Linux is looked at: elsewhere a desktop is part of the system.
"""

from __future__ import annotations

import ctypes
import logging
import os
import socket
import sys
from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from pathlib import Path

_log = logging.getLogger(__name__)

_WITHOUT = (
    "the commands 'smallsquare grid', 'smallsquare values' and 'smallsquare annotate' work "
    "without one"
)

# What Qt's Gui, Widgets and the plug-in of each kind of screen need from the system, with the
# Debian 12 package of each (computed: NEEDED entries of PySide6-Essentials 6.11, dpkg -S).
_FOR_EVERY_KIND = {
    "libEGL.so.1": "libegl1",
    "libGL.so.1": "libgl1",
    "libdbus-1.so.3": "libdbus-1-3",
    "libfontconfig.so.1": "libfontconfig1",
    "libfreetype.so.6": "libfreetype6",
    "libglib-2.0.so.0": "libglib2.0-0",
    "libgthread-2.0.so.0": "libglib2.0-0",
    "libxkbcommon.so.0": "libxkbcommon0",
    "libz.so.1": "zlib1g",
    "libzstd.so.1": "libzstd1",
}
_FOR_X11 = {
    "libX11.so.6": "libx11-6",
    "libX11-xcb.so.1": "libx11-xcb1",
    "libxcb.so.1": "libxcb1",
    "libxcb-cursor.so.0": "libxcb-cursor0",
    "libxcb-icccm.so.4": "libxcb-icccm4",
    "libxcb-image.so.0": "libxcb-image0",
    "libxcb-keysyms.so.1": "libxcb-keysyms1",
    "libxcb-randr.so.0": "libxcb-randr0",
    "libxcb-render-util.so.0": "libxcb-render-util0",
    "libxcb-render.so.0": "libxcb-render0",
    "libxcb-shape.so.0": "libxcb-shape0",
    "libxcb-shm.so.0": "libxcb-shm0",
    "libxcb-sync.so.1": "libxcb-sync1",
    "libxcb-util.so.1": "libxcb-util1",
    "libxcb-xfixes.so.0": "libxcb-xfixes0",
    "libxcb-xkb.so.1": "libxcb-xkb1",
    "libxkbcommon-x11.so.0": "libxkbcommon-x11-0",
}
_FOR_WAYLAND = {
    "libwayland-client.so.0": "libwayland-client0",
    "libwayland-cursor.so.0": "libwayland-cursor0",
    "libwayland-egl.so.1": "libwayland-egl1",
}


@dataclass(frozen=True, slots=True)
class Probe:
    """How the machine is asked; tests give answers of their own.

    Attributes
    ----------
    loads : callable
        Whether a system library of that name can be loaded.
    reaches_x11, reaches_wayland : callable
        Whether the display that an environment names answers.
    """

    loads: Callable[[str], bool]
    reaches_x11: Callable[[Mapping[str, str]], bool]
    reaches_wayland: Callable[[Mapping[str, str]], bool]


@dataclass(frozen=True, slots=True)
class _Kind:
    """One kind of screen: Qt's name, the variable that names the screen, what it needs."""

    qt_name: str
    variable: str
    libraries: Mapping[str, str]


_KINDS = (
    _Kind("xcb", "DISPLAY", _FOR_X11),
    _Kind("wayland", "WAYLAND_DISPLAY", _FOR_WAYLAND),
)


def screen_trouble(
    environment: Mapping[str, str] = os.environ,
    probe: Probe | None = None,
    platform: str = sys.platform,
) -> str:
    """Why no window can be opened here, in one sentence; empty where one can.

    Parameters
    ----------
    environment : mapping
        As Qt reads it: DISPLAY, WAYLAND_DISPLAY, QT_QPA_PLATFORM.
    probe : Probe or None
        None: this machine is asked.
    platform : str
        As `sys.platform`.
    """
    if not platform.startswith("linux"):
        return ""
    probe = probe or Probe(_loads, _reaches_x11, _reaches_wayland)
    asked_for = [
        name.partition(":")[0].partition("-")[0]
        for name in environment.get("QT_QPA_PLATFORM", "").split(";")
        if name
    ]
    known = {kind.qt_name for kind in _KINDS}
    if any(name not in known for name in asked_for):
        # Drawing into memory, a browser or the bare screen: only the common libraries count.
        return _missing_sentence(_FOR_EVERY_KIND, probe)
    kinds = [
        kind
        for kind in _KINDS
        if environment.get(kind.variable) and (not asked_for or kind.qt_name in asked_for)
    ]
    if not kinds:
        return f"There is no screen here, so no window can be opened; {_WITHOUT}."
    troubles = [_trouble_with(kind, environment, probe) for kind in kinds]
    return "" if "" in troubles else troubles[0]


def _trouble_with(kind: _Kind, environment: Mapping[str, str], probe: Probe) -> str:
    missing = _missing_sentence({**_FOR_EVERY_KIND, **kind.libraries}, probe)
    if missing:
        return missing
    reaches = probe.reaches_x11 if kind.qt_name == "xcb" else probe.reaches_wayland
    if reaches(environment):
        return ""
    return (
        f"The screen {environment[kind.variable]!r} that {kind.variable} names does not answer: "
        f"check that it is on and that you may use it; {_WITHOUT}."
    )


def _missing_sentence(libraries: Mapping[str, str], probe: Probe) -> str:
    packages = _packages(name for name in libraries if not probe.loads(name))
    if not packages:
        return ""
    return (
        "The window needs system libraries that are not installed: on Debian or Ubuntu run "
        f"'apt-get install {' '.join(packages)}'; {_WITHOUT}."
    )


def _packages(missing: Iterable[str]) -> list[str]:
    names = {**_FOR_EVERY_KIND, **_FOR_X11, **_FOR_WAYLAND}
    return sorted({names[library] for library in missing})


def _loads(library: str) -> bool:
    try:
        ctypes.CDLL(library)
    except OSError as error:
        _log.info("%s", error)
        return False
    return True


def _reaches_x11(environment: Mapping[str, str]) -> bool:
    """Connect once, the way Qt will: same library, same rights."""
    xcb = ctypes.CDLL("libxcb.so.1")
    xcb.xcb_connect.restype = ctypes.c_void_p
    xcb.xcb_connect.argtypes = [ctypes.c_char_p, ctypes.c_void_p]
    xcb.xcb_connection_has_error.argtypes = [ctypes.c_void_p]
    xcb.xcb_disconnect.argtypes = [ctypes.c_void_p]
    connection = xcb.xcb_connect(os.fsencode(environment["DISPLAY"]), None)
    try:
        return int(xcb.xcb_connection_has_error(connection)) == 0
    finally:
        xcb.xcb_disconnect(connection)


def _reaches_wayland(environment: Mapping[str, str]) -> bool:
    # A name with a slash at its beginning stands for itself (Path keeps it).
    path = Path(environment.get("XDG_RUNTIME_DIR", "")) / environment["WAYLAND_DISPLAY"]
    with socket.socket(socket.AF_UNIX, socket.SOCK_STREAM) as connection:
        try:
            connection.connect(str(path))
        except OSError as error:
            _log.info("%s: %s", path, error)
            return False
    return True
