"""Whether there is a screen to open a window on, asked before Qt is: Qt would abort."""

from __future__ import annotations

import os
import re
import socket
import sys
from pathlib import Path

_WAIT_S = 2.0
_X_DISPLAY = re.compile(r"(?P<host>[^:]*):(?P<number>\d+)(\.\d+)?")
_X_PORT = 6000
_SCREENLESS = ("offscreen", "minimal", "vnc", "linuxfb", "eglfs")


def has_screen() -> bool:
    """Return whether Qt will find something to draw on.

    On other systems than Linux there always is. A platform that the user chose by
    QT_QPA_PLATFORM is taken at its word when it needs no display server.
    """
    if sys.platform != "linux":
        return True
    chosen = os.environ.get("QT_QPA_PLATFORM", "")
    if chosen.split(":")[0] in _SCREENLESS:
        return True
    return _x_answers(os.environ.get("DISPLAY", "")) or _wayland_answers(
        os.environ.get("WAYLAND_DISPLAY", "")
    )


def _x_answers(display: str) -> bool:
    """Return whether an X server listens where DISPLAY points."""
    parts = _X_DISPLAY.fullmatch(display)
    if parts is None:
        return False
    host, number = parts["host"], int(parts["number"])
    if host in ("", "unix"):
        path = f"/tmp/.X11-unix/X{number}"  # where every X server puts its socket
        return _listens(path) or _listens(f"\0{path}")
    try:
        with socket.create_connection((host, _X_PORT + number), _WAIT_S):
            return True
    except OSError:
        return False


def _wayland_answers(display: str) -> bool:
    """Return whether a Wayland compositor listens where WAYLAND_DISPLAY points."""
    if not display:
        return False
    path = Path(os.environ.get("XDG_RUNTIME_DIR", "/run")) / display
    return _listens(str(path))


def _listens(address: str) -> bool:
    with socket.socket(socket.AF_UNIX, socket.SOCK_STREAM) as line:
        line.settimeout(_WAIT_S)
        try:
            line.connect(address)
        except OSError:
            return False
    return True
