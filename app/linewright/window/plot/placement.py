"""Where claim labels go: no overlap, no crossing leaders, the important ones first."""

from __future__ import annotations

import numpy as np

# Labels per bucket of this many label widths are rationed by importance.
_BUCKET = 8
_ROOM = 0.9
MAX_SHIFT = 4.5


def spread(wanted, width: float) -> np.ndarray:
    """Positions nearest to ``wanted`` (ascending) with neighbours at least ``width`` apart.

    Least squares by pooling: labels that collide form a group about their common mean, so
    order is kept and leaders never cross.
    """
    starts: list[float] = []  # centre of the first label of each group
    counts: list[int] = []
    for position in np.asarray(wanted, dtype=float).tolist():
        start, count = position, 1
        while starts and starts[-1] + counts[-1] * width > start:
            before, members = starts.pop(), counts.pop()
            # Least squares: mean of (wanted - own offset) over the joined group.
            start = (before * members + (start - members * width) * count) / (members + count)
            count += members
        starts.append(start)
        counts.append(count)
    sizes = np.array(counts, dtype=int)
    offset = np.arange(int(sizes.sum())) - np.repeat(np.cumsum(sizes) - sizes, sizes)
    return np.repeat(np.array(starts), sizes) + width * offset


def ration(anchor, importance, width: float) -> np.ndarray:
    """Ascending indices of the labels worth placing: the most important of each bucket.

    ``anchor`` are positions on an axis that does not move when the view pans (wavelength
    in pixels), so that the choice does not flicker. Greedy by importance.
    """
    bucket = np.floor(np.asarray(anchor) / (_BUCKET * width)).astype(np.int64)
    order = np.lexsort((-np.asarray(importance), bucket))
    sorted_bucket = bucket[order]
    starts = np.nonzero(np.diff(sorted_bucket, prepend=sorted_bucket[:1] - 1))[0]
    rank = np.arange(len(order)) - np.repeat(starts, np.diff(np.append(starts, len(order))))
    return np.sort(order[rank < max(1, int(_BUCKET * _ROOM))])


def place(wanted, width: float, ends: tuple[float, float]) -> tuple[np.ndarray, np.ndarray]:
    """(kept indices, positions) for ascending ``wanted``; all inside ``ends``.

    Labels pushed farther than MAX_SHIFT widths are dropped: a long leader explains nothing.
    """
    wanted = np.asarray(wanted, dtype=float)
    kept = np.arange(len(wanted))
    room = int((ends[1] - ends[0]) // width)
    if room <= 0 or len(kept) == 0:
        return kept[:0], np.zeros(0)
    if len(kept) > room:
        kept = kept[np.linspace(0, len(kept) - 1, room).astype(int)]
    low, high = ends[0] + width / 2, ends[1] - width / 2
    places = spread(np.clip(wanted[kept], low, high), width)
    index = np.arange(len(places))
    places = np.maximum(places, low + index * width)
    places = np.minimum(places, high - index[::-1] * width)
    near = np.abs(places - wanted[kept]) <= MAX_SHIFT * width
    return kept[near], places[near]
