"""Edits by name with plain arguments: scripts of JSON lines, and replay of a history."""

from __future__ import annotations

import json
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from pathlib import Path

from ..errors import InputRefused
from . import edits, feature_edits, fit_edits
from .model import Session
from .plain import candidate_from, claim_from, contributors_from, row_from


@dataclass(frozen=True)
class EditKind:
    """An edit's function and its arguments: name -> reader of plain data.

    ``optional`` arguments may be left out.
    """

    function: Callable[..., Session]
    arguments: dict
    optional: tuple[str, ...] = ()


def _integer(value) -> int:
    if isinstance(value, bool) or not isinstance(value, int):
        raise TypeError("a whole number")
    return value


def _number(value) -> float:
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        raise TypeError("a number")
    return float(value)


def _text(value) -> str:
    if not isinstance(value, str):
        raise TypeError("text")
    return value


def _truth(value) -> bool:
    if not isinstance(value, bool):
        raise TypeError("true or false")
    return value


def _mapping(value) -> dict:
    if not isinstance(value, dict):
        raise TypeError("an object with named fields")
    return value


def _features(value) -> tuple[int, ...]:
    if not isinstance(value, (list, tuple)):
        raise TypeError("a list of feature numbers")
    return tuple(_integer(item) for item in value)


def _pairs(value) -> list:
    if not isinstance(value, (list, tuple)):
        raise TypeError("a list of [wavelength, flux]")
    return list(value)


_FEATURE = {"feature": _integer}

EDITS: dict[str, EditKind] = {
    "accept_candidate": EditKind(edits.accept_candidate, {**_FEATURE, "rank": _integer}),
    "set_species": EditKind(
        edits.set_species, {**_FEATURE, "species": _text, "line": candidate_from}, ("line",)
    ),
    "mark_blend": EditKind(edits.mark_blend, {**_FEATURE, "contributors": contributors_from}),
    "set_aside": EditKind(edits.set_aside, {**_FEATURE, "reason": _text}),
    "restore": EditKind(edits.restore, _FEATURE),
    "set_standing": EditKind(edits.set_standing, {**_FEATURE, "standing": _text}),
    "set_note": EditKind(edits.set_note, {**_FEATURE, "note": _text}),
    "lock": EditKind(edits.lock, {**_FEATURE, "locked": _truth}),
    "set_velocity": EditKind(edits.set_velocity, {"km_s": _number}),
    "add_feature": EditKind(
        feature_edits.add_feature, {"row": row_from, "claim": claim_from}, ("claim",)
    ),
    "remove_feature": EditKind(feature_edits.remove_feature, _FEATURE),
    "replace_feature": EditKind(feature_edits.replace_feature, {**_FEATURE, "row": row_from}),
    "fit_features": EditKind(
        fit_edits.fit_features, {"features": _features, "fit": _mapping}),
    "split_feature": EditKind(
        fit_edits.split_feature, {**_FEATURE, "parts": _integer, "fit": _mapping}),
    "merge_features": EditKind(
        fit_edits.merge_features, {"features": _features, "fit": _mapping}),
    "set_anchors": EditKind(
        fit_edits.set_anchors,
        {"segment": _integer, "anchors": _pairs, "level": _mapping}),
}


def apply_edit(session: Session, command: dict) -> Session:
    """Apply one edit written as data: {"edit": "set_aside", "feature": 12, "reason": "..."}.

    Raises InputRefused for an unknown edit, missing, unknown or unfit arguments.
    """
    if not isinstance(command, dict) or not isinstance(command.get("edit"), str):
        raise InputRefused("edit", "no edit named", 'give {"edit": NAME, ...}')
    name = command["edit"]
    if name not in EDITS:
        raise InputRefused(f"edit '{name}'", "no such edit", f"use {', '.join(sorted(EDITS))}")
    kind = EDITS[name]
    # what a history entry keeps for `restore` is no argument
    given = {key: value for key, value in command.items() if key not in ("edit", "machine")}
    _check_names(name, kind, given)
    return kind.function(session, *_read(name, kind, given))


def _check_names(name: str, kind: EditKind, given: dict) -> None:
    needed = set(kind.arguments) - set(kind.optional)
    usage = f"arguments are {', '.join(kind.arguments)}"
    for missing in sorted(needed - set(given)):
        raise InputRefused(f"edit '{name}'", f"'{missing}' is missing", usage)
    for unknown in sorted(set(given) - set(kind.arguments)):
        raise InputRefused(f"edit '{name}'", f"'{unknown}' is not an argument", usage)


def _read(name: str, kind: EditKind, given: dict) -> list:
    values = []
    for argument, reader in kind.arguments.items():
        try:
            values.append(reader(given[argument]) if argument in given else None)
        except TypeError as wrong:
            raise InputRefused(
                f"edit '{name}'", f"'{argument}' is {given[argument]!r}", f"give {wrong}"
            ) from None
    return values


def read_script(path) -> list[dict]:
    """The edits of a file of JSON lines; blank lines and lines beginning with # are skipped.

    Each gets its line number under the key 'at'. Raises InputRefused.
    """
    try:
        text = Path(path).read_text(encoding="utf-8")
    except (OSError, UnicodeDecodeError) as problem:
        cause = getattr(problem, "strerror", None) or "not UTF-8 text"
        raise InputRefused(path, f"cannot be read ({cause})", "name a file of JSON lines") from None
    commands = []
    for at, line in enumerate(text.splitlines(), start=1):
        if line.strip() and not line.lstrip().startswith("#"):
            commands.append({**_parsed(line, f"{path}: line {at}"), "at": at})
    return commands


def _parsed(line: str, what: str) -> dict:
    try:
        command = json.loads(line)
    except ValueError:
        raise InputRefused(what, "not JSON", 'write one {"edit": NAME, ...} a line') from None
    if not isinstance(command, dict):
        raise InputRefused(what, "not an edit", 'write one {"edit": NAME, ...} a line')
    return command


def apply_script(
    session: Session, commands: Iterable[dict], what: str = "script", completed=None
) -> Session:
    """All edits in order, or none: InputRefused names the line of the first that fails.

    completed: makes of (session, command) the command with what must be measured on the
    spectrum; left out, commands must state it.
    """
    for count, command in enumerate(commands, start=1):
        at = command.get("at", count)
        command = {k: v for k, v in command.items() if k != "at"}
        try:
            if completed is not None:
                command = completed(session, command)
            session = apply_edit(session, command)
        except InputRefused as refusal:
            cause = f"{refusal.what}: {refusal.cause}"
            raise InputRefused(f"{what}: line {at}", cause, refusal.cure) from None
    return session


def history_commands(session: Session) -> list[dict]:
    """The person's acts so far as edits that could be applied again."""
    return [
        {"edit": entry.action, **entry.detail} for entry in session.history if entry.action in EDITS
    ]
