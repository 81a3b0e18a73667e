"""Chemical symbols and stage numerals, from the library's own table."""

from __future__ import annotations

import common  # noqa: F401  (puts the library on the path)

from linewright.lines.species import ELEMENTS, ROMAN

__all__ = ["ELEMENTS", "ROMAN"]
