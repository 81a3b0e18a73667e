"""Brings every widget of the work page in step with session and view: the one place."""

from __future__ import annotations

import numpy as np
from PySide6.QtCore import QTimer

from ..job.view_profile import profile_of
from ..job.view_searched import searched_range
from .acts import opening
from .acts.picking import pick
from .acts.reweighing import heed, make_ready, propose
from .acts.viewing import slide
from .anchor_keeper import AnchorKeeper
from .fit_follower import FitFollower
from .rake import RakeKeeper
from .steps import Steps

REST_MS = 200  # after the last claim before what it changes is looked up
READY_MS = 1500  # after the last change of features before a first claim is made ready for
SMALL_PART = 0.5  # of the spectrum: less was searched, and only that is shown at first
MANY = 1000  # features whose first showing is spread over several frames


class Refresher:
    """Listens to session and view; passes the widgets' acts to the workbench."""

    def __init__(self, bench, space):
        self._bench, self._space = bench, space
        self._spectrum = self._session = self._desk = None
        self._steps, self._track_shown = Steps(space), (None,) * 4
        self._ours = False  # while the window itself moves the view
        self.rake = RakeKeeper(bench, space.spectrum_view.set_rake, space)
        self._calm = QTimer(space)
        self._calm.setSingleShot(True)
        self._calm.setInterval(60)
        self._calm.timeout.connect(space.evidence.refresh)
        self.reweigh_soon = QTimer(space)
        self.reweigh_soon.setSingleShot(True)
        self.reweigh_soon.setInterval(REST_MS)
        self.reweigh_soon.timeout.connect(lambda: propose(bench))
        self.ready_soon = QTimer(space)
        self.ready_soon.setSingleShot(True)
        self.ready_soon.setInterval(READY_MS)
        self.ready_soon.timeout.connect(lambda: make_ready(bench))
        view = space.spectrum_view
        self.fits, self.anchors = FitFollower(bench, view), AnchorKeeper(bench, view)
        view.featureClicked.connect(lambda number: bench.view.select(number))
        view.pickRequested.connect(lambda wave: pick(bench, wave))
        view.viewChanged.connect(self._moved)
        space.track.velocityChanged.connect(lambda v, final: slide(bench, v, final))
        space.track.solveRequested.connect(lambda: bench.run("spectrum.solve"))

    def _moved(self, low: float, high: float) -> None:
        if not self._ours:
            self._bench.view.change(span=(low, high))

    def session_changed(self, old, new) -> None:
        bench, space = self._bench, self._space
        heed(bench, old, new)
        space.show_changes(bench.desk)
        if new is None:
            self._steps.run([])
            self._session = None
            self._show_spectrum(None)
            return
        if not opening.spectrum_matches(bench.desk):
            opening.follow_medium(bench.desk)
        self._show_spectrum(bench.drawn)
        if new is self._session:
            return
        many = len(new.features) > MANY and (
            self._session is None or new.features is not self._session.features)
        self._session = new
        self._steps.run([
            lambda: self._show_marks(new),
            lambda: self._show_track(new),
            lambda: space.ledger.show_session(new),
            lambda: space.orphans.show_session(new),
            lambda: self._show_rest(new),
            self.show_selected,
            self.rake.refresh,
        ], spread=many)

    def _show_marks(self, session) -> None:
        self._space.spectrum_view.set_session(session)
        self.anchors.show()

    def _show_rest(self, session) -> None:
        self._space.roll_call.show_session(session)
        self._show_counts(session)
        self.rake.predict()

    def _show_counts(self, session) -> None:
        lines = len(self._bench.catalogue or ())
        self._space.show_counts(len(session.features), len(session.roll_call), lines,
                                len(session.orphans))

    def _show_spectrum(self, spectrum) -> None:
        if spectrum is self._spectrum:
            return
        before, self._session = self._desk, None
        self._spectrum, self._desk = spectrum, self._bench.desk
        view = self._space.spectrum_view
        span = view.view()
        view.set_spectrum(spectrum)
        if spectrum is None:
            return
        if self._bench.spectrum is None and before is self._bench.desk:
            view.set_view(*span)  # sticks of an edited table: the view stays
        else:
            self._show_searched()
        self._bench.view.change(span=tuple(view.view()))
        self._space.catalogue.show_catalogue()

    def _show_searched(self) -> None:
        """Of a spectrum of which a small part was searched, that part with its surroundings."""
        view, part = self._space.spectrum_view, searched_range(self._bench.session)
        low, high = view.view()
        if part is not None and part[1] - part[0] < SMALL_PART * (high - low):
            beside = 0.05 * (part[1] - part[0])
            view.set_view(part[0] - beside, part[1] + beside)

    def _show_track(self, session) -> None:
        shown = (session.velocity, self._bench.view.now.velocity, self._bench.spectrum,
                 self._bench.desk.options)
        if all(a is b for a, b in zip(shown, self._track_shown)):
            return
        self._track_shown = shown
        track, result = self._space.track, session.velocity
        low, high = self._bench.desk.options.velocity_range
        if len(result.grid):
            low, high = float(result.grid[0]), float(result.grid[-1])
        velocity = self._bench.view.now.velocity
        track.set_range(min(low, velocity - 10.0), max(high, velocity + 10.0))
        track.set_curve(result.grid, result.score)
        track.set_rivals(result.rivals)
        track.set_busy(self._bench.spectrum is None)  # a table of features has nothing to solve
        self._show_velocity()

    def _show_velocity(self) -> None:
        bench = self._bench
        velocity, result = bench.view.now.velocity, bench.session.velocity
        error = result.error if velocity == result.velocity and np.isfinite(result.error) else None
        declared = bool(result.declared) or result.how == "given" or velocity != result.velocity
        self._space.track.set_velocity(velocity, error, declared)
        self._space.spectrum_view.set_velocity(velocity)

    def show_selected(self) -> None:
        bench, view = self._bench, self._space.spectrum_view
        number = bench.view.now.selected
        view.select(number)
        profile = None
        if bench.selected_row() is not None:
            profile = profile_of(bench.session, number)
        view.show_profile(*(profile or (None, None)))
        self.fits.show()
        self._space.ledger.show_selection(number)
        self._space.orphans.show_selection(number)
        self._space.changes.show_selection(number)
        self._space.catalogue.follow_selection()
        candidate = bench.candidate()
        self._space.roll_call.show_species(candidate.species if candidate is not None else "")
        self._space.evidence.refresh()

    def view_changed(self, old, new) -> None:
        bench, space = self._bench, self._space
        if bench.session is None:
            return
        if new.span != old.span and new.span is not None:
            self._show_span(new.span)
        if new.velocity != old.velocity:
            self._show_velocity()
            self._calm.start()
        if (new.selected, new.candidate) != (old.selected, old.candidate):
            if not self._steps.pending:  # else among the steps
                self.show_selected()
                self.rake.refresh()
        if new.rake != old.rake:
            self.rake.refresh()
            space.catalogue.show_rake(new.rake)
        if new.line != old.line:
            self._show_line(new.line)

    def _show_line(self, row: int | None) -> None:
        """The catalogue line looked at: its page, and its tooth marked on the rake."""
        bench, marked = self._bench, None
        if row is not None and bench.catalogue is not None and row < len(bench.catalogue):
            marked = float(bench.catalogue.wave[row]), bench.catalogue.species_of(row)
        self._space.catalogue.show_line(row)
        self._space.spectrum_view.rake.set_marked(marked)
        self.rake.refresh()

    def _show_span(self, span) -> None:
        view = self._space.spectrum_view
        low, high = view.view()
        if abs(low - span[0]) + abs(high - span[1]) > 1e-9 * max(abs(high), 1.0):
            self._ours = True
            try:
                view.set_view(*span)
            finally:
                self._ours = False
            self._bench.view.change(span=tuple(view.view()))
        self.rake.soon()
        self._space.catalogue.follow_view()

    def catalogue_changed(self) -> None:
        bench, space = self._bench, self._space
        names = sorted(bench.catalogue.species_names) if bench.catalogue is not None else []
        space.evidence.show_species(names)
        space.catalogue.show_catalogue()
        if bench.session is not None:
            self._show_counts(bench.session)
            space.evidence.refresh()

    def theme_changed(self) -> None:
        for part in (self._space.spectrum_view, self._space.track,
                     self._space.evidence.siblings.strips):
            part.set_theme(self._bench.theme)
        self._space.ledger.show_theme(self._bench.theme)
        self._space.catalogue.show_theme()
        self._space.evidence.refresh()
