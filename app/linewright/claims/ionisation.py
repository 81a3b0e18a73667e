"""Temperature and electron pressure together, from excitation and ionisation of all species.

Lines of all species stand on one curve of growth, as in ``growth.py``, but the species' levels
are not free: Boltzmann and Saha give them from the temperature, the electron pressure and the
abundances. So lines of one element in two stages, and of elements that stand 10 to 20 eV apart,
count as excitation does. What abundances, departures from LTE and log gf scales may add is fitted
along with a prior: an offset for each element and for each species (heavy-tailed, so that a
peculiar star's elements are let go), and a drift of log gf with excitation within species.

The layer is the one in which the cores of lines form, or, where lines are broader than they are
by themselves, the deeper one of their whole absorption: temperature and pressure are of that
layer, not the effective ones.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..lines.levels import ion_fractions_all, log_partition_all
from ..lines.species import parse_species
from .growth import (
    CLUSTER, CUT, DEGREE, LEAST_LINES, STEP, THETA_K, CleanLines, Regression, left_over, place, powers,
)  # fmt: skip
from .temperature import COOLEST, HOTTEST, electron_pressure

ELEMENT, STAGE = 0.15, 0.15  # dex: of abundances about the star's mean; of LTE, by species
DRIFT = 0.03  # dex per eV: of log gf scales within species (windows of the Sun then agree)
PRESSURE = 1.0  # dex: from dwarfs to giants about a dwarf's usual; common practice, no source
GIVEN_PRESSURE = 0.02  # dex, of one a person gave
FREEDOM = 3.0  # of the offsets' Student t
TURNS, RESCALE = 40, 4
FARTHEST, JUMP = 0.5, 0.1  # in ln T: from the start, and in one turn
DENSEST, THINNEST = 6.0, -5.0  # log10 electron pressure
NEAR = 1e-3  # of the numerical derivatives, in ln T and dex
STRETCHES = 8  # of the jackknife
RIDGE = 1e-9


@dataclass(frozen=True, eq=False)
class Balance:
    """temperature, error: K; log_pe, log_pe_err: log10 electron pressure, dyn cm-2
    slope: d(log_pe)/d(ln T) along which both may move together
    lines: number used; pairs: stages that meet, such as ('Fe I/II', 'Ti I/II')
    """

    temperature: float
    error: float
    log_pe: float
    log_pe_err: float
    slope: float
    lines: int
    pairs: tuple[str, ...]

    def less_sure(self, more: float) -> Balance:
        """The same with ``more`` K of error, in which the pressure shares."""
        rest = self.slope * more / self.temperature
        return replace(
            self,
            error=float(np.hypot(self.error, more)),
            log_pe_err=float(np.hypot(self.log_pe_err, rest)),
        )

    def pressure_at(self, temperature: float, error: float) -> tuple[float, float]:
        """(log_pe, its error) if the temperature is known from more than this (K)."""
        moved = self.slope * np.log(temperature / self.temperature)
        own = self.slope * self.error / self.temperature
        rest = max(self.log_pe_err**2 - own**2, 0.0)
        follows = self.slope * error / temperature
        return self.log_pe + float(moved), float(np.hypot(np.sqrt(rest), follows))


@dataclass(frozen=True, eq=False)
class Gas:
    """Where a fit begins: temperature (K), log_pe or None for a dwarf's, with ``fixed`` if a
    person gave it; level: (92,) log10 abundances by atomic number."""

    temperature: float
    log_pe: float | None
    level: np.ndarray
    fixed: bool = False


def fit_balance(lines: CleanLines, names, gas: Gas) -> Balance | None:
    """Temperature and electron pressure at which lines of all species agree best.

    names: species names by catalogue index. None where lines are too few or no minimum lies
    within FARTHEST of the start.
    """
    lines = lines.take(_known(lines.species, names, gas))
    if len(lines) < LEAST_LINES:
        return None
    model = _Model(lines, names, gas)
    parameters, keep, scatter = _solved(model)
    if not model.inside():
        return None
    variance = _variance(model, parameters, keep, scatter)
    t_err, slope = np.sqrt(variance[0, 0]), variance[0, 1] / variance[0, 0]
    return Balance(
        model.temperature,
        float(model.temperature * t_err),
        model.log_pe,
        float(np.sqrt(variance[1, 1])),
        float(slope),
        int(np.sum(keep > 0)),
        _pairs(model.species),
    )


def _known(species, names, gas: Gas):
    """True for lines of atoms and ions whose abundance and stage are in the tables."""
    level = ion_fractions_all(gas.temperature, 1.0) + log_partition_all(gas.temperature)
    level = level + gas.level[:, None]
    parsed = {i: parse_species(names[i]) for i in np.unique(species)}
    good = [
        i for i, s in parsed.items()
        if s.is_atomic and s.stage <= level.shape[1]
        and np.isfinite(level[s.atomic_number - 1, s.stage - 1])
    ]  # fmt: skip
    return np.isin(species, good)


class _Model(Regression):
    """Columns: ln T, log Pe, drift, zero, elements, species, powers of m, lambda. The first two
    are steps from the present gas, about which Saha and Boltzmann are taken as linear."""

    def __init__(self, lines: CleanLines, names, gas: Gas):
        index, self._which = np.unique(lines.species, return_inverse=True)
        self.species = [parse_species(names[i]) for i in index]
        self.start, self._level = gas, gas.level
        self.temperature = gas.temperature
        self.log_pe = electron_pressure(gas.temperature) if gas.log_pe is None else gas.log_pe
        self._usual = self.log_pe if gas.fixed else None
        elements = np.array([s.atomic_number for s in self.species])
        of = (elements[:, None] == np.unique(elements)).astype(float)
        mean = np.bincount(self._which, lines.e_low) / np.bincount(self._which)
        power = powers(lines)
        self._rest = np.column_stack([
            lines.e_low - mean[self._which], power[:, 0], of[self._which],
            np.eye(len(index))[self._which], power[:, 1:], place(lines),
        ])  # fmt: skip
        offsets = np.concatenate([np.full(of.shape[1], ELEMENT), np.full(len(index), STAGE)])
        pressure = GIVEN_PRESSURE if gas.fixed else PRESSURE
        free = np.full(DEGREE + 1, np.inf)
        self.prior = np.concatenate([[np.inf, pressure, DRIFT, np.inf], offsets, free])
        self.heavy = np.zeros(len(self.prior), dtype=bool)
        self.heavy[4 : 4 + len(offsets)] = True
        super().__init__(lines, None, None, 4 + len(offsets))
        self._linear()

    def _levels(self, temperature: float, log_pe: float):
        """log10(n_ion/n_el) - log10 U + A_el of each species."""
        z = np.array([s.atomic_number - 1 for s in self.species])
        stage = np.array([s.stage - 1 for s in self.species])
        level = ion_fractions_all(temperature, log_pe)[z, stage] + self._level[z]
        return level - log_partition_all(temperature)[z, stage]

    def _linear(self) -> None:
        t, pe, chi = self.temperature, self.log_pe, self.lines.e_low
        by_t = self._levels(t * np.exp(NEAR), pe) - self._levels(t * np.exp(-NEAR), pe)
        by_pe = self._levels(t, pe + NEAR) - self._levels(t, pe - NEAR)
        theta = THETA_K / t
        self.target = self.lines.loggf - theta * chi + self._levels(t, pe)[self._which]
        first = [-theta * chi - by_t[self._which] / (2 * NEAR), -by_pe[self._which] / (2 * NEAR)]
        self.design = np.column_stack([*first, self._rest])

    def first(self):
        """Parameters to begin with: a line of slope 1 through the middle."""
        start = np.zeros(self.design.shape[1])
        start[self.curve.start] = 1.0
        start[3] = np.median(self.target - self.design @ start)
        return start

    def settle(self, parameters):
        """Move the gas by its steps, which then are nothing."""
        low, high = self.start.temperature * np.exp([-FARTHEST, FARTHEST])
        low, high = max(low, COOLEST), min(high, HOTTEST)
        step = float(np.clip(parameters[0], -JUMP, JUMP))
        self.temperature = float(np.clip(self.temperature * np.exp(step), low, high))
        self.log_pe = float(np.clip(self.log_pe + parameters[1], THINNEST, DENSEST))
        parameters[:2] = 0.0
        self._linear()
        return parameters

    def inside(self) -> bool:
        """Whether the gas has come to rest within what is allowed."""
        far = abs(np.log(self.temperature / self.start.temperature)) > FARTHEST - 1e-6
        free = THINNEST < self.log_pe < DENSEST and COOLEST < self.temperature < HOTTEST
        return bool(free and not far)

    def pulled(self, parameters):
        """(pull of each parameter to its prior, that pull's weight)."""
        usual = electron_pressure(self.temperature) if self._usual is None else self._usual
        centre = np.zeros(len(parameters))
        centre[1] = usual - self.log_pe
        pull = (parameters - centre) / self.prior
        return pull, np.where(self.heavy, (FREEDOM + 1) / (FREEDOM + pull**2), 1.0)


def _solved(model: _Model):
    """(parameters, biweights of the lines, scatter of m) by damped Gauss-Newton."""
    parameters, scatter = model.first(), 0.06
    keep = np.ones(len(model.lines))
    for turn in range(TURNS):
        residual, slope = model.residual(parameters)
        pull, by = model.sensitivity(residual, slope, scatter)
        cut = CUT * max(1.0, 1.4826 * float(np.median(np.abs(pull))))
        keep = np.clip(1 - (pull / cut) ** 2, 0.0, 1.0) ** 2
        own, weight = model.pulled(parameters)
        kept = by * keep[:, None]
        slant = pull @ kept + weight * own / model.prior
        step = np.linalg.solve(_bread(model, by, keep, weight), -slant)
        parameters = model.settle(parameters + STEP * step)
        if turn % RESCALE == RESCALE - 1:
            scatter = left_over(model, *model.residual(parameters))
    return parameters, keep, scatter


def _bread(model: _Model, by, keep, weight):
    """Curvature of the posterior."""
    inner = by.T @ (by * keep[:, None]) + np.diag(weight / model.prior**2)
    return inner + RIDGE * np.eye(len(inner))


def _variance(model: _Model, parameters, keep, scatter: float):
    """Covariance (2, 2) of ln T and log Pe: the posterior's, or, where that is larger in T, what
    remains when whole stretches of the spectrum, or all lines from levels so near that they
    share a source of log gf, are left out (one-step jackknife; Liang & Zeger 1986)."""
    residual, slope = model.residual(parameters)
    pull, by = model.sensitivity(residual, slope, scatter)
    weight = model.pulled(parameters)[1]
    cover = np.linalg.inv(_bread(model, by, keep, weight))
    moved = (by * (keep * pull)[:, None]) @ cover[:, :2]
    variance = cover[:2, :2]
    for group in (_stretches(model.lines), _levels_shared(model.lines)):
        number = int(group.max()) + 1
        sums = np.stack([np.bincount(group, moved[:, j], number) for j in (0, 1)], axis=1)
        apart = number / max(number - 1, 1) * sums.T @ sums
        variance = variance * max(1.0, apart[0, 0] / variance[0, 0])
    return variance


def _stretches(lines: CleanLines):
    """Stretch of each line: STRETCHES of equally many along the wavelengths."""
    rank = np.empty(len(lines), dtype=int)
    rank[np.argsort(lines.wave, kind="stable")] = np.arange(len(lines))
    return rank * STRETCHES // len(lines)


def _levels_shared(lines: CleanLines):
    key = np.round(lines.e_low / CLUSTER).astype(np.int64) + 1000 * lines.species.astype(np.int64)
    return np.unique(key, return_inverse=True)[1]


def _pairs(species) -> tuple[str, ...]:
    """Neighbouring stages of one element that are both seen."""
    seen = {(s.element, s.stage): str(s) for s in species}
    return tuple(
        f"{name}/{seen[e, z + 1].split()[1]}"
        for (e, z), name in sorted(seen.items()) if (e, z + 1) in seen
    )  # fmt: skip
