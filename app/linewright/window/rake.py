"""Keeps the rake's species and teeth in step with view, selection and conditions."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QObject, QTimer

from ..job.view_depths import conditions, predicted_depths
from ..job.view_rake import Elsewhere, elsewhere, most_claimed, rake_columns, rake_teeth
from ..spectra.medium import from_medium
from .plot import RakeData
from .tasks import Request

UNSOLVED = ("Fe I", "Mg I", "Ca I", "Na I", "H I")
MOST = 5
MARGIN = 3000.0 / 299792.458  # teeth that a slide by 3000 km/s can bring in


class RakeKeeper(QObject):
    """Loads the catalogue, predicts depths and hands RakeData to the spectrum view."""

    def __init__(self, bench, show, parent=None):
        super().__init__(parent)
        self._bench, self._show = bench, show
        self.species: tuple[str, ...] = ()
        self._drawn: tuple | None = None
        self._known: tuple | None = None
        self._counted: tuple = (None, None, (), ())
        self._apart: tuple = (None, None, Elsewhere())
        self._later = QTimer(self)
        self._later.setSingleShot(True)
        self._later.setInterval(80)
        self._later.timeout.connect(self.refresh)

    def load_catalogue(self) -> None:
        self._bench.tasks.start(Request(
            key="catalogue", title="Reading the catalogue", work=_loaded,
            done=self._take_catalogue, failed=self._bench.refuse, shown=False))

    def _take_catalogue(self, catalogue) -> None:
        self._bench.catalogue = catalogue
        self.predict()
        self._bench.window.catalogue_changed()

    def predict(self) -> None:
        """Depths of all lines under the session's conditions, when these changed."""
        bench = self._bench
        if bench.catalogue is None:
            return
        request = _Prediction(bench.catalogue, bench.session)
        if request.key == self._known:
            return
        self._known = request.key
        bench.tasks.start(Request(
            key="depths", title="Predicting depths", work=lambda progress: request.run(),
            done=self._take_depths, failed=bench.refuse, shown=False))

    def _take_depths(self, depth) -> None:
        self._bench.depth = depth
        self.refresh()
        self._bench.window.catalogue_changed()

    def soon(self) -> None:
        """After a change of view: when the view has come to rest."""
        self._later.start()

    def refresh(self) -> None:
        bench = self._bench
        if bench.catalogue is None or bench.depth is None or bench.drawn is None:
            self._put((), None)
            return
        species = self._wanted()
        low, high = bench.drawn.own_range()
        apart = self._elsewhere(bench.session)
        drawn = (species, id(bench.depth), low, high, bench.medium, apart)
        if drawn == self._drawn:
            return
        ends = from_medium(np.array([low * (1 - MARGIN), high * (1 + MARGIN)]), bench.medium)
        columns = rake_columns(bench.catalogue, bench.depth, species, *ends)
        teeth = rake_teeth(columns, species, apart)
        self._put(species, RakeData(teeth.wave, teeth.depth, teeth.row, species, own=teeth.own,
                                    bands=teeth.bands, origins=apart.origins))
        self._drawn = drawn

    def _put(self, species, data) -> None:
        if data is None and not self.species:
            return
        self.species, self._drawn = species, None
        self._show(data or RakeData.empty())

    def _wanted(self) -> tuple[str, ...]:
        bench = self._bench
        chosen = bench.view.now.rake
        if chosen is not None:
            return chosen
        names = self._most_claimed(bench.session)
        if not names and not len(bench.session.features):
            names = tuple(n for n in UNSOLVED if n in bench.catalogue.species_names)
        candidate, line = bench.candidate(), bench.view.now.line
        looked = [candidate.species] if candidate is not None else []
        looked += [bench.catalogue.species_of(line)] if line is not None else []
        more = tuple(n for n in dict.fromkeys(filter(None, looked)) if n not in names)
        return (*names[: MOST - len(more)], *more)  # as many rows: the spectrum keeps its place

    def _elsewhere(self, session) -> Elsewhere:
        """Looked up again only when claims changed."""
        known = session.claims, session.velocity
        if any(a is not b for a, b in zip(self._apart, known)):
            self._apart = (*known, elsewhere(session))
        return self._apart[2]

    def _most_claimed(self, session) -> tuple[str, ...]:
        """In view, then anywhere; counted again only when claims or view changed, not with
        every selection."""
        whole = self._bench.drawn.own_range()
        ends = self._bench.view.now.span or whole
        if self._counted[0] is not session.claims:
            self._counted = (session.claims, None, (), most_claimed(session, *whole, MOST))
        claims, known, names, everywhere = self._counted
        if known != ends:
            names = most_claimed(session, *ends, MOST)
            self._counted = (claims, ends, names, everywhere)
        return tuple(dict.fromkeys([*names, *everywhere]))[:MOST]


class _Prediction:
    """A frozen request: what the depths depend on."""

    def __init__(self, catalogue, session):
        self._catalogue = catalogue
        self._conditions = conditions(session)
        self.key = (id(catalogue), self._conditions)

    def run(self) -> np.ndarray:
        return predicted_depths(self._catalogue, self._conditions)


def _loaded(_progress):
    from ..lines.loading import load_catalogue

    return load_catalogue()
