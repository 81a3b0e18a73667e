"""Acts on the selected feature's claim; every one is one step of undo."""

from __future__ import annotations

import math

import numpy as np

from ...errors import LinewrightError
from ...lines.species import normal_name
from ...session import edits, feature_edits
from ...session.model import Session
from ...spectra.medium import to_medium

UNDECIDED = ("likely", "tentative", "unclaimed")


def has_feature(bench) -> bool:
    return bench.selected_row() is not None


def has_candidate(bench) -> bool:
    row = bench.selected_row()
    return row is not None and bool(bench.session.claims[row].candidates)


def is_persons(bench) -> bool:
    row = bench.selected_row()
    return row is not None and bench.session.claims[row].by == "person"


def accept(bench, rank: int | None = None) -> None:
    """Accepts the candidate under consideration, or the one of a rank from 1."""
    rank = bench.view.now.candidate + 1 if rank is None else rank
    bench.act(edits.accept_candidate, bench.view.now.selected, rank)


def name_species(bench, text: str) -> bool:
    if not has_feature(bench) or not text.strip():
        return False
    try:
        name = known_name(bench, text)
    except LinewrightError as refusal:
        bench.refuse(refusal)
        return False
    return bench.act(edits.set_species, bench.view.now.selected, name)


def known_name(bench, text: str) -> str:
    """The catalogue's spelling when it has one, else the canonical name."""
    if bench.catalogue is not None:
        same = [n for n in bench.catalogue.species_names if n.lower() == text.strip().lower()]
        if same:
            return same[0]
    return normal_name(text)


def toggle_blend(bench) -> None:
    """Adds the candidate under consideration to the blend, or takes it out again."""
    bench.act(with_blend, bench.view.now.selected, bench.candidate())


def with_blend(session: Session, number: int, candidate) -> Session:
    """The claim's blend with this candidate in it, or without when it was in it.

    When the candidate is the claimed line itself, the next best one joins it.
    """
    claim = session.claims[session.index_of(number)]
    if candidate == claim.line:
        others = [c for c in claim.candidates if c != claim.line]
        candidate = others[0] if others else None
    if candidate is None:
        return edits.mark_blend(session, number, () if claim.blend else [(claim.species or
                                "unlisted", math.nan, math.nan)])
    kept = [b for b in claim.blend if not _same(b, candidate)]
    if len(kept) == len(claim.blend):
        kept.append((candidate.species, candidate.wave, candidate.share))
    return edits.mark_blend(session, number, kept)


def _same(contributor, candidate) -> bool:
    species, wave, _share = contributor
    return species == candidate.species and abs(wave - candidate.wave) < 1e-6


def set_aside(bench, reason: str = "artefact") -> None:
    bench.act(edits.set_aside, bench.view.now.selected, reason)


def restore(bench) -> None:
    bench.act(edits.restore, bench.view.now.selected)


def set_note(bench, text: str) -> None:
    bench.act(edits.set_note, bench.view.now.selected, text)


def toggle_lock(bench) -> None:
    claim = bench.session.claims[bench.selected_row()]
    bench.act(edits.lock, bench.view.now.selected, not claim.locked)


def remove(bench) -> None:
    bench.act(feature_edits.remove_feature, bench.view.now.selected)


def step_feature(bench, direction: int) -> None:
    """Selects the next or previous row as the Ledger shows them."""
    shown = bench.window.ledger.model.shown if bench.window else np.zeros(0, dtype=int)
    _select_from(bench, shown, direction)


def step_undecided(bench, direction: int) -> None:
    """The next feature the machine is not firm about and no person has judged."""
    shown = bench.window.ledger.model.shown if bench.window else np.zeros(0, dtype=int)
    claims = bench.session.claims
    open_ones = [i for i in shown
                 if claims[i].standing in UNDECIDED and claims[i].by == "machine"]
    _select_from(bench, np.array(open_ones, dtype=int), direction, within=shown)


def _select_from(bench, rows, direction: int, within=None) -> None:
    if not len(rows):
        return
    order = list(rows if within is None else within)
    place = {row: k for k, row in enumerate(order)}
    at = place.get(bench.selected_row())
    if at is None:
        at = _edge_of_view(bench, order, direction)
    ahead = [r for r in rows if (place[r] - at) * direction > 0]
    if ahead:
        chosen = ahead[0] if direction > 0 else ahead[-1]
        bench.view.select(int(bench.session.features.number[chosen]))


def _edge_of_view(bench, order, direction: int) -> float:
    """With nothing selected the walk begins at the edge of what is in view."""
    outside = -1 if direction > 0 else len(order)
    if bench.view.now.span is None:
        return outside
    low, high = bench.view.now.span
    wave = to_medium(bench.session.features.wave, bench.session.spectrum.medium)
    inside = [k for k, row in enumerate(order) if low <= wave[row] <= high]
    if not inside:
        return outside
    return inside[0] - 0.5 if direction > 0 else inside[-1] + 0.5
