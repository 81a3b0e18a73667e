"""Plain words about lines, read as a query: 'Fe I 5160:5200 e<3 gf>-1 grade B'."""

from __future__ import annotations

import re
from dataclasses import dataclass, field, replace

from ..errors import InputRefused, LinewrightError
from ..lines.catalogue import ORIGINS
from ..lines.search import LineQuery
from ..lines.species import normal_name

EXAMPLES = "such as: Fe I 5160:5200 e<3 gf>-1 depth>0.05 grade B telluric 5183.6"
_NUMBER = r"[-+]?\d+(?:\.\d+)?"
_BETWEEN = rf"({_NUMBER})\s*(?::|\.\.)\s*({_NUMBER})"
_ENERGY = r"\b(?:e_?low|energy|e)"
_STRENGTH = r"\b(?:log\s*)?gf"
_UNIT = r"(?:\s*eV\b)?"
SPANS = ("all", "here", "view")


@dataclass(frozen=True)
class Places:
    """What the words for places mean, each (low, high) in ``medium``, laboratory Angstrom.

    whole: of the spectrum; view: of what is shown; here: about the selected feature; None
    where there is none. line: row of the line looked at, for 'multiplet'
    """

    medium: str = "air"
    whole: tuple[float, float] | None = None
    view: tuple[float, float] | None = None
    here: tuple[float, float] | None = None
    line: int | None = None


@dataclass(frozen=True)
class Asked:
    """A query and the least predicted depth wanted."""

    query: LineQuery = field(default_factory=LineQuery)
    depth_above: float = 0.0


def asked(words: str, names: tuple[str, ...], where: Places = Places()) -> Asked:
    """The query that the words make; every word must fit.

    names: species of the catalogue. Words for the same thing narrow one another. Raises
    InputRefused for a number or a species that makes no sense.
    """
    reader = _Reader(words, names, where)
    reader.energies()
    reader.strengths()
    reader.spans()
    reader.rest()
    return reader.result()


def as_words(fields: dict[str, str]) -> str:
    """What was typed into the small fields, as words of the search field.

    fields: 'range', 'species', 'e_low' ('<3', '2:3', or '3' for up to 3), 'loggf', 'depth'
    (a bare number is the least wanted)
    """
    said = []
    for name, text in fields.items():
        text = text.strip().replace("−", "-").replace("–", ":")
        if not text:
            continue
        if name in ("range", "species"):
            said.append(text)
            continue
        word, bare = {"e_low": ("e", "<"), "loggf": ("gf", ">"), "depth": ("depth", ">")}[name]
        said.append(f"{word}{text}" if text[0] in "<>" else
                    f"{word} {text}" if re.search(r":|\.\.", text) else f"{word}{bare}{text}")
    return " ".join(said)


class _Reader:
    """Takes what it understands out of the text, kind by kind."""

    def __init__(self, words: str, names: tuple[str, ...], where: Places):
        self.text = " " + re.sub(r"[,;]", " ", words.replace("−", "-").replace("–", ":")) + " "
        self.names, self.where = names, where
        self.query, self.depth = LineQuery(medium=where.medium), 0.0
        self.low, self.high = 0.0, float("inf")
        self.ranged, self.species, self.left = False, [], []

    def _each(self, pattern: str):
        """The matches of a pattern, taken out of the text."""
        found = list(re.finditer(pattern, self.text, re.IGNORECASE))
        self.text = re.sub(pattern, " ", self.text, flags=re.IGNORECASE)
        return found

    def energies(self) -> None:
        low, high = 0.0, float("inf")
        for match in self._each(rf"{_ENERGY}\s*=?\s*{_BETWEEN}{_UNIT}"):
            ends = sorted(float(g) for g in match.groups())
            low, high = max(low, ends[0]), min(high, ends[1])
        for match in self._each(rf"{_ENERGY}\s*([<>])=?\s*({_NUMBER}){_UNIT}"):
            value = float(match[2])
            low, high = (max(low, value), high) if match[1] == ">" else (low, min(high, value))
        if (low, high) != (0.0, float("inf")):
            self.query = replace(self.query, e_low=(low, high))

    def strengths(self) -> None:
        for match in self._each(rf"{_STRENGTH}\s*>=?\s*({_NUMBER})"):
            known = self.query.loggf_above
            value = float(match[1])
            self.query = replace(
                self.query, loggf_above=value if known is None else max(known, value))
        for match in self._each(rf"\bdepth\s*>=?\s*({_NUMBER})"):
            self.depth = max(self.depth, float(match[1]))
        for match in self._each(r"\bgrade\s+([a-e])\b"):
            self.query = replace(self.query, grade=match[1].upper())

    def spans(self) -> None:
        for match in self._each(rf"(?<![\w.]){_BETWEEN}(?![\w.])"):
            self._narrow(tuple(sorted(float(g) for g in match.groups())))
        for match in self._each(rf"\b(?:in\s+)?({'|'.join(SPANS)})\b"):
            self._place(match[1].lower())

    def _place(self, name: str) -> None:
        if name == "all":
            self.ranged = True
            return
        span = getattr(self.where, name)
        if span is None:
            raise InputRefused(name, "no feature is selected" if name == "here" else
                               "no spectrum is shown", "type a range such as 5160:5200")
        self._narrow(span)

    def _narrow(self, span) -> None:
        self.ranged = True
        self.low, self.high = max(self.low, span[0]), min(self.high, span[1])

    def rest(self) -> None:
        """Species, origins, 'multiplet'; what is left is text."""
        words = self.text.split()
        while words:
            taken = self._species(words) or self._plain(words[0])
            del words[:taken]

    def _species(self, words: list[str]) -> int:
        """How many of the first words name species of the catalogue; 0 for none."""
        for count in (2, 1):
            found = _named(" ".join(words[:count]), self.names) if len(words) >= count else []
            if found:
                self.species += found
                return count
        return 0

    def _plain(self, word: str) -> int:
        lowered = word.lower()
        if re.search(r"[<>=]", word):
            raise InputRefused(f"'{word}'", "is not understood", EXAMPLES)
        if lowered in ORIGINS:
            self.query = replace(self.query, origin=lowered)
        elif lowered == "multiplet":
            if self.where.line is None:
                raise InputRefused("multiplet", "no line is looked at", "choose a line first")
            self.query = replace(self.query, multiplet_of=self.where.line)
            self.ranged = True
        else:
            self.left.append(word)
        return 1

    def result(self) -> Asked:
        span = (self.low, self.high) if self.ranged else self.where.whole
        if span is not None and span != (0.0, float("inf")):
            self.query = replace(self.query, wave_range=(span[0], max(span)))
        names = tuple(dict.fromkeys(self.species))
        return Asked(replace(self.query, species=names, text=" ".join(self.left)), self.depth)


def _named(text: str, names: tuple[str, ...]) -> list[str]:
    """The catalogue's species that a text names: itself, or all ions of an element.

    A name without brackets means its forbidden lines as well.
    """
    lowered = text.lower()
    exact = [n for n in names if lowered in (n.lower(), n.strip("[]").lower())]
    if exact:
        return exact
    ions = [n for n in names if n.strip("[]").lower().startswith(f"{lowered} ")]
    if ions:
        return ions
    if not re.fullmatch(r"\[?[A-Za-z]{1,2}\s*(\d{1,2}|[IVXivx]+)\]?", text):
        return []
    try:
        name = normal_name(text)
    except LinewrightError:
        return []
    return [n for n in names if name in (n, n.strip("[]"))]
