"""The Ledger's columns as arrays and texts over one session."""

from __future__ import annotations

import numpy as np

from ...session.model import STANDINGS, Session
from ...spectra.medium import C_KM_S, to_medium
from . import words
from .column_model import Column


class LedgerArrays:
    """The numbers behind the Ledger, in the spectrum's own medium; length n of features."""

    def __init__(self, session: Session):
        f, claims = session.features, session.claims
        self.features, self.claims = f, claims
        self.digits = words.digits_for(f.wave_err)
        self.wave = to_medium(f.wave, session.spectrum.medium)
        lab = np.array([c.line.wave if c.line else np.nan for c in claims], dtype=float)
        self.lab = to_medium(lab, session.spectrum.medium) if len(lab) else lab
        self.velocity = C_KM_S * (f.wave / lab - 1.0) if len(lab) else lab
        self.species = np.array([shown_species(c) for c in claims], dtype=object)
        self.probability = np.array([shown_probability(c) for c in claims], dtype=float)
        self.standing = np.array([STANDINGS.index(c.standing) for c in claims], dtype=int)
        self.by = np.array([c.by for c in claims], dtype=object)
        self.note = np.array([c.note for c in claims], dtype=object)

    def take_claims(self, session: Session) -> np.ndarray | None:
        """Takes over the claims that differ, in place; returns their rows.

        None when the features or many claims changed: then make new arrays.
        """
        if session.features is not self.features:
            return None
        pairs = zip(self.claims, session.claims, strict=True)
        rows = np.array([i for i, (old, new) in enumerate(pairs) if old is not new], dtype=int)
        if len(rows) > 100:
            return None
        self.claims = session.claims
        for i in rows:
            self._take(i, session)
        return rows

    def flags(self, i: int) -> str:
        """Of the measurement and of the claim, what stands out before the others."""
        return " ".join(words.in_order(f"{self.features.flags[i]} {self.claims[i].flags}"))

    def _take(self, i: int, session: Session) -> None:
        claim = session.claims[i]
        lab = claim.line.wave if claim.line else np.nan
        self.lab[i] = to_medium(lab, session.spectrum.medium)
        self.velocity[i] = C_KM_S * (self.features.wave[i] / lab - 1.0)
        self.species[i], self.probability[i] = shown_species(claim), shown_probability(claim)
        self.standing[i] = STANDINGS.index(claim.standing)
        self.by[i], self.note[i] = claim.by, claim.note


def shown_species(claim) -> str:
    """The claim in the trade's notation, with what it is blended with."""
    others = [s for s, _wave, _share in claim.blend if s != claim.species]
    if not claim.species:
        return ""
    if claim.standing == "unclaimed":  # the best guess, not a claim
        return f"({claim.species})"
    return " + ".join([claim.species, *dict.fromkeys(others)])


def shown_probability(claim) -> float:
    """The machine's probability of what is claimed: that of its best candidate's species, or of
    the species that a person claims instead; NaN where it never weighed that."""
    if claim.by != "person" or not claim.candidates:
        return claim.probability
    if claim.species == claim.candidates[0].species:
        return claim.probability
    weighed = [c.probability for c in claim.candidates if c.species == claim.species]
    return sum(weighed) if weighed else float("nan")


def ledger_columns(a: LedgerArrays) -> list[Column]:
    """wavelength, claim, laboratory, velocity, depth, EW, probability, standing, by, note"""
    f = a.features
    return [
        Column("wavelength (Å)", "Fitted centre and its error, in the spectrum's own medium",
               lambda i: words.with_error(a.wave[i], f.wave_err[i], a.digits), lambda: a.wave, True, 150),
        Column("claim", "The species said to make this feature; after + what is blended in",
               lambda i: a.species[i], lambda: a.species.astype(str), False, 112),
        Column("laboratory (Å)", "Laboratory wavelength of the claimed line, same medium",
               lambda i: words.number(a.lab[i], a.digits), lambda: a.lab, True, 102),
        Column("velocity (km/s)", "c (λ/λ laboratory − 1) in vacuum, receding positive",
               lambda i: words.number(a.velocity[i], 2, True), lambda: a.velocity, True, 104),
        Column("depth", "(continuum − flux)/continuum at the centre; negative in emission",
               lambda i: words.depth(f.depth[i]), lambda: f.depth, True, 70),
        Column("EW (mÅ)", "Equivalent width and its error; negative in emission",
               lambda i: words.width(f.ew[i], f.ew_err[i]), lambda: f.ew, True, 132),
        Column("probability", "That the claimed species is the main contributor, as the machine "
               "weighs it, whoever claims it",
               lambda i: words.probability(a.probability[i]) if a.species[i] else "",
               lambda: a.probability, True, 86),
        Column("standing", "firm from 0.95, likely from 0.80, tentative from 0.50; "
               "a person's act stands above the machine's",
               lambda i: words.standing(STANDINGS[a.standing[i]]), lambda: a.standing, False, 104),
        Column("by", "Who said it: machine or person",
               lambda i: a.by[i], lambda: a.by.astype(str), False, 76),
        Column("flags", "What is remarkable about measurement and claim; the tip of a cell says "
               "what each word means", a.flags,
               lambda: np.array([a.flags(i) for i in range(len(a.wave))], dtype=str), False, 200),
        Column("note", "Your note on this feature",
               lambda i: a.note[i], lambda: a.note.astype(str), False, 96),
    ]
