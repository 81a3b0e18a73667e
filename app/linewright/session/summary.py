"""A session in a few lines of words."""

from __future__ import annotations

import math
from collections import Counter

from .model import STANDINGS, Session


def velocity_words(session: Session) -> str:
    """The velocity with its error and whether it may be relied on."""
    found = session.velocity
    if not math.isfinite(found.velocity):
        return "velocity not found"
    error = f" +- {found.error:.3f}" if math.isfinite(found.error) else ""
    text = f"velocity {found.velocity:+.3f}{error} km/s ({found.how})"
    if found.declared or found.how == "given":
        return text
    rivals = ", ".join(f"{velocity:+.1f}" for velocity, _ in found.rivals[:3])
    return f"{text}, not certain" + (f"; rivals {rivals}" if rivals else "")


def summary(session: Session) -> str:
    """Features by standing, velocities, temperature and the significance cut, one a line."""
    counts = Counter(claim.standing for claim in session.claims)
    standings = ", ".join(f"{counts[s]} {s}" for s in STANDINGS if counts[s])
    lines = [f"{len(session.features)} features" + (f": {standings}" if standings else "")]
    lines.append(velocity_words(session))
    lines += _second_star(session)
    if math.isfinite(session.temperature_k):
        lines.append(f"excitation temperature {session.temperature_k:.0f} K")
    cut, false = (session.measurement.get(k) for k in ("threshold", "expected_false"))
    if cut is not None:
        lines.append(f"significance cut {cut:.2f}: {false:.1f} false features expected")
    return "\n".join(lines)


def _second_star(session: Session) -> list[str]:
    stars = [(v, e) for origin, v, e in session.components if origin == "stellar"]
    return [f"second star at {v:+.3f} +- {e:.3f} km/s" for v, e in stars[1:]]
