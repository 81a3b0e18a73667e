"""Full citations and BibTeX entries of the catalogue's bibliographic keys."""

from __future__ import annotations

import json
from collections.abc import Iterable
from functools import lru_cache

from ..resources import tables_dir


@lru_cache(maxsize=1)
def _entries() -> dict[str, dict[str, str]]:
    return json.loads((tables_dir() / "citations.json").read_text(encoding="utf-8"))


def citation(key: str) -> str:
    """Full citation of a key; the key itself for a user's own source."""
    return _entries().get(key, {}).get("citation", key)


def bibtex(keys: Iterable[str]) -> str:
    """BibTeX entries of the keys that have one, sorted, separated by blank lines."""
    known = _entries()
    return "\n\n".join(known[key]["bibtex"] for key in sorted(set(keys)) if key in known)
