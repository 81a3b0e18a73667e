"""Opening a file safely: what it is, its bytes, its checksum; every failure in one line."""

from __future__ import annotations

import bz2
import gzip
import hashlib
import io
import os
import stat
import threading
import zlib
from dataclasses import dataclass
from pathlib import Path

from ..errors import InputRefused

DECODED_CAP = 2 * 1024**3  # bytes; larger decoded files are refused, not read
TEXT_CAP = 128 * 1024**2  # bytes of text, which is read line by line
BOMB_BYTES, BOMB_RATIO = 256 * 1024**2, 200  # unpacking further than this is refused
_CHUNK = 1 << 20
_APART = 1 << 24  # bytes from which the checksum is computed beside the reading


class Checksum:
    """SHA-256 of a file; of a long one it is computed beside the reading."""

    def __init__(self, path: Path, apart: bool):
        self._path, self._hex, self._problem = path, "", None
        self._thread = threading.Thread(target=self._run, daemon=True) if apart else None
        if self._thread:
            self._thread.start()
        else:
            self._run()
            self.hex()

    def _run(self) -> None:
        digest = hashlib.sha256()
        try:
            with open(self._path, "rb") as handle:
                while chunk := handle.read(_CHUNK):
                    digest.update(chunk)
        except OSError as problem:
            self._problem = problem
        self._hex = digest.hexdigest()

    def hex(self) -> str:
        """The digest, when it is done. Raises OSError when the file could not be read."""
        if self._thread:
            self._thread.join()
        if self._problem is not None:
            raise self._problem
        return self._hex


@dataclass(frozen=True)
class Opened:
    """A regular file found readable: kind is 'fits', 'votable' or 'text'.

    data: the decoded bytes when the file was compressed (else None: read ``path``)
    """

    path: Path
    kind: str
    checksum: Checksum
    size: int
    stamp: tuple[int, int]
    data: bytes | None = None
    packing: str = ""

    def stream(self):
        """A binary stream of the decoded content; the caller closes it."""
        return open(self.path, "rb") if self.data is None else io.BytesIO(self.data)


def _stamp(path: Path) -> tuple[int, int]:
    status = os.stat(path)
    return status.st_size, status.st_mtime_ns


def check_regular(path: Path) -> None:
    """Raises InputRefused for what is no regular file of sensible size."""
    status = os.stat(path)
    if stat.S_ISDIR(status.st_mode):
        raise InputRefused(path, "is a folder, not a spectrum", "name a file in it")
    if not stat.S_ISREG(status.st_mode):
        raise InputRefused(path, "is not a regular file", "copy the spectrum to a file first")
    if status.st_size == 0:
        raise InputRefused(path, "is empty", "fetch or write the file again")
    if status.st_size > DECODED_CAP:
        raise InputRefused(path, "is larger than 2 GiB", "cut out the range you need")


def _head_and_sum(path: Path) -> tuple[bytes, Checksum]:
    with open(path, "rb") as handle:
        head = handle.read(_CHUNK)
    return head, Checksum(path, os.stat(path).st_size > _APART)


def _decoded(path: Path, head: bytes) -> tuple[bytes | None, str]:
    if head[:2] == b"\x1f\x8b":
        opener, packing = gzip.open, "gzip"
    elif head[:3] == b"BZh":
        opener, packing = bz2.open, "bzip2"
    else:
        return None, ""
    parts, total, limit = [], 0, max(BOMB_BYTES, BOMB_RATIO * os.stat(path).st_size)
    limit = min(limit, DECODED_CAP)
    try:
        with opener(path, "rb") as handle:
            while chunk := handle.read(_CHUNK):
                if not parts and _kind(chunk, path) != "fits":
                    limit = min(limit, TEXT_CAP)
                total += len(chunk)
                if total > limit:
                    raise InputRefused(
                        path, f"unpacks to more than {limit >> 20} MiB ({packing})",
                        "unpack it and cut out the range you need")
                parts.append(chunk)
    except (EOFError, OSError, zlib.error, ValueError) as problem:
        raise InputRefused(path, f"damaged {packing} data ({problem})",
                           "fetch the file again") from None
    return b"".join(parts), packing


def _kind(head: bytes, path: Path) -> str:
    start = head[:4096].lstrip(b"\xef\xbb\xbf \t\r\n")
    if head[:6] == b"SIMPLE":
        return "fits"
    if head[:8] == b"XTENSION":
        raise InputRefused(path, "starts in the middle of a FITS file (no primary header)",
                           "fetch the file again")
    if start[:5].lower() == b"<?xml" or start[:8].upper() == b"<VOTABLE":
        if b"VOTABLE" in head[:65536].upper():
            return "votable"
        raise InputRefused(path, "is XML but no VOTable", "save the spectrum as FITS or text")
    if b"\x00" in head[:65536]:
        raise InputRefused(path, "is binary but not FITS", "save the spectrum as FITS or text")
    return "text"


def open_checked(path) -> Opened:
    """Look at ``path`` without trusting it.

    Raises InputRefused for anything that is no readable regular file of a known kind.
    """
    path = Path(path)
    try:
        check_regular(path)
        stamp = _stamp(path)
        head, checksum = _head_and_sum(path)
    except FileNotFoundError:
        raise InputRefused(path, "no such file", "check the name") from None
    except PermissionError:
        raise InputRefused(path, "permission denied", "make the file readable") from None
    except (OSError, ValueError) as problem:
        text = getattr(problem, "strerror", None) or str(problem)
        raise InputRefused(path, f"cannot be opened ({text})", "check the path") from None
    data, packing = _decoded(path, head)
    if data is not None:
        if not data:
            raise InputRefused(path, f"holds nothing ({packing})", "fetch the file again")
        head = data[:_CHUNK]
    size = stamp[0] if data is None else len(data)
    kind = _kind(head, path)
    if kind != "fits" and size > TEXT_CAP:
        raise InputRefused(path, f"is text of more than {TEXT_CAP >> 20} MiB",
                           "save it as a FITS table, or cut out the range you need")
    return Opened(path, kind, checksum, size, stamp, data, packing)


def check_fits_header(opened: Opened) -> None:
    """Raises InputRefused when the first FITS header never ends or nothing follows it."""
    with opened.stream() as handle:
        while block := handle.read(2880):
            cards = [block[i:i + 80] for i in range(0, len(block), 80)]
            if any(card.rstrip() == b"END" for card in cards):
                return
    raise InputRefused(opened.path, "is a FITS header without data (it never ends)",
                       "give the file with its data")


def check_unchanged(opened: Opened) -> None:
    """Raises InputRefused when the file was written to while it was read."""
    try:
        same = _stamp(opened.path) == opened.stamp
    except OSError:
        same = False
    if not same:
        raise InputRefused(opened.path, "changed while it was read", "read it again when complete")
