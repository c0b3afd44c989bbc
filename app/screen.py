"""Whether a window can be opened at all: asked before Qt, which would end the process instead."""

import ctypes
import os
import sys
from importlib.util import find_spec
from pathlib import Path

NEEDS_NO_SCREEN = {"offscreen", "minimal", "vnc"}


def why_no_screen() -> str | None:
    """Why no window can be opened here, in a few words, or None where one can.

    Where only one of the two Linux display systems answers, Qt is told to use that one.
    """
    if not sys.platform.startswith("linux"):
        return None
    chosen = os.environ.get("QT_QPA_PLATFORM", "")
    if chosen:
        return _why_not_chosen(chosen)
    wayland = _why_no_wayland()
    if wayland is None:
        return None
    x = _why_no_x()
    if x is None:
        os.environ["QT_QPA_PLATFORM"] = "xcb"
        return None
    if os.environ.get("DISPLAY"):
        return x
    if os.environ.get("WAYLAND_DISPLAY"):
        return wayland
    return "neither DISPLAY nor WAYLAND_DISPLAY is set"


def _why_not_chosen(chosen: str) -> str | None:
    """Qt tries the names parted by ; one after the other; options follow a colon."""
    reasons = []
    for entry in chosen.split(";"):
        name = entry.partition(":")[0]
        why = _why_not_plugin(name)
        if why is None and name == "xcb":
            why = _why_no_x()
        if why is None and name.startswith("wayland"):
            why = _why_no_wayland()
        if why is None and name not in NEEDS_NO_SCREEN and name not in ("xcb", "wayland"):
            why = f"QT_QPA_PLATFORM={name} draws no desktop windows"
        if why is None:
            os.environ["QT_QPA_PLATFORM"] = entry
            return None
        reasons.append(why)
    return "; ".join(reasons)


def _why_not_plugin(name: str) -> str | None:
    """Loads the platform plugin, which fails where a system library is missing."""
    spec = find_spec("PySide6")
    if spec is None or not spec.submodule_search_locations:
        return "PySide6 is not installed"
    folder = Path(next(iter(spec.submodule_search_locations)))
    plugin = folder / "Qt" / "plugins" / "platforms" / f"libq{name}.so"
    if not plugin.parent.is_dir():  # a system-wide Qt keeps its plugins elsewhere
        return None
    if not plugin.is_file():
        return f"QT_QPA_PLATFORM={name} is not known"
    try:
        ctypes.CDLL(str(plugin))
    except OSError as fault:
        return f"a system library is missing: {fault}"
    return None


def _why_no_x() -> str | None:
    display = os.environ.get("DISPLAY", "")
    if not display:
        return "DISPLAY is not set"
    try:
        xcb = ctypes.CDLL("libxcb.so.1")
    except OSError as fault:
        return f"a system library is missing: {fault}"
    xcb.xcb_connect.restype = ctypes.c_void_p
    xcb.xcb_connect.argtypes = [ctypes.c_char_p, ctypes.c_void_p]
    xcb.xcb_connection_has_error.argtypes = [ctypes.c_void_p]
    xcb.xcb_disconnect.argtypes = [ctypes.c_void_p]
    connection = xcb.xcb_connect(None, None)
    failed = xcb.xcb_connection_has_error(connection)
    xcb.xcb_disconnect(connection)
    return f"the display {display} cannot be reached" if failed else _why_not_plugin("xcb")


def _why_no_wayland() -> str | None:
    name = os.environ.get("WAYLAND_DISPLAY", "")
    if not name:
        return "WAYLAND_DISPLAY is not set"
    import socket  # needed on this one desktop only

    path = Path(os.environ.get("XDG_RUNTIME_DIR", "/nonexistent")) / name
    with socket.socket(socket.AF_UNIX, socket.SOCK_STREAM) as line:
        line.settimeout(2)
        try:
            line.connect(str(path))
        except OSError:
            return f"the display {name} cannot be reached"
    return _why_not_plugin("wayland")
