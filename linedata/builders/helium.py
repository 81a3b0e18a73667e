"""He I lines: NIST levels, NIST transition probabilities, Coulomb approximation elsewhere."""

from __future__ import annotations

import re
from dataclasses import dataclass
from pathlib import Path

import numpy as np

from common import source_file
from coulomb import coulomb_radial
from nist_levels import read_levels

LIMIT = 198310.66637  # cm-1, NIST ASD
RYDBERG = 109722.27308  # cm-1, helium
HIGHEST = 20
LETTERS = "spdfghik"
GF_FROM_A = 1.499193e-16  # gf = this x g_up x A (s-1) x lambda^2 (Angstrom)
# The level file gives one J per term (J=2 of the odd triplets). Fine structure of 2p and 3p,
# cm-1 above J=2, NIST ASD (Morton, Wu & Drake 2006).
FINE = {2: {1: 0.0764254, 0: 1.0643386}, 3: {1: 0.0219, 0: 0.2926}}


@dataclass(frozen=True)
class Term:
    """One He I term: n, l, multiplicity, energy (cm-1; J=2 for odd triplets), error."""

    n: int
    ell: int
    multiplicity: int
    energy: float
    error: float

    @property
    def label(self) -> str:
        """'configuration|term'."""
        odd = "*" if self.ell % 2 else ""
        letter = "SPDFGHIK"[self.ell]
        return f"1s.{self.n}{LETTERS[self.ell]}|{self.multiplicity}{letter}{odd}"

    @property
    def n_eff(self) -> float:
        return float(np.sqrt(RYDBERG / (LIMIT - self.energy)))


def read_terms(source: Path) -> list[Term]:
    """Terms of the level file, then of higher n by the last quantum defect of a series."""
    levels = read_levels(source, "He", 1)
    terms: dict[tuple[int, int, int], Term] = {}
    for k in range(len(levels)):
        match = re.fullmatch(r"1s\.(\d+)([a-z])", levels.configuration[k])
        if match and match[2] in LETTERS:
            n, ell = int(match[1]), LETTERS.index(match[2])
            key = (n, ell, int(levels.term[k][0]))
            terms.setdefault(key, Term(*key, levels.energy[k], levels.error[k]))
    for ell in range(4):
        for multiplicity in (1, 3):
            last = max(n for n, el, m in terms if el == ell and m == multiplicity)
            defect = last - terms[last, ell, multiplicity].n_eff
            for n in range(last + 1, HIGHEST + 1):
                energy = LIMIT - RYDBERG / (n - defect) ** 2
                terms[n, ell, multiplicity] = Term(n, ell, multiplicity, energy, 0.05)
    return list(terms.values())


def read_probabilities(source: Path) -> np.ndarray:
    """Rows (vacuum wavelength, A, J_low, J_up) of He I in the NIST lines carried by rascal."""
    path = source_file(source, "rascal*/rascal/arc_lines/all_nist.csv")
    rows = []
    for line in path.read_text(errors="replace").splitlines():
        cells = line.split(",")
        if cells[:2] == ["He", "1"] and len(cells) >= 9 and cells[5] and cells[8]:
            rows.append([float(cells[2]), float(cells[5]), float(cells[7]), float(cells[8])])
    return np.array(rows)


def _offset(n: int, ell: int, multiplicity: int, part: str) -> float:
    """Mean energy above the listed level of the J=2,1 ('main') or J=0 part of an odd triplet."""
    fine = FINE.get(n) if (ell, multiplicity) == (1, 3) else None
    if fine is None:
        return 0.0
    return fine[0] if part == "zero" else 3 * fine[1] / 8


def _published_gf(wave: float, table: np.ndarray) -> float:
    """Sum of g A of the components NIST lists at this wavelength, as gf; NaN without."""
    near = np.abs(table[:, 0] - wave) < max(0.03, 4e-6 * wave)
    if not near.any():
        return float("nan")
    _, a, _, j_up = table[near].T
    return float(GF_FROM_A * wave**2 * ((2 * j_up + 1) * a).sum())


def _coulomb_gf(low: Term, up: Term) -> float:
    """gf of the whole multiplet by the Coulomb approximation."""
    radial = coulomb_radial(round(low.n_eff, 6), low.ell, round(up.n_eff, 6), up.ell, 1.0)
    energy = (up.energy - low.energy) / 109737.31568
    return low.multiplicity * 2 / 3 * energy * max(low.ell, up.ell) * radial**2 / 2


def _parts(low: Term, up: Term) -> list[tuple[str, float]]:
    """An odd triplet with resolved J=0 gives two lines: (part, share of the multiplet's gf)."""
    for term in (low, up):
        if (term.ell, term.multiplicity) == (1, 3) and term.n == 2:
            return [("main", 8 / 9), ("zero", 1 / 9)]
    return [("main", 1.0)]


def line_pairs(source: Path) -> list[dict[str, float]]:
    """All permitted lines between 1200 and 25000 A: wave, wave_err, e_low (eV), loggf, error."""
    terms, table = read_terms(source), read_probabilities(source)
    lines = []
    for low in terms:
        for up in terms:
            allowed = abs(up.ell - low.ell) == 1 and up.multiplicity == low.multiplicity
            if not allowed or not 4000 < up.energy - low.energy < 83300 or low.n > 6:
                continue
            for part, share in _parts(low, up):
                shift = _offset(up.n, up.ell, up.multiplicity, part)
                shift -= _offset(low.n, low.ell, low.multiplicity, part)
                wave = 1e8 / (up.energy - low.energy + shift)
                gf, error = _published_gf(wave, table) if part == "main" else np.nan, 0.02
                if (up.n, up.ell, up.multiplicity) == (3, 1, 3):
                    gf *= 9 / 8  # the list leaves out the unresolved J=0 component
                if not np.isfinite(gf):
                    main = 1e8 / (up.energy - low.energy)
                    gf = _published_gf(main, table) / 8 if part == "zero" else np.nan
                computed, apart = _coulomb_gf(low, up) * share, np.nan
                if np.isfinite(gf):
                    apart = float(np.log10(computed / gf))
                    error = max(error, float(np.ceil(100 * abs(apart) / 3.0)) / 100)
                else:
                    gf, error = computed, 0.08
                uncertain = wave**2 * 1e-8 * np.hypot(low.error, up.error)
                lines.append({
                    "wave": wave, "wave_err": float(np.hypot(uncertain, 4e-7 * wave)),
                    "e_low": low.energy / 8065.543937, "loggf": float(np.log10(gf)),
                    "loggf_err": error, "spread": 0.0, "loggf_alt_shift": apart,
                    "term_low": low.label, "term_up": up.label,
                    "weight": up.multiplicity / 4, "n_up": up.n, "l_up": up.ell,
                })
    return lines
