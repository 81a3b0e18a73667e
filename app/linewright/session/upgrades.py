"""Session files of older versions, lifted one version at a time.

``UPGRADES[n]`` turns the parsed file of version n into one of version n + 1. There is no
version before 1. Version 2 brought the fits by hand, the continuum anchors and every
temperature that was read.
"""

from __future__ import annotations

from collections.abc import Callable

UPGRADES: dict[int, Callable[[dict], dict]] = {
    1: lambda parts: {"temperatures": [], **parts, "anchors": [], "fits": []},
}


def upgraded(parts: dict, version: int, upgrades: dict | None = None) -> dict:
    """``parts`` lifted to ``version``; KeyError where a step is missing."""
    steps = UPGRADES if upgrades is None else upgrades
    while parts["version"] < version:
        start = parts["version"]
        parts = {**steps[start](parts), "version": start + 1}
    return parts
