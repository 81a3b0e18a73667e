"""Which velocity components a spectrum shows, and the declared velocity."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from . import ion_velocities
from .gas import find_clouds, find_emission
from .model import VelocityResult
from .populations import HYDROGEN, NEBULAR, SKY, STELLAR, TELLURIC, Component
from .temperature import COARSE
from .second_star import find_second_star
from .velocity import (
    ORDINARY_SHIFT,
    emission_vote,
    refine,
    scattered_vote,
    stellar_vote,
    telluric_vote,
    typical_width,
)
from .voting import DECLARE_MARGIN, Vote

GIANT = -1.0  # dex of log Pe by which giants lie below dwarfs of their temperature, about
BROAD_ERROR = 2.0  # km/s: pressure shifts and asymmetric wings of hydrogen and helium


@dataclass(frozen=True, eq=False)
class Found:
    """Components, the velocity with its margin, and the vote's best temperature (K)."""

    components: tuple[Component, ...]
    velocity: VelocityResult
    temperature: float
    has_star: bool
    warnings: tuple[str, ...] = ()


def find_components(setting, progress) -> Found:
    """Votes for star, nebula and telluric lines; what was given is not searched."""
    f, o = setting.features, setting.options
    star, temperature = _star(setting, progress)
    nebula = emission_vote(f, setting.catalogue, o.velocity_range)
    main, how = _main(setting, star, nebula)
    warnings = _doubts(main, how)
    components = []
    sure = _certainty(main)
    starry = sure if how != "emission" else _certainty_at(star, main.velocity)
    if np.any(f.sign > 0):
        components.append(Component(STELLAR, main.velocity, certainty=starry))
        components.append(Component(HYDROGEN, main.velocity, certainty=starry))
    if np.any(f.sign < 0):
        certain = max(sure, nebula.certainty)
        velocity = _emission_velocity(nebula, main)
        ions = ion_velocities.unknown(setting.catalogue)
        components.append(Component(NEBULAR, velocity, certainty=certain, ions=ions))
        components.append(Component(SKY, 0.0, 0.5 if o.frame == "topocentric" else 15.0))
    telluric = telluric_vote(f, setting.catalogue, o.frame, o.velocity_range)
    # A table without coverage cannot refute telluric lines: only a clear vote brings them in.
    if np.isfinite(telluric.velocity) and (o.complete or telluric.declared):
        components.append(_telluric(telluric, o.frame, typical_width(f)))
    has_star = bool(components) and components[0].population == STELLAR and starry > 0.5
    if not has_star:
        warnings += ("no stellar absorption spectrum seen: the temperature is nominal",)
    return Found(tuple(components), main, temperature, has_star, warnings)


def _star(setting, progress) -> tuple[Vote, float]:
    """The best vote over temperatures and that temperature."""
    o = setting.options
    tried = COARSE if o.temperature is None else (o.temperature,)
    best, best_t = None, tried[0]
    for i, t in enumerate(tried):
        progress.report("voting on the velocity", i / len(tried))
        result = _vote_at(setting, t)
        if best is None or result.score.max() > best.score.max() + 3.0:
            best, best_t = result, t
    return best, float(best_t)


def _vote_at(setting, temperature: float) -> Vote:
    """The star's vote at a temperature in K."""
    f, o, absorption = setting.features, setting.options, setting.absorption(temperature)
    if o.complete:
        return stellar_vote(f, setting.catalogue, absorption, o.velocity_range)
    strengths = [absorption]
    if o.log_pe is None:
        strengths.append(setting.absorption(temperature, GIANT))
    return scattered_vote(f, setting.catalogue, strengths, o.velocity_range, setting.counts[0])


def _main(setting, star: Vote, nebula: Vote):
    """The vote that speaks for the object: the clearer of absorption and emission."""
    o = setting.options
    if o.velocity is not None:
        vote = _clearer(star, nebula)
        given = VelocityResult(
            float(o.velocity), 0.0, vote.margin, True, vote.rivals, vote.grid, vote.score, "given"
        )
        return given, "given"
    chosen = _clearer(star, nebula)
    how = "emission" if chosen is nebula else "absorption"
    result = VelocityResult(
        chosen.velocity,
        chosen.error,
        chosen.margin,
        chosen.declared,
        chosen.rivals,
        chosen.grid,
        chosen.score,
        "voting",
    )
    return result, how


def _clearer(star: Vote, nebula: Vote) -> Vote:
    """The vote with the larger margin among those that had voters."""
    if not np.isfinite(nebula.velocity):
        return star
    if not np.isfinite(star.velocity):
        return nebula
    return star if star.margin >= nebula.margin else nebula


def _emission_velocity(nebula: Vote, main: VelocityResult) -> float:
    return nebula.velocity if nebula.declared else main.velocity


def _telluric(vote: Vote, frame: str, width: float) -> Component:
    """Where telluric lines stand; wide while the vote is not clear.

    Lines broader than ORDINARY_SHIFT blend whole bands: their vote is biased, and the
    observer's frame is the better guess.
    """
    if frame in ("topocentric", "geocentric"):
        return Component(TELLURIC, vote.velocity if vote.declared else 0.0, 0.5)
    if width > ORDINARY_SHIFT:
        return Component(TELLURIC, 0.0, ORDINARY_SHIFT / 2)
    error = vote.error if vote.declared else 3.0
    return Component(TELLURIC, vote.velocity, error, certainty=vote.certainty)


def _certainty(main: VelocityResult) -> float:
    if main.declared or main.how == "given":
        return 1.0
    return float(1.0 - np.exp(-0.5 * max(main.margin, 0.0)))


def _certainty_at(vote: Vote, velocity: float) -> float:
    """Certainty that the voters' lines stand at a velocity known from elsewhere: their
    log-likelihood there over chance, with no trials to pay for."""
    if not np.isfinite(vote.velocity):
        return 0.0
    near = np.abs(vote.grid - velocity) <= 2 * max(vote.width, vote.grid[1] - vote.grid[0])
    gain = float(np.max(vote.score[near], initial=0.0))
    return 1.0 if gain >= DECLARE_MARGIN else float(1.0 - np.exp(-0.5 * max(gain, 0.0)))


def _doubts(main: VelocityResult, how: str) -> tuple[str, ...]:
    if how == "given" or main.declared:
        return ()
    if not np.isfinite(main.velocity):
        return ("too few features to find a velocity",)
    return (
        f"velocity {main.velocity:+.1f} km/s is not declared: its margin {main.margin:.1f} "
        f"over the best rival is below {DECLARE_MARGIN:.0f}",
    )


def refined(setting, found: Found, solution, temperature: float) -> Found:
    """Velocities corrected by confident claims; a second star and interstellar clouds
    looked for among what is left unexplained."""
    components, velocity = [], found.velocity
    given = setting.options.velocity is not None
    for i, component in enumerate(found.components):
        shift, error = refine(solution, i)
        fixed = given and component.population in (STELLAR, NEBULAR)
        if np.isfinite(error) and not fixed:
            component = replace(component, velocity=component.velocity + shift, error=error)
        if component.ions is not None:
            ions = ion_velocities.learned(setting.catalogue, solution, i, component.velocity)
            component = replace(component, ions=ions)
        components.append(component)
    components = _tie_hydrogen(components if given else _with_hydrogen(components))
    main = _spokesman(found, solution)
    if main is not None and found.velocity.how != "given":
        chosen = components[main]
        if chosen.error > 0:
            velocity = replace(velocity, velocity=chosen.velocity, error=chosen.error)
    star = next((c for c in components if c.population == STELLAR), None)
    second = [] if star is None else find_second_star(setting, solution, star, temperature)
    if second:
        components += second
    elif velocity.declared or velocity.how == "given":
        # While the star's velocity is open, resonance lines elsewhere may be its own.
        components += find_clouds(setting, solution, velocity.velocity)
    if star is not None and not second:
        components = find_emission(setting, solution, components, star)
    return replace(found, components=tuple(components), velocity=velocity)


def _spokesman(found: Found, solution) -> int | None:
    """The stellar or nebular component with most confident claims."""
    sure = solution.probability > 0.8
    owner = solution.problem.entries.component[solution.entry[sure]]
    counts = np.bincount(owner, minlength=len(found.components))
    usable = [i for i, c in enumerate(found.components) if c.population in (STELLAR, NEBULAR)]
    best = max(usable, key=lambda i: counts[i], default=None)
    return best if best is not None and counts[best] > 0 else None


def _with_hydrogen(components: list[Component]) -> list[Component]:
    """The star's velocity with what its broad lines say: where metal lines are few or blended,
    as in an A star at low resolution, those are the better witnesses."""
    broad = next((c for c in components if c.population == HYDROGEN), None)
    star = next((c for c in components if c.population == STELLAR), None)
    if broad is None or star is None or not (broad.error > 0 and star.error > 0):
        return components
    weights = star.error**-2, 1.0 / (broad.error**2 + BROAD_ERROR**2)
    velocity = float(np.average((star.velocity, broad.velocity), weights=weights))
    joined = replace(star, velocity=velocity, error=float(np.sum(weights) ** -0.5))
    return [joined if c is star else c for c in components]


def _tie_hydrogen(components: list[Component]) -> list[Component]:
    """Broad lines stand at the star's velocity, but their centroids are worse known."""
    star = next((c for c in components if c.population == STELLAR), None)
    if star is None:
        return components
    return [
        replace(c, velocity=star.velocity, error=max(star.error, BROAD_ERROR))
        if c.population == HYDROGEN
        else c
        for c in components
    ]


def settled(found: Found, solution) -> Found:
    """Both stars' velocities corrected once each has its own lines."""
    components = []
    for i, component in enumerate(found.components):
        shift, error = refine(solution, i)
        if component.population == STELLAR and np.isfinite(error):
            component = replace(component, velocity=component.velocity + shift, error=error)
        components.append(component)
    star = next(c for c in components if c.population == STELLAR)
    velocity = replace(found.velocity, velocity=star.velocity, error=star.error)
    return replace(found, components=tuple(components), velocity=velocity)
