"""Choices made for a file, offered for the next one of the same shape.

A small JSON file in the user's configuration folder (LINEWRIGHT_CONFIG names another): the
shape's fingerprint and the choices. What speaks of one observation only (a velocity
correction, a zero point) is not kept.
"""

from __future__ import annotations

import bz2
import gzip
import hashlib
import json
import os
import re
import zlib
from pathlib import Path

from ..errors import LinewrightError
from .opening import check_regular

KEPT = ("medium", "frame", "hdu", "row", "columns", "unit")
MOST = 200  # shapes kept, the oldest forgotten first
_FILE = "readings.json"
_HEAD = 1 << 20
_SHAPING = re.compile(r"SIMPLE|XTENSION|NAXIS |TFIELDS|TTYPE\d|TUNIT\d|CTYPE1|CUNIT1|EXTNAME"
                      r"|INSTRUME|TELESCOP")


def config_folder() -> Path:
    """LINEWRIGHT_CONFIG, else linewright in the user's configuration folder."""
    named = os.environ.get("LINEWRIGHT_CONFIG")
    if named:
        return Path(named)
    base = os.environ.get("XDG_CONFIG_HOME") or os.environ.get("APPDATA")
    return (Path(base) if base else Path.home() / ".config") / "linewright"


def _head(path) -> bytes:
    """The first megabyte, unpacked; nothing else of the file is read."""
    check_regular(Path(path))
    with open(path, "rb") as handle:
        start = handle.read(3)
    opener = gzip.open if start[:2] == b"\x1f\x8b" else bz2.open if start == b"BZh" else open
    with opener(path, "rb") as handle:
        return handle.read(_HEAD)


def _fits_shape(head: bytes) -> list[str]:
    """Layout keywords of the headers, without sizes of the data or values of a pointing."""
    facts = []
    for at in range(0, len(head), 80):
        card = head[at:at + 80].decode("latin-1")
        if _SHAPING.match(card):
            facts.append(" ".join(card.split("/")[0].split()))
        if len(facts) > 300:
            break
    return facts


def _text_shape(head: bytes) -> list[str]:
    """Comment and header words and the number of columns of the first row."""
    facts = []
    for line in head[:1 << 16].decode("latin-1").splitlines()[:200]:
        if re.match(r"[-+.\d]", line.strip()):
            columns = re.split(r"[\s,;]+", line.strip())
            facts.append(f"{len(columns)} columns")
            break
        facts.append(re.sub(r"[-+\d.:]+", "0", line.strip()))
    return facts


def shape_of(path) -> str:
    """A fingerprint of the file's layout; '' for what cannot be opened (the reader says why)."""
    try:
        head = _head(path)
    except (LinewrightError, OSError, EOFError, ValueError, zlib.error):
        return ""
    facts = ["fits", *_fits_shape(head)] if head[:6] == b"SIMPLE" else _text_shape(head)
    return hashlib.sha256("\n".join(facts).encode("utf-8", "replace")).hexdigest()[:16]


def _load() -> dict:
    try:
        held = json.loads((config_folder() / _FILE).read_text(encoding="utf-8"))
    except (OSError, ValueError):
        return {}
    return held if isinstance(held, dict) else {}


def offer(shape: str) -> dict:
    """The choices kept for this shape; {} where there are none."""
    held = _load().get(shape, {}) if shape else {}
    return {k: v for k, v in held.items() if k in KEPT} if isinstance(held, dict) else {}


def remember(shape: str, choices: dict) -> None:
    """Keep the choices a user made; a folder that cannot be written is no reason to fail."""
    kept = {k: v for k, v in choices.items() if k in KEPT}
    if not shape or not kept or offer(shape) == kept:
        return
    held = {k: v for k, v in _load().items() if k != shape}
    held = dict([*held.items(), (shape, kept)][-MOST:])
    folder = config_folder()
    try:
        folder.mkdir(parents=True, exist_ok=True)
        part = folder / f"{_FILE}.{os.getpid()}.part"
        part.write_text(json.dumps(held, indent=1), encoding="utf-8")
        os.replace(part, folder / _FILE)
    except OSError:
        return
