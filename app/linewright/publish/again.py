"""The table of a repeat measurement: both spectra's numbers, differences and errors."""

from __future__ import annotations

import numpy as np

from ..job.again import Again
from ..session.model import Session
from ..spectra.medium import to_medium
from .columns import AGAIN
from .ledger import KINDS, metadata, table_of, words_once

TWICE = ("wave", "depth", "fwhm", "ew")


def again_table(session: Session, again: Again):
    """One row a feature of the session, in its order; masked where the second shows nothing.

    Wavelengths are in the first spectrum's medium; the second's have the velocity between
    the two taken out. Metadata: that of the Ledger, with ``second_*`` for the other spectrum.
    """
    f, g, claims = session.features, again.differences.features, session.claims
    factor, medium = again.factor, session.spectrum.medium
    columns = {
        "feature": f.number, "segment": f.segment, "kind": [KINDS[int(s)] for s in f.sign],
        "species": [c.species for c in claims], "standing": [c.standing for c in claims],
        "flags": [words_once(f"{own} {c.flags}") for own, c in zip(f.flags, claims, strict=True)],
        "flags_again": [words_once(w) for w in g.flags], "significance_again": g.significance,
    }
    seen = np.isfinite(g.depth)
    for name in TWICE:
        scale = factor if name in ("wave", "fwhm", "ew") else 1.0
        second = np.where(seen, getattr(g, name) / scale, np.nan)
        columns[name], columns[f"{name}_err"] = getattr(f, name), getattr(f, f"{name}_err")
        columns[f"{name}_again"] = second
        columns[f"{name}_again_err"] = np.where(seen, getattr(g, f"{name}_err") / scale, np.nan)
        columns[f"{name}_diff"] = np.where(seen, getattr(again.differences, name), np.nan)
        columns[f"{name}_diff_err"] = np.where(
            seen, getattr(again.differences, f"{name}_err"), np.nan)
    for name in ("wave", "wave_again"):
        columns[name] = to_medium(columns[name], medium)
    table = table_of(AGAIN, columns, metadata(session))
    table.meta.update(
        second_spectrum=again.name, second_sha256=again.sha256, second_medium=again.medium,
        second_frame=again.frame, second_velocity_kms=again.velocity,
        second_velocity_err_kms=None if np.isnan(again.velocity_err) else again.velocity_err,
    )
    return table
