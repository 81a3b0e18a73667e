"""Sentences of the engine with the signs of print."""

from __future__ import annotations

import re


def typeset(text: str) -> str:
    """A true minus, ±, σ and Å for what the engine writes with the keys of a keyboard."""
    text = re.sub(r"(?<![\w.-])-(?=\d)", "−", text.replace(" +- ", " ± "))
    return re.sub(r" A(?= away)|\bAngstrom\b", lambda m: " Å" if m[0] == " A" else "Å",
                  text).replace(" sigma", " σ").replace("(0.0%)", "(below 0.1%)")
