"""What the claims, the Roll call and the Orphans become once a person's words are weighed in:
only what they change is made anew."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from .artefacts import is_spike
from .banded import holder
from .between import shared_between
from .build import build_claims
from .identify import Weighing, conclude, weigh_again
from .mixture import Solution
from .model import Claim, Orphan, RollRow
from .orphans import in_order as orphans_in_order
from .orphans import orphans_among
from .problem import NOT_SAID
from .roll_call import call_roll
from .roll_call import in_order as rows_in_order
from .siblings import with_siblings
from .upper_limits import with_limits
from .words_weighed import Settled

CHANGED = 1e-3  # of a probability: smaller changes make no new claim


@dataclass(frozen=True, eq=False)
class Heard:
    """claims: of the features whose probabilities changed, by index; the rest as it now is."""

    claims: dict[int, Claim]
    roll_call: tuple[RollRow, ...]
    orphans: tuple[Orphan, ...]
    solution: Solution


class Ground:
    """What the spectrum says before anyone spoke, ready to hear a person.

    claims, roll_call, orphans: without words
    """

    def __init__(self, weighing: Weighing):
        nothing = np.full(len(weighing.setting.features), NOT_SAID)
        alone = weigh_again(weighing, nothing)
        found = conclude(alone)
        self.features, self.catalogue = weighing.setting.features, weighing.setting.catalogue
        self.components = weighing.found.components
        self.claims, self.orphans, self.roll_call = found.claims, found.orphans, found.roll_call
        self._settled = Settled(alone.solution, weighing.solution.state)
        self._before = found.solution
        self._hold = holder(found.claims, self.features, weighing.bands)
        self._spike = is_spike(self.features)

    def hearing(self, said) -> Heard:
        """said: (f,) as of ``Problem``."""
        weighed = self._settled.heeding(said)
        if weighed is self._settled.solution:
            return Heard({}, self.roll_call, self.orphans, self._before)
        solution = shared_between(weighed)
        rows = _changed(self._before, solution)
        made = build_claims(solution, self.catalogue, self.components, rows[~self._spike[rows]])
        claims = dict(zip(rows[~self._spike[rows]].tolist(), made))
        if self._hold is not None:
            claims = {row: self._hold(row, claim) for row, claim in claims.items()}
        orphans = self._orphans(claims, solution)
        return Heard(claims, self._roll_call(solution, rows), orphans, solution)

    def _roll_call(self, solution: Solution, rows) -> tuple[RollRow, ...]:
        """Called again for species with a line near a feature that changed, or another offset."""
        problem = solution.problem
        near = np.zeros(len(self.features), dtype=bool)
        near[rows] = True
        entries = solution.entry[near[solution.feature]]
        moved = np.nonzero(solution.state.offsets != self._before.state.offsets)[0]
        names = np.concatenate((
            self.catalogue.species[problem.entries.row[entries]],
            moved % (problem.species // problem.populations),
        ))  # fmt: skip
        before = {row.species: row for row in self.roll_call}
        heard = (np.unique(names), before)
        called = call_roll(solution, self.catalogue, self.components, heard)
        fresh = [row for row in called if row is not before.get(row.species)]
        kept = [row for row in called if row is before.get(row.species)]
        fresh = with_limits(
            with_siblings(fresh, solution, self.catalogue), solution, self.catalogue
        )
        return rows_in_order((*kept, *fresh))

    def _orphans(self, claims: dict, solution: Solution) -> tuple[Orphan, ...]:
        again = {int(self.features.number[row]) for row in claims}
        kept = [orphan for orphan in self.orphans if orphan.feature not in again]
        fresh = orphans_among(claims, self.features, solution, self.catalogue)
        return orphans_in_order(self.features, (*kept, *fresh))


def _changed(before: Solution, after: Solution):
    """Indices of features of which a probability changed, a species' lines together; ascending."""
    out = np.abs(after.unlisted - before.unlisted) > CHANGED
    moved = np.abs(after.probability - before.probability)
    out |= np.bincount(after.feature, moved, len(out)) > CHANGED
    return np.nonzero(out)[0]
