"""When and how the template's velocity takes over from the vote's."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..claims.model import VelocityResult
from ..claims.template import template_vote
from ..claims.temperature import COARSE, electron_pressure
from ..claims.velocity import typical_width
from ..lines.strengths import absorption_strength

WIDTH = 0.63  # of the typical width: features that blend are broader than lines
DEEPEST = 0.3  # deeper absorption counts as this: strong broad lines must not decide alone
VAGUE = 2.0  # errors of a declared vote: a template that says less leaves it its word
BLENDED = 40.0  # km/s: lines broader than this are blends (R below about 7,500)


def template_velocity(spectrum, measurement, catalogue, found, options) -> VelocityResult | None:
    """The template's velocity where lines blend; None where the vote is the better witness.

    found: the Identification by voting, whose temperature makes the template.
    """
    width = typical_width(measurement.features)
    emission = np.sum(measurement.features.sign < 0) > np.sum(measurement.features.sign > 0)
    if options.velocity is not None or width < BLENDED or emission:
        return None
    pieces = [_absorption(s, m) for s, m in zip(spectrum.segments, measurement.segments) if m]
    low = min(p[0][0] for p in pieces) * 0.995
    near = catalogue.between(low, max(p[0][-1] for p in pieces) * 1.005)
    tried = (found.temperature,) if found.velocity.declared else COARSE
    votes = []
    for t in tried:
        strength = absorption_strength(
            near, t, electron_pressure(t), options.metallicity, dict(options.abundances)
        )
        votes.append(template_vote(pieces, near, strength, WIDTH * width, options.velocity_range))
    vote = max(votes, key=lambda v: float(np.max(v.score)))
    vague = found.velocity.declared and vote.error > VAGUE * found.velocity.error
    if not vote.declared or vague:
        return None
    return VelocityResult(
        vote.velocity, vote.error, vote.margin, True, vote.rivals, vote.grid, vote.score, "template"
    )


def _absorption(segment, measured):
    """(wave, 1 - flux/continuum) of the measured range, with NaN where the sample must not be
    used; emission and spikes are clipped."""
    ends = measured.node_wave[0], measured.node_wave[-1]
    kept = slice(*np.searchsorted(segment.wave, [ends[0], np.nextafter(ends[1], np.inf)]))
    wave, flux, mask = segment.wave[kept], segment.flux[kept], segment.mask[kept]
    depth = 1.0 - flux / measured.continuum_at(wave)
    return wave, np.where(mask, np.nan, np.clip(depth, -DEEPEST / 2, DEEPEST))


def disagreement(vote: VelocityResult, template: VelocityResult) -> tuple[str, ...]:
    """A sentence with both velocities, always shown where both apply."""
    gap = abs(vote.velocity - template.velocity)
    error = float(np.hypot(vote.error, template.error))
    words = "agree" if gap < 3 * error else "disagree"
    return (
        f"voting gives {vote.velocity:+.1f} +- {vote.error:.1f} km/s, the template "
        f"{template.velocity:+.1f} +- {template.error:.1f} km/s: they {words}; the template's "
        "is used, since lines blend",
    )


def at_velocity(claim_options, template: VelocityResult):
    """Claim options that hold the template's velocity."""
    return replace(claim_options, velocity=template.velocity)


