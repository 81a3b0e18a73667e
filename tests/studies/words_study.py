"""What weighing a person's words locally leaves out: python words_study.py SESSION [TRIALS].

SESSION: a solved session (the Sun's in RESULTS.md). Each trial claims one to three features at
random, each for its first, second or third candidate, for any species, or sets it aside; the
probabilities of all pairs are compared with those of the mixture going on for at most 150 rounds
until a round moves 1e-5, with the words less without them. 'whole': six rounds of the whole
mixture, as it was done for every word before. Root mean square by feature, and the greatest.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

sys.path.insert(0, str(Path(__file__).resolve().parents[2] / "app"))

import numpy as np  # noqa: E402

from linewright.claims import mixture  # noqa: E402
from linewright.claims.artefacts import with_spikes  # noqa: E402
from linewright.claims.band_claims import band_ranges  # noqa: E402
from linewright.claims.banded import weigh_banded  # noqa: E402
from linewright.claims.heard import Ground  # noqa: E402
from linewright.claims.identify import Setting, weigh, weigh_again  # noqa: E402
from linewright.claims.problem import NOT_SAID, SET_ASIDE  # noqa: E402
from linewright.job.reweigh import _coverage, _options  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.progress import Progress  # noqa: E402
from linewright.session.file import load_session  # noqa: E402

DEEP, DEEPLY_SETTLED = 150, 1e-5


def weighing_of(session):
    coverage, complete = _coverage(session)
    setting = Setting(session.features, load_catalogue(), coverage, _options(session, complete))
    setting.said = with_spikes(session.features, None)
    bands = band_ranges(session.features, session.claims)
    return weigh_banded(weigh(setting, Progress()), bands)


def words(ground, names, rng):
    """(f,) words about one to three features."""
    said = np.full(len(ground.claims), NOT_SAID)
    for i in rng.choice(len(said), int(rng.integers(1, 4)), replace=False):
        species = [c.species for c in ground.claims[i].candidates[:3]]
        chance = rng.random()
        if chance < 0.2 or not species:
            said[i] = SET_ASIDE
        elif chance < 0.9:
            said[i] = names.index(species[int(rng.integers(len(species)))])
        else:
            said[i] = int(rng.integers(len(names)))
    return said


def deep(weighing, said, start):
    before, mixture.SETTLED = mixture.SETTLED, DEEPLY_SETTLED
    try:
        problem = replace(weighing.solution.problem, said=with_spikes(
            weighing.setting.features, said))
        return mixture.solve_mixture(problem, DEEP, start=start)
    finally:
        mixture.SETTLED = before


def main() -> int:
    session, trials = load_session(Path(sys.argv[1])), int((sys.argv + ["10"])[2])
    weighing = weighing_of(session)
    ground, rng = Ground(weighing), np.random.default_rng(3)
    settled = ground._settled.solution
    nothing = np.full(len(ground.claims), NOT_SAID)
    base = deep(weighing, nothing, weighing.solution.state)
    names = list(ground.catalogue.species_names)

    def away(change, true) -> tuple[float, float]:
        return float(np.sqrt(np.sum((change - true) ** 2) / len(nothing))), float(
            np.max(np.abs(change - true)))

    print("settled itself against deeply settled: rms %.4f, greatest %.3f"
          % away(settled.probability, base.probability))
    table = []
    for _ in range(trials):
        said = words(ground, names, rng)
        true = deep(weighing, said, base.state).probability - base.probability
        local = ground._settled.heeding(said)
        whole = weigh_again(weighing, said).solution
        kept = local.state.detection is settled.state.detection
        row = (*away(local.probability - settled.probability, true),
               *away(whole.probability - settled.probability, true))
        table.append(row)
        print("%d words, moved %5.2f, %s: rms %.4f, greatest %.3f; whole: rms %.4f, greatest %.3f"
              % (np.sum(said != NOT_SAID), np.sum(np.abs(true)),
                 "local" if kept else "whole", *row), flush=True)
    print("medians: local rms %.4f, greatest %.3f; whole rms %.4f, greatest %.3f"
          % tuple(np.median(table, axis=0)))
    return 0


if __name__ == "__main__":
    raise SystemExit(main())
