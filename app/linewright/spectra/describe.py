"""What was understood of a spectrum: plain data for JSON, plain words for people."""

from __future__ import annotations

import math
from pathlib import Path

import numpy as np

from .coverage import gaps
from .medium import to_medium
from .spectrum import Spectrum


def masked_count(spectrum: Spectrum) -> int:
    """Samples that must not be used."""
    return int(sum((s.mask | ~np.isfinite(s.flux)).sum() for s in spectrum.segments))


def own_gaps(spectrum: Spectrum) -> list[list[float]]:
    """Gaps as [low, high], Angstrom in the spectrum's own medium."""
    return [[round(float(x), 4) for x in to_medium(np.array(g), spectrum.medium)]
            for g in gaps(spectrum)]


def describe(spectrum: Spectrum) -> dict:
    """The keys of ``inspect --json``, plain JSON values, wavelengths in the own medium."""
    low, high = spectrum.own_range()
    errors = [s.uncertainty is not None for s in spectrum.segments]
    return {
        "file": spectrum.path,
        "layout": spectrum.layout,
        "segments": len(spectrum.segments),
        "samples": spectrum.samples,
        "range": [round(low, 6), round(high, 6)],
        "medium": spectrum.medium,
        "medium_from": spectrum.medium_from,
        "frame": spectrum.frame,
        "frame_from": spectrum.frame_from,
        "corrections": list(spectrum.corrections),
        "flux_unit": spectrum.flux_unit,
        "uncertainty": "per sample" if all(errors) else "some segments" if any(errors)
        else "none",
        "masked": masked_count(spectrum),
        "gaps": own_gaps(spectrum),
        "warnings": list(spectrum.warnings),
        "read_options": _plain(spectrum.read_options),
        "observer_velocity": None if np.isnan(spectrum.observer_velocity)
        else spectrum.observer_velocity,
        "observation": _observation(spectrum.observation),
    }


def _plain(options: dict) -> dict:
    return {k: list(v) if isinstance(v, tuple) else v for k, v in options.items()}


def _observation(seen) -> dict | None:
    """Place, star and time as plain values; None where nothing is known."""
    if seen is None or not seen.sources:
        return None
    site, known = seen.site, math.isfinite(seen.ra)
    return {
        "site": None if site is None else site.in_words(),
        "ra": seen.ra if known else None,
        "dec": seen.dec if known else None,
        "jd": None if seen.time is None else seen.time[0] + seen.time[1],
        "time_scale": seen.scale,
        "sources": list(seen.sources),
        "missing": list(seen.missing()),
    }


def _earth_words(spectrum: Spectrum) -> str:
    """What is known of the observer's motion: the number applied, or what one would need."""
    if np.isfinite(spectrum.observer_velocity):
        return f"telluric and sky lines must stand at {spectrum.observer_velocity:+.2f} km/s"
    if spectrum.frame in ("topocentric", "geocentric"):
        missing = spectrum.observation.missing() if spectrum.observation else ("everything",)
        return "telluric and sky lines must stand at 0 km/s; 'linewright correct' " + (
            "knows the correction" if not missing else f"still needs {', '.join(missing)}")
    return "where telluric lines must stand is not known"


def _gap_words(found: list[list[float]]) -> str:
    if not found:
        return "none"
    shown = ", ".join(f"{low:.2f}-{high:.2f}" for low, high in found[:6])
    return f"{len(found)}: {shown}" + (", ..." if len(found) > 6 else "")


def in_words(spectrum: Spectrum) -> str:
    """The same for the terminal, one fact a line."""
    facts = describe(spectrum)
    low, high = facts["range"]
    lines = [
        ("file", Path(facts["file"]).name + (f" ({spectrum.name})" if spectrum.name else "")),
        ("layout", facts["layout"]),
        ("samples", f"{facts['samples']} in {facts['segments']} segment"
         + ("s" if facts["segments"] > 1 else "")),
        ("range", f"{low:.3f} to {high:.3f} Angstrom, medium {facts['medium']}"),
        ("medium", f"{facts['medium']} ({facts['medium_from']})"),
        ("frame", f"{facts['frame']} ({facts['frame_from']})"),
        ("corrections", "; ".join(facts["corrections"]) or "none known"),
        ("Earth", _earth_words(spectrum)),
        ("flux unit", facts["flux_unit"] or "not stated"),
        ("uncertainty", facts["uncertainty"]),
        ("masked", f"{facts['masked']} samples"),
        ("gaps", _gap_words(facts["gaps"])),
    ]
    lines += [("warning", w) for w in facts["warnings"]]
    return "\n".join(f"{name + ':':<13}{text}" for name, text in lines)
