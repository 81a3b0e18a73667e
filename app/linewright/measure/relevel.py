"""The pseudo-continuum once more, with the fitted features taken out.

In crowds few samples are free of lines and the level of a block is drawn down a little.
Divided by the fitted features, the samples scatter about the level as noise does: whatever
the fits left is seen by the same mixture that found the level at first.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .continuum import ROUGH, smooth_run
from .groups import backgrounds
from .level import SAMPLES, block_levels
from .prepare import Prepared, nodes_of

CROWDED = 0.4  # share of samples with a fitted feature over them that asks for it
OVER = 0.5  # sigmas of a feature at a sample that count
DEEP = 0.5  # depth of the model beyond which a sample says little about the level
EAGER = 1.8  # the fits hide part of the error of the level: a third comes out in one round
MISFIT = 1.6  # reduced chi-square beyond which the fits leave more than noise behind
MOST = 0.03  # largest change of the level


def relevelled(ready: Prepared, found, fitted) -> Prepared | None:
    """The segment under the corrected continuum; None where the first one serves.

    found, fitted: the features and their fits, as ``segment_features`` has them.
    """
    t = ready.trace
    _, model = backgrounds(t, fitted.params, found.own)
    busy = np.abs(model[t.good]) > OVER * t.noise[t.good]
    shapeless = np.nanmedian(fitted.misfit) if len(fitted.misfit) else np.inf
    if busy.mean() < CROWDED or shapeless > MISFIT:
        return None
    usable = t.good & (np.abs(model) < DEEP)
    return under_level(ready, model, usable, 0.0, EAGER)


def under_level(ready: Prepared, model, usable, share: float, eager: float) -> Prepared:
    """The segment under the level of ``usable`` samples (n,) divided by 1 - ``model`` (n,).

    share: of a block's samples that must be usable, or its level stays; eager: power of
    the change.
    """
    t, last = ready.trace, ready.level
    change, error = _change(ready, model, usable, share)
    level = last.level * change**eager
    run = smooth_run(t.wave, last.centre, level)
    ratio = last.run / run
    y, noise = 1.0 - (1.0 - t.y) * ratio, t.noise * ratio
    error = np.maximum(last.error, error)
    trace = replace(t, y=y, noise=noise, level_err=np.interp(t.wave, last.centre, error))
    new = replace(last, level=level, error=error, run=run, y=y, noise=noise)
    return replace(ready, trace=trace, level=new, nodes=nodes_of(trace, new))


def _change(ready, model, usable, share: float) -> tuple[np.ndarray, np.ndarray]:
    """(factor, its error) for every node of the continuum, each (k,)."""
    t, last = ready.trace, ready.level
    middle = 0.5 * (last.centre[1:] + last.centre[:-1])
    block = np.searchsorted(middle, t.wave)
    rest = (1.0 - t.y) / (1.0 - model)
    noise = t.noise / (1.0 - model)
    change, error = np.ones(len(last.centre)), np.zeros(len(last.centre))
    probs = (np.arange(SAMPLES) + 0.5) / SAMPLES
    members = [np.flatnonzero(usable & (block == k)) for k in range(len(change))]
    whole = np.bincount(block[t.good], minlength=len(change))
    rows = [k for k, m in enumerate(members) if len(m) >= max(40, share * whole[k])]
    if not rows:
        return change, error
    samples = np.array([np.quantile(rest[members[k]], probs) for k in rows])
    sigma = np.array([np.hypot(np.median(noise[members[k]]), ROUGH) for k in rows])
    length = 1.0 + 2.0 * t.correlation[1:].sum()
    weight = np.array([len(members[k]) / length / SAMPLES for k in rows])
    found, error[rows] = block_levels(samples, sigma, weight)
    change[rows] = np.clip(found, 1.0 - MOST, 1.0 + MOST)
    return change, np.minimum(error, MOST)
