"""Figures of the last full runs, kept in calibration.json for the calibration page's drawings."""

from __future__ import annotations

import json
from pathlib import Path

PATH = Path(__file__).with_name("calibration.json")


def kept() -> dict:
    return json.loads(PATH.read_text()) if PATH.exists() else {}


def keep(section: str, data) -> None:
    """Replace one section of the file."""
    whole = {**kept(), section: data}
    PATH.write_text(json.dumps(whole, indent=1, sort_keys=True) + "\n")


def wanted(words: list[str]) -> bool:
    """Takes the word 'keep' out of a command's words; whether it was there."""
    found = "keep" in words
    if found:
        words.remove("keep")
    return found
