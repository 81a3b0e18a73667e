"""Ledger, Roll call and Orphans as astropy tables.

Columns, order, units and descriptions are those of ``columns``; what is absent is masked,
never zero. Wavelengths are in the spectrum's own medium and frame.
"""

from __future__ import annotations

import math

import numpy as np

from ..claims.profiles import peaks_seen, separation
from ..errors import InputRefused
from ..job.view_width import widths_of
from ..session.model import Claim, Session
from ..spectra.medium import C_KM_S, to_medium
from .columns import LEDGER, ORPHANS, ROLL_CALL, Column

KINDS = {1: "absorption", -1: "emission"}


def session_table(session: Session, what: str):
    """The table called 'ledger', 'rollcall' or 'orphans'; InputRefused for another name."""
    makers = {
        "ledger": ledger_table,
        "rollcall": rollcall_table,
        "orphans": orphans_table,
    }
    if what not in makers:
        raise InputRefused(f"table '{what}'", "no such table", f"use {', '.join(makers)}")
    return makers[what](session)


def ledger_table(session: Session):
    """The Ledger: one row a feature component, in the session's order."""
    features = session.features
    columns = {name: getattr(features, name) for name in _MEASURED}
    columns["feature"] = features.number
    columns["kind"] = [KINDS[int(s)] for s in features.sign]
    columns["wave"] = to_medium(features.wave, session.spectrum.medium)
    columns["flags"] = [
        words_once(f"{own} {claim.flags}")
        for own, claim in zip(features.flags, session.claims, strict=True)
    ]
    columns["blend"] = [blend_text(claim, session.spectrum.medium) for claim in session.claims]
    columns |= {name: [getattr(c, name) for c in session.claims] for name in _CLAIMED}
    columns |= _lines(session)
    widths = widths_of(session)
    columns["fwhm_intrinsic"], columns["fwhm_intrinsic_err"] = widths.intrinsic, widths.intrinsic_err
    columns["fwhm_instrument"] = widths.instrument
    columns |= _peaks(session)
    meta = metadata(session) | {"instrument_width_from": widths.source}
    return table_of(LEDGER, columns, meta)


_MEASURED = (
    "segment", "component", "wave_err", "significance", "depth", "depth_err",
    "fwhm", "fwhm_err", "ew", "ew_err",
)  # fmt: skip
_CLAIMED = (
    "species", "probability", "p_line", "p_unlisted", "standing", "by", "origin",
    "runner_up", "note",
)  # fmt: skip


def _peaks(session: Session) -> dict:
    """Distance and height ratio of double peaks, NaN elsewhere."""
    seen = peaks_seen(session.features, session.claims)
    numbers = np.full((len(session.features), 4), math.nan)
    for row, peaks in seen.items():
        numbers[row] = *separation(peaks), peaks.ratio, peaks.ratio_err
    names = ("peak_separation", "peak_separation_err", "peak_ratio", "peak_ratio_err")
    return dict(zip(names, numbers.T))


def words_once(text: str) -> str:
    """The words of a text, each once, in order."""
    return " ".join(dict.fromkeys(text.split()))


def blend_text(claim: Claim, medium: str) -> str:
    """Other contributors as 'species wavelength share; ...', wavelengths in ``medium``."""
    parts = []
    for species, wave, share in claim.blend:
        own = float(to_medium(wave, medium))
        numbers = [f"{own:.3f}"] if math.isfinite(own) else []
        numbers += [f"{share:.2f}"] if math.isfinite(share) else []
        parts.append(" ".join([species, *numbers]))
    return "; ".join(parts)


def _lines(session: Session) -> dict:
    """Columns of the claimed lines; velocity by vacuum wavelengths (the contract's formula)."""
    lines = [claim.line for claim in session.claims]

    def column(name: str) -> np.ndarray:
        return np.array([math.nan if x is None else getattr(x, name) for x in lines], dtype=float)

    lab, lab_err = column("wave"), column("wave_err")
    ratio = session.features.wave / lab
    relative = np.hypot(session.features.wave_err / session.features.wave, lab_err / lab)
    return {
        "wave_lab": to_medium(lab, session.spectrum.medium),
        "wave_lab_err": lab_err,
        # single precision in the catalogue: digits beyond these are noise
        "e_low": np.round(column("e_low"), 6),
        "loggf": np.round(column("loggf"), 4),
        "velocity": C_KM_S * (ratio - 1.0),
        "velocity_err": C_KM_S * ratio * relative,
        "source": ["" if x is None else x.source for x in lines],
    }


def rollcall_table(session: Session):
    """The Roll call: one row a species."""
    rows = session.roll_call
    columns = {c.name: [getattr(row, c.name) for row in rows] for c in ROLL_CALL}
    limits = np.array([row.limit_wave for row in rows], dtype=float)
    columns["limit_wave"] = to_medium(limits, session.spectrum.medium)
    return table_of(ROLL_CALL, columns, metadata(session))


def open_orphans(session: Session) -> list:
    """Orphans nobody has named or set aside by hand since the machine listed them."""
    numbers = {int(n): row for row, n in enumerate(session.features.number)}
    return [
        orphan
        for orphan in session.orphans
        if orphan.feature in numbers and session.claims[numbers[orphan.feature]].by == "machine"
    ]


def orphans_table(session: Session):
    """The Orphans still open, with the wavelength at rest (masked where no velocity is known)."""
    orphans = open_orphans(session)
    features = session.features.take([session.index_of(o.feature) for o in orphans] or slice(0, 0))
    medium = session.spectrum.medium
    rest = features.wave / (1.0 + session.velocity.velocity / C_KM_S)
    names = ("segment", "wave_err", "significance", "depth", "fwhm", "ew")
    columns = {name: getattr(features, name) for name in names}
    columns |= {name: [getattr(o, name) for o in orphans] for name in _ORPHANED}
    columns["kind"] = [KINDS[int(s)] for s in features.sign]
    columns["wave"] = to_medium(features.wave, medium)
    columns["wave_rest"] = to_medium(rest, medium)
    return table_of(ORPHANS, columns, metadata(session))


_ORPHANED = ("feature", "p_unlisted", "nearest", "why")


def table_of(specification: tuple[Column, ...], columns: dict, meta: dict):
    """The astropy table of these columns, masked where nothing is known."""
    from astropy.table import Table

    table = Table(masked=True)
    for column in specification:
        table[column.name] = _masked(column, columns[column.name])
    table.meta.update(meta)
    return table


def _masked(column: Column, values):
    from astropy.table import MaskedColumn

    if column.kind == "text":
        data = np.array(values, dtype=str)
        mask = data == ""
    else:
        data = np.array(values, dtype=np.int64 if column.kind == "int" else float)
        mask = ~np.isfinite(data)
        data = np.where(mask, np.zeros_like(data), data)
    return MaskedColumn(data, mask=mask, unit=column.unit or None, description=column.description)


def metadata(session: Session) -> dict:
    """Table metadata of the contract; None where a number is not known.

    coverage: searched ranges in the spectrum's own medium, Angstrom
    temperatures: every one that was read, with its error, the adopted one first
    """
    reference = session.spectrum
    coverage = [
        [float(edge) for edge in to_medium(np.array(pair), reference.medium)]
        for pair in reference.coverage
    ]
    return {
        "medium": reference.medium,
        "frame": reference.frame,
        "velocity_kms": _known(session.velocity.velocity),
        "velocity_err_kms": _known(session.velocity.error),
        "temperature_k": _known(session.temperature_k),
        "coverage": coverage,
        "spectrum_sha256": reference.sha256,
        "linewright_version": session.version,
        "temperatures": [_reading(r) for r in session.temperatures],
    }


def _reading(reading) -> dict:
    """One temperature (or electron pressure) as plain data."""
    return {
        "label": reading.label,
        "value": _known(round(reading.value, 3)),
        "error": _known(round(reading.error, 3)),
        "unit": reading.unit,
        "used": reading.used,
        "note": reading.note,
    }


def _known(value: float) -> float | None:
    return float(value) if math.isfinite(value) else None
