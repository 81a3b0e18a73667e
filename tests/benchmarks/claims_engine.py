"""Processor time of the claims engine on 8,000 features against the optical catalogue.

    python tests/benchmarks/claims_engine.py [ROUNDS]

Ratios within this run to a sort of a million numbers, each the median over rounds in random
order; absolute times are notes. A control outside 0.9 to 1.1 makes the run noisy. Features:
lines of a star of 5,200 K that the catalogue predicts, 5 % invented, 0.01 A errors.
"""

from __future__ import annotations

import sys
from collections.abc import Callable
from pathlib import Path

import numpy as np

HERE = Path(__file__).resolve().parent
sys.path[:0] = [str(HERE), str(HERE.parent.parent / "app")]

from rounds import Act, measure, show  # noqa: E402

from linewright.claims.heard import Ground  # noqa: E402
from linewright.claims.identify import Setting, conclude, identify, weigh, weigh_again  # noqa: E402
from linewright.claims.mixture import solve_mixture  # noqa: E402
from linewright.claims.options import ClaimOptions  # noqa: E402
from linewright.claims.problem import NOT_SAID  # noqa: E402
from linewright.claims.temperature import electron_pressure  # noqa: E402
from linewright.claims.velocity import stellar_vote  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.lines.strengths import absorption_strength  # noqa: E402
from linewright.measure.features_from import features_from_columns  # noqa: E402
from linewright.progress import Progress  # noqa: E402
from linewright.spectra.medium import C_KM_S  # noqa: E402

FEATURES, INVENTED, SORTED = 8000, 400, 1_000_000
LOW, HIGH, TEMPERATURE, VELOCITY = 3800.0, 9200.0, 5200.0, 50.0
APART, ERROR = 0.06, 0.01  # Angstrom
ROUNDS = 7
NAMED, SAID = 4000, "Ti I"  # the feature a person names


def star(catalogue, rng):
    """FeatureTable of the strongest lines, with scattered strengths and invented features."""
    lines = catalogue.between(LOW, HIGH)
    strength = absorption_strength(lines, TEMPERATURE, electron_pressure(TEMPERATURE))
    known = np.nonzero(np.isfinite(strength))[0]
    order = np.argsort(-(strength[known] + rng.normal(0, 0.25, len(known))), kind="stable")
    wave, strength = lines.wave[known[order]], strength[known[order]]
    chosen = apart(wave)[: FEATURES - INVENTED]
    m = 0.6 * (strength[chosen] - np.median(strength[chosen])) - 0.8
    m = m + rng.normal(0, 0.2, len(m))
    x = wave[chosen] * (1 + VELOCITY / C_KM_S) + rng.normal(0, ERROR, len(chosen))
    x = np.append(x, rng.uniform(LOW + 10, HIGH - 10, INVENTED))
    m = np.append(m, rng.choice(m, INVENTED))
    depth = np.clip(1 / (1 + 10.0**-m), 0.005, 0.95)
    order = np.argsort(x, kind="stable")
    return features_from_columns(x[order], wave_err=ERROR, depth=depth[order])


def apart(wave):
    """Indices of lines, strongest first, no two in one cell of APART Angstrom."""
    _, first = np.unique((wave / APART).astype(int), return_index=True)
    return np.sort(first)


def acts(catalogue) -> list[Act]:
    features = star(catalogue, np.random.default_rng(0))
    coverage, options = ((LOW + 5, HIGH - 5),), ClaimOptions()
    setting = Setting(features, catalogue, coverage, options)
    weighing = weigh(setting, Progress())
    strength = setting.absorption(TEMPERATURE)
    said = np.full(len(features), NOT_SAID)
    said[NAMED] = setting.catalogue.species_names.index(SAID)
    ground = Ground(weighing)
    numbers = np.random.default_rng(1).random(SORTED)
    where = weighing.found.components, weighing.temperature

    def sort() -> None:
        np.sort(numbers)

    tried: dict[str, Callable[[], object]] = {
        "A": sort,
        "A'": sort,
        "posterior": lambda: solve_mixture(setting.problem(*where)),
        "vote": lambda: stellar_vote(
            features, setting.catalogue, strength, options.velocity_range
        ),
        "again": lambda: ground.hearing(said),
        "marginals again": lambda: ground._settled.heeding(said),
        "whole again": lambda: conclude(weigh_again(weighing, said)),
        "ground": lambda: Ground(weighing),
        "identify": lambda: identify(features, coverage, catalogue, options),
    }
    return [Act(name, run) for name, run in tried.items()]


WORDS = {
    "posterior": "posterior of 8,000 features, velocity and temperature known",
    "vote": "one velocity vote, +-500 km/s",
    "marginals again": "marginals after a person's claim",
    "again": "the same with claims, Roll call and Orphans",
    "whole again": "the same with every pair weighed and every claim made anew",
    "ground": "what is kept for the first claim, once for a spectrum",
    "identify": "all of identify: votes, temperatures, claims",
}


def main() -> int:
    rounds = int(sys.argv[1]) if len(sys.argv) > 1 else ROUNDS
    timing = measure(acts(load_catalogue()), rounds, lambda: None)
    show(timing, WORDS, f"sort of {SORTED:,} numbers")
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
