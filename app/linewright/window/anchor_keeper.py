"""Continuum anchors in the window: shown on demand, dragged, and what follows measured."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from ..errors import LinewrightError
from ..job.hand_anchors import anchor_errand, anchors_in, level_after, moved
from ..measure.anchors import Anchors, add_anchor, remove_anchor
from ..session.script import apply_edit
from .hand_calls import call, free_engine
from .tasks import Request

MEASURED = "job.hand_anchors:anchored_of"
NUDGE = 0.002  # of the flux, for one press of a key


@dataclass(frozen=True)
class Act:
    """what: 'move', 'add', 'remove' or 'clear', in a segment; at: vacuum Angstrom of the anchor;
    to, value: where it goes."""

    what: str
    segment: int
    at: float = 0.0
    to: float = 0.0
    value: float = 0.0


class AnchorKeeper:
    """Acts wait in a row while the one before is measured; the continuum shows them all."""

    def __init__(self, bench, view):
        self._bench, self._view = bench, view
        self.shown, self._desk = False, None
        self._acts: list[Act] = []
        self._chosen: tuple[int, float] | None = None  # segment, vacuum Angstrom
        view.hand.anchorActed.connect(self._acted)

    def toggle(self) -> None:
        self.shown = not self.shown
        self.show()

    def usable(self) -> bool:
        session = self._bench.session
        return self._bench.spectrum is not None and any(len(n.wave) > 1 for n in session.continuum)

    @property
    def chosen(self) -> bool:
        return self.shown and self._chosen is not None

    def show(self, extra: Act | None = None) -> None:
        """Anchors and continuum as they are after the acts under way, and ``extra``."""
        if self._desk is not self._bench.desk:
            self._desk, self._chosen = self._bench.desk, None
            self._acts.clear()
        if not self.shown or not self.usable():
            self._view.hand.show_anchors([], [], None, False)
            return
        acts = [*self._acts, *([extra] if extra else [])]
        every = self._every(acts)
        wave = np.concatenate([a.wave for _, a in every])
        value = np.concatenate([a.value for _, a in every])
        self._view.hand.show_anchors(wave, value, self._index(wave))
        touched = {act.segment for act in acts}
        for segment, anchors in every:
            if segment in touched:
                nodes = self._bench.session.continuum[segment]
                level = level_after(nodes, anchors_in(self._bench.session, segment), anchors)
                self._view.hand.show_level(segment, level.wave, level.value)

    def _every(self, acts) -> list[tuple[int, Anchors]]:
        session = self._bench.session
        return [(k, after(session, k, acts)) for k, nodes in enumerate(session.continuum)
                if len(nodes.wave) > 1]

    def _index(self, wave) -> int | None:
        if self._chosen is None or not len(wave):
            return None
        best = int(np.argmin(np.abs(wave - self._chosen[1])))
        return best if abs(wave[best] - self._chosen[1]) < 1e-6 else None

    def _place(self, index: int) -> tuple[int, float, float] | None:
        """(segment, wave, value) of an anchor by its index among all shown."""
        for segment, anchors in self._every(self._acts):
            if index < len(anchors.wave):
                return segment, float(anchors.wave[index]), float(anchors.value[index])
            index -= len(anchors.wave)
        return None

    def _acted(self, what: str, index: int, wave: float, flux: float) -> None:
        if what == "add":
            self.add(wave, flux)
            return
        place = self._place(index)
        if place is None:
            return
        segment, at, _value = place
        if what == "choose":
            self._chosen = (segment, at)
            self.show()
            self._bench.window.menus.refresh()
            return
        act = Act("move", segment, at, self._between(segment, index, wave), max(flux, 1e-30))
        self._do(act) if what == "drop" else self._preview(act)

    def _between(self, segment: int, index: int, wave: float) -> float:
        """``wave`` kept between the anchor's neighbours and inside the segment."""
        anchors = after(self._bench.session, segment, self._acts)
        nodes = self._bench.session.continuum[segment].wave
        at = self._place(index)[1]
        k = int(np.argmin(np.abs(anchors.wave - at)))
        gap = 1e-3 * (nodes[-1] - nodes[0]) / len(anchors.wave)
        low = anchors.wave[k - 1] + gap if k else nodes[0]
        high = anchors.wave[k + 1] - gap if k + 1 < len(anchors.wave) else nodes[-1]
        return float(np.clip(wave, low, high))

    def _preview(self, act: Act) -> None:
        self._chosen = (act.segment, act.to)
        try:
            self.show(act)
        except LinewrightError:
            pass  # said when it is let go there
        self._chosen = (act.segment, act.at)

    def add(self, wave: float, flux: float) -> None:
        """An anchor at a vacuum wavelength, in the segment that shows it."""
        for segment, nodes in enumerate(self._bench.session.continuum):
            if len(nodes.wave) > 1 and nodes.wave[0] <= wave <= nodes.wave[-1]:
                self._do(Act("add", segment, wave, wave, flux))
                return
        self._bench.refuse(LinewrightError(
            f"anchor at {wave:.3f} Å", "lies outside the continuum", "place it on the spectrum"))

    def remove(self) -> None:
        self._do(Act("remove", *self._chosen))

    def clear(self) -> None:
        """The machine's continuum again, in the segment of the chosen anchor or the first."""
        self._do(Act("clear", self._chosen[0] if self._chosen else 0))

    def nudge(self, steps: float) -> None:
        """Raises the chosen anchor by so many steps of NUDGE."""
        segment, at = self._chosen
        anchors = after(self._bench.session, segment, self._acts)
        k = int(np.argmin(np.abs(anchors.wave - at)))
        self._do(Act("move", segment, at, at, float(anchors.value[k]) * (1 + steps * NUDGE)))

    def step(self, direction: int) -> None:
        """Chooses the next anchor, beginning in the middle of the view."""
        low, high = self._view.view()
        wave = np.concatenate([a.wave for _, a in self._every(self._acts)])
        own = np.asarray(self._view.hand.own(wave))
        now = self._index(wave)
        at = own[now] if now is not None else 0.5 * (low + high)
        ahead = np.flatnonzero((own - at) * direction > 1e-9)
        if len(ahead):
            best = int(ahead[0] if direction > 0 else ahead[-1])
            self._chosen = self._place(best)[:2]
            if not low <= own[best] <= high:
                self._bench.look_at(float(own[best]))
            self.show()

    def _do(self, act: Act) -> None:
        try:
            after(self._bench.session, act.segment, [*self._acts, act])
        except LinewrightError as refusal:
            self._bench.refuse(refusal)
            self._restore()
            return
        self._chosen = None if act.what in ("remove", "clear") else (act.segment, act.to)
        self._acts.append(act)
        self._next()

    def _next(self) -> None:
        bench = self._bench
        if not self._acts or bench.tasks.busy("anchors"):
            return
        act, session = self._acts[0], bench.session
        try:
            new = None if act.what == "clear" else after(session, act.segment, [act])
            parcel = anchor_errand(bench.spectrum, session, act.segment, new)
        except LinewrightError as refusal:
            self._acts.clear()
            bench.refuse(refusal)
            self._restore()
            return
        engine = free_engine(bench)
        bench.tasks.start(Request(
            key="anchors", title="Measuring under the new continuum",
            work=lambda progress: call(engine, MEASURED, *parcel),
            done=lambda command: self._take(session, command), failed=self._failed))
        try:
            self.show()
        except LinewrightError:
            self._restore()

    def _take(self, session, command) -> None:
        done = self._acts.pop(0) if self._acts else None
        if done is None or self._bench.session.features is not session.features:
            self._acts.clear()  # the session went another way meanwhile
            self._restore()
            return
        if not self._bench.act(apply_edit, command):
            self._acts.clear()
            self._restore()
        self._next()

    def _failed(self, error: Exception) -> None:
        self._acts.clear()
        if isinstance(error, LinewrightError):
            self._bench.refuse(error)
        else:
            self._bench.window.report_unexpected(error)
        self._restore()

    def _restore(self) -> None:
        """The continuum as the session has it."""
        for segment, nodes in enumerate(self._bench.session.continuum):
            self._view.hand.show_level(segment, nodes.wave, nodes.value)
        self.show()


def after(session, segment: int, acts) -> Anchors:
    """The anchors of a segment once ``acts`` are done; raises InputRefused."""
    anchors = anchors_in(session, segment)
    for act in acts:
        if act.segment != segment or act.what == "clear":
            continue
        if act.what == "add":
            anchors = add_anchor(anchors, act.to, act.value)
            continue
        k = int(np.argmin(np.abs(anchors.wave - act.at)))
        anchors = (remove_anchor(anchors, k) if act.what == "remove"
                   else moved(anchors, k, act.to, act.value))
    return anchors
