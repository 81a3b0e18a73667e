"""How numbers and standings are written everywhere in the window."""

from __future__ import annotations

import math

import numpy as np

GLYPHS = {
    "firm": "●",
    "likely": "◕",
    "tentative": "◑",
    "unclaimed": "○",
    "set aside": "⊗",
}


def number(value: float, digits: int, signed: bool = False) -> str:
    """A number with a true minus sign; an empty cell where it was not measured."""
    if value is None or not math.isfinite(value):
        return ""
    value = round(value, digits) + 0.0  # no minus sign before a zero
    text = f"{value:+.{digits}f}" if signed else f"{value:.{digits}f}"
    return text.replace("-", "−")


def with_error(value: float, error: float, digits: int) -> str:
    text = number(value, digits)
    return f"{text} ± {number(error, digits)}" if text and math.isfinite(error) else text


def depth(value: float) -> str:
    """Three decimals below 10; strong emission over a weak continuum needs fewer."""
    size = abs(value) if math.isfinite(value) else 0.0
    return number(value, 3 if size < 10 else 1 if size < 1000 else 0)


def width(value: float, error: float = math.nan) -> str:
    """An equivalent width in milliangstrom: one decimal below 1000; in Å, and saying so,
    from 100 Å up."""
    if math.isfinite(value) and abs(value) >= 1e5:
        return with_error(value / 1000, error / 1000, 1 if abs(value) < 1e6 else 0) + " Å"
    return with_error(value, error, 1 if abs(value) < 1000 else 0)


def digits_for(errors) -> int:
    """Decimals that show two figures of a typical error, 2 to 4."""
    known = errors[np.isfinite(errors) & (errors > 0)]
    if not len(known):
        return 3
    return int(np.clip(np.ceil(-np.log10(np.median(known))) + 1, 2, 4))


def standing(name: str) -> str:
    return f"{GLYPHS.get(name, '?')} {name}"


def probability(value: float) -> str:
    """Two digits; never 1.00 for what is not certain."""
    if not math.isfinite(value):
        return ""
    if 0.995 <= value < 1.0:
        return "> 0.99"
    return "< 0.01" if 0.0 < value < 0.005 else f"{value:.2f}"


GRADES = {
    "A": "0.05 dex or better", "B": "0.12 dex or better", "C": "0.25 dex or better",
    "D": "0.5 dex or better", "E": "worse than 0.5 dex, or nominal",
}
GRADE_TIP = "How good the strength is, by its stated error: " + "; ".join(
    f"{letter} {meaning}" for letter, meaning in GRADES.items())
LINE_FLAGS = {
    "non-LTE": "its levels depart from the populations of the temperature, so that it may be "
               "much stronger or weaker than predicted",
    "nominal strength": "no published strength: one was assumed, good for a place and not for a "
                        "depth",
    "components collapsed": "hyperfine, isotopic or fine components are listed as one line; the "
                            "spread says how far they lie apart",
}
FLAGS = {
    # of a measurement
    "blend": "measured together with neighbours it runs into",
    "integrated": "equivalent width from the samples themselves: no profile fits it well",
    "wing": "stands in the wing of a stronger line",
    "saturated": "deeper than 0.9: its strength hardly grows any more",
    "edge": "touches a gap or the end of the spectrum",
    "fallback": "the fit did not settle: the numbers are rough",
    "hand": "picked or fitted by a person",
    "spike": "sharper than the instrument can make a line: a particle hit or a bad sample",
    "voigt": "fitted with a Voigt profile",
    "rotational": "fitted with a profile broadened by rotation",
    "core-wings": "fitted with a core and wide wings",
    "double-peaked": "one of two components fitted together as a double-peaked line",
    "compound": "one of the peaks and troughs of one broad profile, fitted together",
    # of a claim
    "off-velocity": "stands off the velocity of its like by more than 3.5 sigma",
    "off-strength": "stronger or weaker than the species' other lines say, by more than 3.5 sigma",
    "off-excitation": "its lower level lies far from those of the species' firm lines, and its "
                      "strength does not fit well",
    "core-reversal": "absorption and emission of one line, the one inside the other",
    "p-cygni": "emission of a line with absorption on its blue side: matter that flows out",
    "inverse-p-cygni": "emission of a line with absorption on its red side: matter that falls in",
    "double-peak": "one of two emission peaks of a line: a turning disc, or a core absorbed",
    "band": "the head of a molecular band: its depth is the drop of the flux there",
    "in-band": "inside a molecular band that is seen: shallow features there may be any line of it",
    "core": "emission in the core of an absorption line, measured from the line's floor",
    "broad": "wider than lines of its strength are here: a blend, or another claim is right",
    "narrow": "narrower than lines of its strength are here: perhaps telluric, interstellar or "
              "an artefact",
    "artefact": "set aside as no spectral line",
    "cosmic-ray": "set aside as a particle hit",
    "gap-edge": "set aside as made by a gap or the end of the spectrum",
}

STANDS_OUT = ("off-velocity", "off-strength", "off-excitation", "broad", "narrow")


def in_order(flags: str) -> list[str]:
    """Each flag once: a person's hand, what stands out among its like, then the others."""
    named = dict.fromkeys(flags.split())
    return sorted(named, key=lambda word: (word != "hand", word not in STANDS_OUT))


def grade(letter: str) -> str:
    return f"grade {letter}: strength {GRADES[letter]}" if letter in GRADES else ""


def flag(word: str) -> str:
    """What a flag means; the word alone where it is a person's own reason."""
    return f"{word}: {FLAGS[word]}" if word in FLAGS else f"{word}: said by a person"


def flags(text: str) -> str:
    """All flags of a row explained, one a line."""
    return "\n".join(flag(word) for word in dict.fromkeys(text.split()))
