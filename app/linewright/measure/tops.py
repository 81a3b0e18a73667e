"""The pseudo-continuum where lines crowd towards a series limit.

Just longward of the Balmer limit the level of an A star rises two- or threefold within a few
blocks while its lines stand closer than a block is wide: a level for each block goes through
the middle of the lines, and the tops between them look like emission. There the nodes are
the tops themselves.
"""

from __future__ import annotations

import numpy as np

ABOVE = 0.12  # of the level: how far a top stands over it
SURE = 5.0  # sigmas of a sample, besides
LEAST = 3  # tops in a row
RISE = 1.25  # of the level over the tops
BROAD = 0.25  # share of the samples there that stand so high: tops, not lines in emission
ERROR = 0.03  # relative error of such a level


def over_tops(samples, nodes, run):
    """Nodes (wave, flux, relative error), with those amid a row of tops replaced by the tops.

    samples: (wave, flux, sigma) of the usable samples, (n,) each; nodes: as of
    ``fit_continuum``; run: the continuum at the samples, (n,).
    """
    wave, flux, sigma = samples
    high = flux > run * (1.0 + ABOVE) + SURE * sigma
    edges = np.flatnonzero(np.diff(np.r_[False, high, False]))
    starts, stops = edges[::2], edges[1::2]
    if len(starts) < LEAST or not _rises(high, run, starts[0], stops[-1]):
        return nodes
    tops = [a + int(np.argmax(flux[a:b])) for a, b in zip(starts, stops, strict=True)]
    centre, level, error = nodes
    amid = (centre >= wave[starts[0]]) & (centre <= wave[stops[-1] - 1])
    order = np.argsort(np.r_[centre[~amid], wave[tops]], kind="stable")
    return tuple(
        np.r_[old[~amid], new][order]
        for old, new in ((centre, wave[tops]), (level, flux[tops]),
                         (error, np.full(len(tops), ERROR)))
    )


def _rises(high, run, start: int, stop: int) -> bool:
    """Whether the level rises over the samples start..stop, most of them tops."""
    over = run[start:stop]
    return high[start:stop].mean() > BROAD and over.max() > RISE * over.min()
