"""What the commands share: a parser of one-line errors, and readers of option values."""

from __future__ import annotations

import argparse
import re
import sys

_NEGATIVE = re.compile(r"-[\d.]")


class Parser(argparse.ArgumentParser):
    """Wrong usage gives one line on standard error and exit status 2."""

    def __init__(self, **options):
        options.setdefault("formatter_class", argparse.RawDescriptionHelpFormatter)
        super().__init__(allow_abbrev=False, **options)

    def error(self, message: str):
        self.exit(2, f"{self.prog}: {message}; see {self.prog} --help\n")


def joined_negatives(arguments: list[str]) -> list[str]:
    """``--velocity-range -500:500`` as one word, so that the value is not taken for an option."""
    joined: list[str] = []
    for word in arguments:
        before = joined[-1] if joined else ""
        if _NEGATIVE.match(word) and before.startswith("--") and "=" not in before:
            joined[-1] = f"{before}={word}"
        else:
            joined.append(word)
    return joined


def number(text: str) -> float:
    """A finite number."""
    try:
        value = float(text)
    except ValueError:
        value = float("nan")
    if not abs(value) < float("inf"):
        raise argparse.ArgumentTypeError(f"'{text}' is not a number")
    return value


def positive(text: str) -> float:
    """A number above zero."""
    value = number(text)
    if value <= 0:
        raise argparse.ArgumentTypeError(f"'{text}' is not above zero")
    return value


def not_negative(text: str) -> float:
    """A number from zero on."""
    value = number(text)
    if value < 0:
        raise argparse.ArgumentTypeError(f"'{text}' is below zero")
    return value


def or_auto(reader):
    """Reads 'auto' as None, everything else by ``reader``."""

    def read(text: str):
        return None if text == "auto" else reader(text)

    return read


def span(text: str) -> tuple[float, float]:
    """'LO:HI' as two numbers, the first below the second."""
    low, colon, high = text.partition(":")
    if not colon:
        raise argparse.ArgumentTypeError(f"'{text}' is not LO:HI")
    pair = (number(low), number(high))
    if pair[0] >= pair[1]:
        raise argparse.ArgumentTypeError(f"'{text}': the first must be below the second")
    return pair


def zero_point(text: str) -> tuple[float, float]:
    """'VALUE', 'VALUE:ERROR' in km/s, or the name of a file that holds them."""
    value, _, error = text.partition(":")
    try:
        return number(value), number(error or "0")
    except argparse.ArgumentTypeError:
        return _zero_point_of_file(text)


def _zero_point_of_file(name: str) -> tuple[float, float]:
    import json
    from pathlib import Path

    try:
        held = json.loads(Path(name).read_text(encoding="utf-8"))
        return number(held["zero_point_kms"]), number(held["error_kms"])
    except (OSError, ValueError, KeyError, TypeError):
        raise argparse.ArgumentTypeError(
            f"'{name}' is neither KM_S:ERROR nor a file with a zero point") from None


def count(text: str) -> int:
    """A whole number from zero on."""
    if not re.fullmatch(r"\d+", text):
        raise argparse.ArgumentTypeError(f"'{text}' is not a whole number")
    return int(text)


def count_from_one(text: str) -> int:
    """A whole number from one on."""
    value = count(text)
    if value < 1:
        raise argparse.ArgumentTypeError(f"'{text}' is below 1")
    return value


def abundances(text: str) -> tuple[tuple[str, float], ...]:
    """'Ba=+1.2,Eu=+0.8' as ((element, dex), ...)."""
    pairs = []
    for part in text.split(","):
        element, equals, value = part.strip().partition("=")
        if not equals or not re.fullmatch(r"[A-Z][a-z]?", element):
            raise argparse.ArgumentTypeError(f"'{part.strip()}' is not like Ba=+1.2")
        pairs.append((element, number(value)))
    return tuple(pairs)


def say(line: str) -> None:
    """One line on standard error, begun with the program's name."""
    print(f"linewright: {line}", file=sys.stderr)
