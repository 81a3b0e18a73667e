"""Files written whole or not at all."""

from __future__ import annotations

import os
import tempfile
from pathlib import Path

from ..errors import InputRefused


def check_writable(path, force: bool = False) -> Path:
    """``path`` if it may be written; InputRefused when it exists (without force) or cannot be."""
    path = Path(path)
    if path.is_dir():
        raise InputRefused(path, "is a folder", "name a file")
    if not path.parent.is_dir():
        raise InputRefused(path, "its folder does not exist", "make the folder first")
    if path.exists() and not force:
        raise InputRefused(path, "exists already", "use --force to overwrite it")
    return path


def write_atomically(path, data: bytes, force: bool = False) -> None:
    """Write bytes through a temporary file in the same folder; a failure leaves the old file.

    Raises InputRefused when the file exists (without force) or the folder refuses it.
    """
    path = check_writable(path, force)
    try:
        _replace(path, data)
    except OSError as problem:
        cause = problem.strerror or str(problem)
        raise InputRefused(
            path, f"cannot be written ({cause})", "choose another folder or free some space"
        ) from problem


def _replace(path: Path, data: bytes) -> None:
    handle, temporary = tempfile.mkstemp(prefix=f".{path.name}.", suffix=".part", dir=path.parent)
    try:
        with os.fdopen(handle, "wb") as file:
            file.write(data)
            file.flush()
            os.fsync(file.fileno())
        os.chmod(temporary, _mode(path))
        os.replace(temporary, path)
    except BaseException:
        Path(temporary).unlink(missing_ok=True)
        raise


def _mode(path: Path) -> int:
    """The old file's permissions, or what a plain new file would get."""
    try:
        return path.stat().st_mode & 0o777
    except OSError:
        mask = os.umask(0)
        os.umask(mask)
        return 0o666 & ~mask
