"""Predicted depths as this spectrum shows them: resolution, rotation and veiling make them shallower.

The engine has learned how strength turns into depth here; each claim keeps the depth it predicted.
Read against the depths of the catalogue they give the relation for all other lines.
"""

from __future__ import annotations

import numpy as np

from ..lines.catalogue import LineCatalogue
from ..session.model import Session
from .view_rake import CLAIMED

FEWEST = 24  # claims of an origin before a relation is read from them
BINS = 8
SAME = 1e-4  # Angstrom: a claimed line and its row


def seen_depths(
    session: Session, catalogue: LineCatalogue, depth: np.ndarray, origin: str
) -> np.ndarray:
    """The depth of every catalogue line in this spectrum, shape (n,).

    depth: that of a resolved line. Unchanged where too few claims of the origin tell more.
    """
    resolved, shown = _pairs(session, catalogue, depth, origin)
    if len(resolved) < FEWEST:
        return depth
    order = np.argsort(resolved, kind="stable")
    parts = np.array_split(order, BINS)
    x = np.array([np.median(resolved[part]) for part in parts])
    y = np.maximum.accumulate([np.median(shown[part]) for part in parts])
    keep = np.diff(x, prepend=0.0) > 1e-6
    x, y = np.append(0.0, x[keep]), np.append(0.0, y[keep])
    beyond = np.maximum(depth / x[-1], 1.0)  # deeper than most: as much deeper here
    return np.minimum(np.interp(depth, x, y) * beyond, 1.0)


def _pairs(session: Session, catalogue: LineCatalogue, depth: np.ndarray, origin: str):
    """(depth of the resolved line, depth predicted here) of claimed lines, shapes (m,)."""
    lines = [c.candidates[0] for c in session.claims
             if c.standing in CLAIMED and c.origin == origin and c.candidates
             and c.candidates[0].depth_predicted > 0]
    if not lines:
        return np.zeros(0), np.zeros(0)
    wave = np.array([line.wave for line in lines])
    row = np.searchsorted(catalogue.wave, wave - SAME)
    row = np.minimum(row, len(catalogue) - 1)
    resolved = np.asarray(depth)[row]
    shown = np.array([line.depth_predicted for line in lines])
    known = (np.abs(catalogue.wave[row] - wave) < SAME) & (resolved > 0)
    return resolved[known], shown[known]
