"""Pickles in small pieces: a session's claims are thousands of objects, and one pickle of
them would hold the interpreter, and so the window, for a tenth of a second."""

from __future__ import annotations

import pickle
import time
from dataclasses import dataclass, replace

from ..session.model import Session

PIECE = 50  # claims in a pickle: about a millisecond


@dataclass(frozen=True)
class _Place:
    """Stands in a message where a session was; its claims follow in pieces."""

    session: Session
    first: int
    last: int


def packed(message) -> list[bytes]:
    """The message as pickles, the first one holding the whole without the claims."""
    pieces: list[bytes] = []
    bare = _without_claims(message, pieces)
    return [_pickle(bare), *pieces]


def unpacked(parcel: list[bytes]):
    return _with_claims(pickle.loads(parcel[0]), parcel[1:])


def _pickle(thing) -> bytes:
    return pickle.dumps(thing, protocol=pickle.HIGHEST_PROTOCOL)


def _without_claims(part, pieces: list[bytes]):
    if isinstance(part, Session):
        first = len(pieces)
        for k in range(0, len(part.claims), PIECE):
            pieces.append(_pickle(part.claims[k : k + PIECE]))
            time.sleep(0)  # the window's thread comes first
        return _Place(replace(part, claims=()), first, len(pieces))
    if type(part) in (tuple, list):
        return type(part)(_without_claims(p, pieces) for p in part)
    return part


def _with_claims(part, pieces: list[bytes]):
    if isinstance(part, _Place):
        claims: list = []
        for piece in pieces[part.first : part.last]:
            claims.extend(pickle.loads(piece))
            time.sleep(0)
        return replace(part.session, claims=tuple(claims))
    if type(part) in (tuple, list):
        return type(part)(_with_claims(p, pieces) for p in part)
    return part
