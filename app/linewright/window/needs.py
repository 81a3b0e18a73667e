"""What Qt needs from the system, looked for before Qt is imported."""

from __future__ import annotations

import os
import sys
from collections.abc import Callable, Mapping

ALWAYS = {
    "libEGL.so.1": "libegl1",
    "libGL.so.1": "libgl1",
    "libgthread-2.0.so.0": "libglib2.0-0",
    "libxkbcommon.so.0": "libxkbcommon0",
    "libfontconfig.so.1": "libfontconfig1",
    "libdbus-1.so.3": "libdbus-1-3",
}
FOR_X11 = {
    "libxkbcommon-x11.so.0": "libxkbcommon-x11-0",
    "libxcb-cursor.so.0": "libxcb-cursor0",
    "libxcb-icccm.so.4": "libxcb-icccm4",
    "libxcb-keysyms.so.1": "libxcb-keysyms1",
    "libxcb-shape.so.0": "libxcb-shape0",
}


def uses_x11(environment: Mapping[str, str]) -> bool:
    platform = environment.get("QT_QPA_PLATFORM", "")
    if platform:
        return platform.startswith("xcb")
    return not environment.get("WAYLAND_DISPLAY")


def missing_packages(
    environment: Mapping[str, str], load: Callable[[str], object] | None = None
) -> list[str]:
    """Names of the system packages that are not installed, in the order they are listed."""
    if load is None:
        from ctypes import CDLL as load
    wanted = dict(ALWAYS)
    if uses_x11(environment):
        wanted.update(FOR_X11)
    return [package for library, package in wanted.items() if not _loads(library, load)]


def _loads(library: str, load: Callable[[str], object]) -> bool:
    try:
        load(library)
    except OSError:
        return False
    return True


def complaint(
    environment: Mapping[str, str] | None = None,
    load: Callable[[str], object] | None = None,
) -> str:
    """One line saying what keeps the window from opening; empty when nothing does."""
    if not sys.platform.startswith("linux"):
        return ""
    environment = os.environ if environment is None else environment
    missing = missing_packages(environment, load)
    if missing:
        names = " ".join(missing)
        return f"the window needs system packages: apt-get install -y {names}"
    if uses_x11(environment) and not environment.get("DISPLAY"):
        return "no display: use xvfb-run -a, or QT_QPA_PLATFORM=offscreen"
    return ""
