"""Features that are no lines: spikes narrower than the instrument lets through."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from .added_rows import BAND, CORE, flagged_as
from .problem import NOT_SAID, SET_ASIDE

SPIKE = "spike"


def is_spike(features):
    """True where the measurement flagged a feature as a spike; shape (f,)."""
    return np.array([SPIKE in flags.split() for flags in features.flags], dtype=bool)


def is_no_line(features):
    """True where a feature is not for the lines to explain: a spike, or a row that claims added."""
    return flagged_as(features, (SPIKE, BAND, CORE))


def with_spikes(features, said):
    """A person's words with the spikes set aside where they said nothing; None if nothing is
    to be said."""
    spikes = is_no_line(features)
    if said is None and not np.any(spikes):
        return None
    words = np.full(len(features), NOT_SAID) if said is None else np.array(said)
    return np.where(spikes & (words == NOT_SAID), SET_ASIDE, words)


def spikes_aside(features, claims):
    """Claims on spikes stand as set aside, origin artefact."""
    spikes = is_spike(features)
    return tuple(
        replace(
            claim,
            standing="set aside",
            origin="artefact",
            flags=SPIKE,
            species="",
            candidates=(),
            blend=(),
        )
        if spike
        else claim
        for claim, spike in zip(claims, spikes)
    )
