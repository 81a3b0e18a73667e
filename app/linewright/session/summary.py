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
    """Features by standing, velocity and temperature, one a line."""
    counts = Counter(claim.standing for claim in session.claims)
    standings = ", ".join(f"{counts[s]} {s}" for s in STANDINGS if counts[s])
    lines = [f"{len(session.features)} features" + (f": {standings}" if standings else "")]
    lines.append(velocity_words(session))
    if math.isfinite(session.temperature_k):
        lines.append(f"excitation temperature {session.temperature_k:.0f} K")
    return "\n".join(lines)
