"""The session file: JSON, versioned, checked against a schema, saved whole or not at all."""

from __future__ import annotations

import functools
import hashlib
import json
from pathlib import Path

from ..errors import InputRefused
from .atomic import write_atomically
from .decode import session_from
from .encode import FORMAT, VERSION, session_bytes
from .json_text import parse
from .model import Session
from .upgrades import upgraded

_NOT_OURS = "give a session saved by Linewright"


def save_session(session: Session, path, force: bool = False) -> None:
    """Write the session; InputRefused when the file exists (without force) or cannot be."""
    folder = Path(path).absolute().parent
    write_atomically(path, session_bytes(session, folder), force)


def load_session(path) -> Session:
    """Read a session file.

    Raises InputRefused, in one line, for a missing file, broken JSON, another format, a
    newer version, or content that does not fit the schema.
    """
    parts = _parts(path)
    try:
        _validator()(parts)
        return session_from(parts, Path(path).absolute().parent)
    except (ValueError, OverflowError, InputRefused) as problem:
        raise InputRefused(path, f"damaged session: {_brief(problem)}", _NOT_OURS) from None


def is_session(path) -> bool:
    """Whether the file is JSON that names our format (of any version)."""
    try:
        with open(path, "rb") as file:
            if file.read(1) != b"{":
                return False
        return json.loads(Path(path).read_bytes()).get("format") == FORMAT
    except (OSError, ValueError, RecursionError):
        return False


def _parts(path) -> dict:
    try:
        parts = parse(Path(path).read_bytes().decode("utf-8"))
    except OSError as problem:
        raise InputRefused(path, f"cannot be read ({problem.strerror})", _NOT_OURS) from None
    except (ValueError, RecursionError):
        raise InputRefused(path, "not a session (broken or no JSON)", _NOT_OURS) from None
    if not isinstance(parts, dict) or parts.get("format") != FORMAT:
        raise InputRefused(path, "JSON, but not a session", _NOT_OURS)
    return _present(parts, path)


def _present(parts: dict, path) -> dict:
    version = parts.get("version")
    if isinstance(version, bool) or not isinstance(version, int) or version < 1:
        raise InputRefused(path, "the session states no version", _NOT_OURS)
    if version > VERSION:
        raise InputRefused(
            path, f"session version {version} is newer than this program", "update Linewright"
        )
    return upgraded(parts, VERSION)


def _brief(problem: Exception) -> str:
    text = str(problem)
    return text if len(text) <= 160 else text[:157] + "..."


@functools.cache
def _validator():
    import fastjsonschema

    schema = json.loads((Path(__file__).parent / f"schema_v{VERSION}.json").read_text("utf-8"))
    check = fastjsonschema.compile(schema)

    def validate(parts: dict) -> None:
        try:
            check(parts)
        except fastjsonschema.JsonSchemaException as problem:
            raise ValueError(problem.message.removeprefix("data.")) from None

    return validate


def file_sha256(path) -> str:
    """SHA-256 of a file's bytes, lower-case hexadecimal."""
    with open(path, "rb") as file:
        return hashlib.file_digest(file, "sha256").hexdigest()


def locate_spectrum(session: Session, folders=()) -> Path:
    """The spectrum's file, checked by SHA-256: at its path, else by name in ``folders``.

    Raises InputRefused saying whether the file has gone or its content changed.
    """
    stated = Path(session.spectrum.path)
    places = [stated, *(Path(folder) / stated.name for folder in folders)]
    found = [place for place in places if session.spectrum.path and place.is_file()]
    for place in found:
        if file_sha256(place) == session.spectrum.sha256:
            return place
    if found:
        raise InputRefused(
            found[0],
            "changed since the session was made (its SHA-256 differs)",
            "bring the old file back or solve the new one",
        )
    raise InputRefused(
        session.spectrum.path or session.spectrum.name or "spectrum",
        "the session's spectrum is not there any more",
        "put it back, or beside the session",
    )
