"""Permitted one-electron lines of an ion from its energy levels: Ritz wavelengths and log gf.

One electron jumps outside an unchanged core; LS or J1K coupling; radial integrals by the
Coulomb approximation. gf = 303.75 S / lambda(Angstrom), S in atomic units (Cowan 1981).
"""

from __future__ import annotations

import re
from dataclasses import dataclass, replace
from functools import lru_cache
from pathlib import Path

import numpy as np

from angular import six_j
from common import EV_PER_CM
from coulomb import coulomb_radial
from nist_levels import Levels, read_levels
from symbols import ELEMENTS

RYDBERG = 109737.31568
ORBITALS = "spdfghik"
TERM_LETTERS = "SPDFGHIKLMNOQ"


@dataclass(frozen=True)
class State:
    """One level seen as core + outer electron.

    core: configuration of the core with its parent term; n, ell: the outer electron;
    big_l, spin: L and S (LS) or K and 1/2 (J1K); parent: L1 (LS) or J1 (J1K);
    label: 'configuration|term' as listed.
    """

    row: int
    core: str
    n: int
    ell: int
    scheme: str
    big_l: float
    spin: float
    parent: float
    j: float
    energy: float
    error: float
    n_eff: float
    label: str = ""


def parent_term(core: str) -> str:
    """The last parent term of a core configuration ('3P'), '' without one."""
    found = re.findall(r"\((\d[A-Z])\*?(?:<([\d/]+)>)?\)", core)
    return found[-1][0] if found else ""


def _bare_core(configuration: str) -> str:
    """A configuration without parent terms and without the 1s2 some level files write."""
    return re.sub(r"\(.*?\)\.?", "", configuration).rstrip(".").removeprefix("1s2.")


def _half(text: str) -> float:
    return int(text[:-2]) / 2.0 if text.endswith("/2") else float(text)


def _parent_momentum(core: str, scheme: str) -> float:
    """L1 of the parent (0 for closed shells), or J1 in the J1K scheme; NaN unknown."""
    found = re.findall(r"\((\d)([A-Z])\*?(?:<([\d/]+)>)?\)", core)
    if scheme == "JK":
        return _half(found[-1][2]) if found and found[-1][2] else float("nan")
    if found:
        return float(TERM_LETTERS.index(found[-1][1]))
    outer = core.rpartition(".")[2]
    match = re.fullmatch(r"\d+([spdf])(\d*)", outer)
    if not match:
        return float("nan")
    filling, full = int(match[2] or 1), 4 * ORBITALS.index(match[1]) + 2
    if filling == full:
        return 0.0
    return float(ORBITALS.index(match[1])) if filling in (1, full - 1) else float("nan")


def _quantum(term: str) -> tuple[str, float, float] | None:
    """(scheme, L or K, S) of '4D*' or '2[7/2]*'."""
    jk = re.search(r"(\d)\[(\d+(?:/2)?)\]", term)
    if jk:
        return "JK", _half(jk[2]), 0.5
    ls = re.search(r"(\d+)([A-Z])\d*\*?$", term.strip())
    if ls and ls[2] in TERM_LETTERS:
        return "LS", float(TERM_LETTERS.index(ls[2])), (int(ls[1]) - 1) / 2.0
    return None


@lru_cache(maxsize=None)
def _parent_energies(source: Path, element: str, stage: int) -> dict[tuple[str, str], float]:
    """Mean energies of the next ion's terms by (configuration, term), cm-1."""
    levels = read_levels(source, element, stage + 1) if stage < 8 else None
    sums: dict[tuple[str, str], list[float]] = {}
    for k in range(len(levels) if levels else 0):
        term = re.search(r"\d+[A-Z]", levels.term[k])
        if term and np.isfinite(levels.j[k]):
            weight = 2 * levels.j[k] + 1
            key = (_bare_core(levels.configuration[k]), term[0])
            total = sums.setdefault(key, [0.0, 0.0])
            if total[1] == 0.0 or abs(total[0] / total[1] - levels.energy[k]) < 3000.0:
                total[0] += weight * levels.energy[k]
                total[1] += weight
    return {key: total[0] / total[1] for key, total in sums.items()}


def _series_limit(source: Path, element: str, stage: int, core: str, limit: float) -> float:
    """Energy (cm-1) at which the outer electron of this core is free."""
    bare = _bare_core(core)
    energies = _parent_energies(source, element, stage)
    term = parent_term(core)
    if not term:
        same = [energy for (configuration, _), energy in energies.items() if configuration == bare]
        return limit + (min(same) if same else 0.0)
    return limit + energies.get((bare, term), 0.0)


def states_of(source: Path, element: str, stage: int, limit_ev: float) -> list[State]:
    """Levels below the limit that are one electron outside a core."""
    levels = read_levels(source, element, stage)
    states = []
    for row in range(len(levels) if levels else 0):
        state = _state(source, (element, stage), levels, row, limit_ev / EV_PER_CM)
        if state is not None:
            states.append(state)
    return states + _unlisted_partners(states)


def _unlisted_partners(states: list[State]) -> list[State]:
    """The second J of J1K pairs of which the levels give one (unresolved): same energy."""
    pairs: dict[tuple, list[State]] = {}
    for state in states:
        if state.scheme == "JK":
            pairs.setdefault((state.core, state.n, state.ell, state.big_l), []).append(state)
    partners = []
    for (_, _, _, big_k), found in pairs.items():
        other = 2 * big_k - found[0].j
        if len(found) == 1 and other >= 0:
            partners.append(replace(found[0], j=other, row=found[0].row + 100000))
    return partners


def _state(source: Path, ion: tuple[str, int], levels: Levels, row: int, limit: float):
    core, _, outer = levels.configuration[row].rpartition(".")
    match = re.fullmatch(r"(\d+)([spdfghik])", outer)
    quantum = _quantum(levels.term[row])
    if not match or quantum is None or not np.isfinite(levels.j[row]) or not core:
        return None
    free = _series_limit(source, *ion, core, limit)
    if levels.energy[row] > free - 500.0:
        return None
    parent = _parent_momentum(core, quantum[0])
    if not np.isfinite(parent):
        return None
    n_eff = ion[1] * np.sqrt(RYDBERG / (free - levels.energy[row]))
    return State(
        row, core, int(match[1]), ORBITALS.index(match[2]), *quantum, parent, levels.j[row],
        levels.energy[row], levels.error[row], round(float(n_eff), 5),
        f"{levels.configuration[row]}|{levels.term[row]}",
    )


def line_strength(low: State, up: State, charge: float) -> float:
    """S in atomic units of a line between states of one core and coupling scheme."""
    radial = coulomb_radial(low.n_eff, low.ell, up.n_eff, up.ell, charge)
    angle = six_j(low.big_l, low.j, low.spin, up.j, up.big_l, 1.0) ** 2
    angle *= six_j(low.ell, low.big_l, low.parent, up.big_l, up.ell, 1.0) ** 2
    weights = (2 * low.j + 1) * (2 * up.j + 1) * (2 * low.big_l + 1) * (2 * up.big_l + 1)
    return weights * angle * max(low.ell, up.ell) * radial**2


def _bare(core: str) -> str:
    """A core configuration without the J of its parent term."""
    return re.sub(r"<[\d/]+>", "", core)


def mixed_strength(ls: State, jk: State, charge: float) -> float:
    """S of a line between an LS-coupled and a J1K-coupled level of one core (atomic units).

    The J1K state is expanded over L and S of the same J; coefficients
    sqrt((2J1+1)(2L+1)(2K+1)(2S+1)) {S1 L1 J1; l K L} {L S1 K; 1/2 J S} (Cowan 1981, ch. 9).
    """
    term = parent_term(jk.core)
    l1, s1 = float(TERM_LETTERS.index(term[1])), (int(term[0]) - 1) / 2.0
    amplitude = 0.0
    for total in range(int(abs(l1 - jk.ell)), int(l1 + jk.ell) + 1):
        recoupled = six_j(s1, l1, jk.parent, jk.ell, jk.big_l, total)
        recoupled *= six_j(total, s1, jk.big_l, 0.5, jk.j, ls.spin)
        recoupled *= six_j(ls.big_l, ls.j, ls.spin, jk.j, total, 1.0)
        recoupled *= six_j(ls.ell, ls.big_l, l1, total, jk.ell, 1.0)
        amplitude += (2 * total + 1) * recoupled
    weights = (2 * jk.parent + 1) * (2 * jk.big_l + 1) * (2 * ls.spin + 1)
    weights *= (2 * ls.j + 1) * (2 * jk.j + 1) * (2 * ls.big_l + 1)
    radial = coulomb_radial(ls.n_eff, ls.ell, jk.n_eff, jk.ell, charge)
    return weights * amplitude**2 * max(ls.ell, jk.ell) * radial**2


def _strength(low: State, up: State, charge: float) -> float:
    if low.scheme == up.scheme:
        return line_strength(low, up, charge)
    ls, jk = (low, up) if low.scheme == "LS" else (up, low)
    return mixed_strength(ls, jk, charge)


def _permitted(low: State, up: State) -> bool:
    if abs(low.ell - up.ell) != 1 or abs(low.j - up.j) > 1 or low.j + up.j == 0:
        return False
    if low.scheme == up.scheme:
        return low.core == up.core and low.spin == up.spin
    ls, jk = (low, up) if low.scheme == "LS" else (up, low)
    same = _bare(ls.core) == _bare(jk.core)
    implied = not parent_term(ls.core) and ls.core == re.sub(r"\.?\([^()]*\)$", "", jk.core)
    return bool(parent_term(jk.core)) and (same or implied)


def permitted_lines(source: Path, element: str, stage: int, limit_ev: float) -> list[dict]:
    """Lines 1200-25000 A: wave, wave_err, e_low (eV), e_up, j_low, j_up, loggf, low, up."""
    states = sorted(states_of(source, element, stage, limit_ev), key=lambda s: s.energy)
    lines = []
    for i, low in enumerate(states):
        for up in states[i + 1 :]:
            gap = up.energy - low.energy
            if not 4000.0 < gap < 83334.0 or not _permitted(low, up):
                continue
            wave = 1e8 / gap
            strength = _strength(low, up, float(stage))
            if not strength > 1e-12:
                continue
            error = wave**2 * 1e-8 * np.hypot(low.error, up.error)
            lines.append({
                "wave": wave, "wave_err": float(np.hypot(error, 4e-7 * wave)),
                "e_low": low.energy * EV_PER_CM, "e_up": up.energy * EV_PER_CM,
                "j_low": low.j, "j_up": up.j,
                "loggf": float(np.log10(303.75 * strength / wave)), "low": low, "up": up,
                "term_low": low.label, "term_up": up.label,
            })
    return lines


def atomic_number(element: str) -> int:
    return ELEMENTS.index(element) + 1
