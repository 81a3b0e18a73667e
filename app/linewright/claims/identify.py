"""From a feature table to claims: velocity, temperature, mixture, Roll call, Orphans."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from functools import partial

import numpy as np

from ..lines.catalogue import NOMINAL
from ..lines.strengths import abundance_vector, absorption_strength
from ..progress import Progress
from ..spectra.medium import C_KM_S
from .banded import capped
from .between import shared_between
from .build import build_claims
from .components import Found, find_components, refined, settled
from .artefacts import spikes_aside, with_spikes
from .consistency import flagged
from .drift import drift_warning
from .entries import group_half_width
from .features_in import feature_data
from .mixture import Solution, solve_mixture
from .model import Claim, Orphan, RollRow, VelocityResult
from .options import ClaimOptions
from .orphans import rank_orphans
from .populations import EMITTED, OUTFLOW
from .populations import HYDROGEN, POPULATIONS, STELLAR, UNGRADED, Component, assemble
from .problem import Problem
from .profiles import shape_warning, shaped
from .readings import Claimed, TemperatureReading, nominal, read_temperatures
from .roll_call import call_roll
from .siblings import with_siblings
from .strength_errors import UNKNOWN_ERROR
from .temperature import Profile, electron_pressure, prior_log, profile
from .upper_limits import with_limits

LIKELY_DENSITY = 0.5  # features per Angstrom assumed behind a table that is not complete
PROFILE_ROUNDS = 5
NOMINAL_SLOPE = 0.7  # of measured against predicted strength, where the latter is assumed
USUAL_LOOKS = 9.0  # at a profile: sets the pace of its progress
AGAIN_ROUNDS = 6  # at most, after a person's word


@dataclass(frozen=True, eq=False)
class Identification:
    """What the engine says of one feature table; ``read_temperatures()`` reads them all."""

    claims: tuple[Claim, ...]
    velocity: VelocityResult
    components: tuple[Component, ...]
    temperature: float
    log_pe: float
    roll_call: tuple[RollRow, ...]
    orphans: tuple[Orphan, ...]
    warnings: tuple[str, ...]
    solution: object
    catalogue: object = None
    read_temperatures: Callable[[], tuple[TemperatureReading, ...]] = tuple
    weighing: object = None

    def shown(self) -> tuple[tuple[str, float, float], ...]:
        """(origin, km/s, error) of the components that explain at least one feature, and of
        the star; hydrogen, emission and wind count as the star's: a second stellar velocity
        is a second star."""
        named = [c for c in self.claims if c.probability >= 0.5 and c.candidates]
        used = {(c.origin, c.candidates[0].velocity) for c in named}
        star = {("stellar", c.velocity) for c in self.components if c.population == STELLAR}
        origins = {c.origin for c in named}
        nebula = {(c.origin, c.velocity) for c in self.components if c.ions and c.origin in origins}
        rows = [
            (c.origin, c.velocity, c.error)
            for c in self.components
            if c.population not in (HYDROGEN, EMITTED, OUTFLOW)
            and (c.origin, c.velocity) in used | star | nebula
        ]
        return tuple(dict.fromkeys(rows))


class Setting:
    """The fixed part of an identification: features, catalogue rows in reach, options."""

    def __init__(self, features, catalogue, coverage, options: ClaimOptions):
        self.said = None
        self.features, self.options = features, options
        self.segments = overlapping_segments(features)
        self.data = feature_data(features, len(self.segments) > 1)
        self.coverage = np.asarray(coverage, dtype=float).reshape(-1, 2)
        low, high = options.velocity_range
        reach = max(abs(low), abs(high), abs(options.velocity or 0.0)) / C_KM_S + 1e-4
        self.catalogue = _allowed(
            catalogue.between(
                self.coverage[0, 0] / (1 + reach) - 3, self.coverage[-1, 1] / (1 - reach) + 3
            ),
            options.species,
        )
        count = [int(np.sum(features.sign > 0)), int(np.sum(features.sign < 0))]
        if not options.complete:
            length = float(np.sum(self.coverage[:, 1] - self.coverage[:, 0]))
            count[0] = max(count[0], int(LIKELY_DENSITY * length))
        self.counts = tuple(count)

    def absorption(self, temperature: float, pressure: float = 0.0):
        """Absorption strengths of the catalogue rows at a temperature in K; pressure: dex off
        the usual or given log Pe."""
        o = self.options
        pe = electron_pressure(temperature) if o.log_pe is None else o.log_pe
        pe = pe + pressure
        return absorption_strength(
            self.catalogue, temperature, pe, o.metallicity, dict(o.abundances)
        )

    def claimed(self, solution, temperature: float) -> Claimed:
        """A solution at a temperature (K), for the readings."""
        o = self.options
        level = abundance_vector(o.metallicity, dict(o.abundances))
        return Claimed(solution, self.catalogue, self.features, temperature, o.log_pe, level)

    def problem(self, components, temperature: float, pressure: float = 0.0) -> Problem:
        entries = assemble(
            self.catalogue,
            self.absorption(temperature, pressure),
            components,
            (self.coverage, self.counts, self.segments),
        )
        return Problem(
            self.data,
            entries,
            self.coverage,
            self.options.complete,
            group_half_width(self._width_at(entries.wave)),
            len(POPULATIONS),
            len(POPULATIONS) * len(self.catalogue.species_names),
            UNGRADED,
            self.said,
            strength_err=self._nominal(entries),
            loggf_err=np.nan_to_num(self.catalogue.loggf_err[entries.row], nan=UNKNOWN_ERROR),
        )

    def _nominal(self, entries):
        """Error of measured strengths, dex, that assumed strengths bring; (n,)."""
        assumed = (self.catalogue.flags[entries.row] & NOMINAL) > 0
        error = np.nan_to_num(self.catalogue.loggf_err[entries.row], nan=1.0)
        return np.where(assumed, NOMINAL_SLOPE * error, 0.0)

    def _width_at(self, wave):
        """Typical narrow FWHM (lower quartile of the features') scaled with wavelength."""
        known = np.isfinite(self.features.fwhm)
        if not np.any(known):
            return np.zeros(len(wave))
        relative = self.features.fwhm[known] / self.features.wave[known]
        return np.percentile(relative, 25) * np.asarray(wave)


def overlapping_segments(features):
    """Wavelength ranges (s, 2) of the features' segments; one endless range where none overlap.

    A line may show again in an overlapping order, so each order gets entries of its own.
    """
    endless = np.array([[-np.inf, np.inf]])
    count = int(features.segment.max(initial=0)) + 1
    ranges = np.full((count, 2), np.nan)
    for i in range(count):
        waves = features.wave[features.segment == i]
        if len(waves):
            ranges[i] = waves.min() - 1.0, waves.max() + 1.0
    used = ranges[np.isfinite(ranges[:, 0])]
    used = used[np.argsort(used[:, 0], kind="stable")]
    overlap = np.any(used[1:, 0] < used[:-1, 1]) if len(used) > 1 else False
    return np.nan_to_num(ranges, nan=np.inf) if overlap else endless


def _allowed(catalogue, species):
    if not species:
        return catalogue
    wanted = [i for i, name in enumerate(catalogue.species_names) if name in species]
    return catalogue.take(np.isin(catalogue.species, wanted))


@dataclass(frozen=True, eq=False)
class Weighing:
    """What is settled before claims are made of it: components, temperature, marginals, and
    what reads the other temperatures when asked; bands: observed vacuum ranges of molecular
    bands that are seen."""

    setting: Setting
    found: Found
    temperature: float
    solution: Solution
    read_temperatures: Callable[[], tuple[TemperatureReading, ...]] = tuple
    bands: tuple[tuple[float, float], ...] = ()


def identify(
    features, coverage, catalogue, options=ClaimOptions(), progress=None, said=None
) -> Identification:
    """Weigh every feature against every predicted line in reach.

    features: FeatureTable; coverage: searched vacuum ranges [(low, high), ...] in the
    spectrum's frame; catalogue: LineCatalogue; options: ClaimOptions; said: a person's
    words per feature, (f,) species name indices, NOT_SAID or SET_ASIDE (problem.py).
    """
    progress = progress or Progress()
    if len(features) == 0:
        return _nothing(options)
    setting = Setting(features, catalogue, coverage, options)
    setting.said = with_spikes(features, said)
    return conclude(weigh(setting, progress.part(0.0, 0.9)), progress)


def weigh(setting: Setting, progress) -> Weighing:
    """Components, temperature and the mixture, in turn until they agree."""
    found = find_components(setting, progress.part(0.0, 0.3))
    temperature, readings = _temperature(setting, found, progress.part(0.3, 0.7))
    solution = solve_mixture(
        setting.problem(found.components, temperature), progress=progress.part(0.7, 0.85)
    )
    found = refined(setting, found, solution, temperature)
    solution = solve_mixture(
        setting.problem(found.components, temperature),
        progress=progress.part(0.85, 1.0),
        start=solution.state,
    )
    if any(c.log_ratio for c in found.components):
        found = settled(found, solution)
        solution = solve_mixture(
            setting.problem(found.components, temperature), start=solution.state
        )
    return Weighing(setting, found, temperature, solution, readings or _unasked(setting, solution))


def weigh_again(weighing: Weighing, said, progress=None) -> Weighing:
    """The weighing in the light of a person's words, (f,) as of ``identify``: components and
    temperature stand, and the mixture goes on from where it had settled."""
    problem = weighing.solution.problem
    words = with_spikes(weighing.setting.features, said)
    solution = solve_mixture(
        replace(problem, said=words), AGAIN_ROUNDS, progress, start=weighing.solution.state
    )
    return replace(weighing, solution=solution)


def conclude(weighing: Weighing, progress=None) -> Identification:
    """Claims, Roll call and Orphans out of a weighing."""
    setting, found = weighing.setting, weighing.found
    solution = shared_between(weighing.solution)
    features, catalogue, options = setting.features, setting.catalogue, setting.options
    claims = flagged(build_claims(solution, catalogue, found.components), solution)
    claims = shaped(features, spikes_aside(features, claims))
    claims = capped(claims, features, weighing.bands)
    if progress is not None:
        progress.report("calling the roll", 0.95)
    pressure = electron_pressure(weighing.temperature)
    return Identification(
        claims,
        found.velocity,
        found.components,
        weighing.temperature,
        pressure if options.log_pe is None else options.log_pe,
        with_limits(
            with_siblings(
                call_roll(solution, catalogue, found.components), solution, catalogue
            ),
            solution,
            catalogue,
        ),
        rank_orphans(features, claims, solution, catalogue),
        found.warnings + drift_warning(solution, found.components) + shape_warning(claims),
        solution,
        catalogue,
        weighing.read_temperatures,
        weighing,
    )


def _nothing(options: ClaimOptions) -> Identification:
    return Identification(
        (), VelocityResult(), (), float("nan"), float("nan"), (), (), ("no features",), None
    )


def _temperature(setting: Setting, found: Found, progress):
    """(temperature in K for the strengths, what gives all readings when asked, or None).

    The given or nominal temperature, or what the profile around the vote's best and the
    clean lines of its best mixture say together, in whole kelvin.
    """
    if setting.options.temperature is not None and found.has_star:
        return float(setting.options.temperature), None
    if setting.options.temperature is not None or not found.has_star:
        temperature = float(setting.options.temperature or found.temperature)
        return temperature, lambda: (nominal(temperature),)
    looks = _Looks(setting, found, progress)
    seen = looks.profiled(found.temperature)
    adopted = read_temperatures(seen, setting.claimed(looks.solution, looks.temperature), looks)
    return float(round(adopted.temperature)), lambda: adopted.readings


class _Looks:
    """Mixtures at temperatures tried; the best is kept with its temperature (K)."""

    def __init__(self, setting: Setting, found: Found, progress):
        self._setting, self._found, self._progress = setting, found, progress
        self._tried, self._best = 0, -np.inf
        self.solution, self.temperature = None, float("nan")

    def profiled(self, start: float, excess: float = 0.0) -> Profile:
        """The profile about ``start`` (K), with log Pe ``excess`` dex off the usual or given."""
        return profile(partial(self._value_at, excess=excess), start)

    def solved(self, temperature: float, excess: float) -> Solution:
        problem = self._setting.problem(self._found.components, temperature, excess)
        return solve_mixture(problem, PROFILE_ROUNDS)

    def _value_at(self, temperature: float, excess: float):
        """Log-likelihood by stretches of the spectrum."""
        self._progress.report("excitation temperature", min(self._tried / USUAL_LOOKS, 1.0))
        self._tried += 1
        solution = self.solved(temperature, excess)
        prior = prior_log(temperature, len(self._setting.features))
        if solution.log_likelihood + prior > self._best:
            self._best = solution.log_likelihood + prior
            self.solution, self.temperature = solution, temperature
        return solution.stretches + prior / len(solution.stretches)


def _unasked(setting: Setting, solution):
    """Reads the temperatures of claims made at a given one, should someone ask."""
    given = float(setting.options.temperature)
    read = partial(read_temperatures, given, setting.claimed(solution, given))
    return lambda: read().readings
