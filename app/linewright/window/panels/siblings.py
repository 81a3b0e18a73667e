"""Siblings: the other lines that must be there too, each a strip in velocity space."""

from __future__ import annotations

from PySide6.QtCore import QTimer
from PySide6.QtWidgets import QHBoxLayout, QLabel, QSizePolicy, QVBoxLayout, QWidget

from ...job.view_breakdown import siblings_words
from ...job.view_rake import heads_claimed
from ...job.view_seen_depths import seen_depths
from ...job.view_siblings import OWN_LINES, said_now, sibling_strips, sibling_velocity
from ..plot import SiblingStrips, Strip
from ..plot.sibling_strips import NO_SPECTRUM, NONE_EXPECTED

TIP = (
    "If the candidate is right, its strongest other lines must be in the spectrum as well. "
    "Each strip is centred on where one is expected, with a bar at the depth predicted; click "
    "it to go there."
)

COUNT_TIP = (
    "Of all expected lines of the species, the strongest missing one and the strongest outside "
    "the coverage. In the strips: 'seen' is claimed for the species, 'in Fe I' is blended into "
    "a feature of another claim, 'not searched' lies outside the ranges asked for, 'missing' "
    "has no feature; 'no feature' where the Roll call "
    "misses none: what stands there hides it."
)


REST_MS = 25  # after a selection before strips are cut: the next ones may follow


class SiblingsBox(QWidget):
    """Title and strips of the candidate under consideration."""

    def __init__(self, workbench, parent=None):
        super().__init__(parent)
        self._workbench, self._found = workbench, []
        self._seen, self._depths_of = None, (None,) * 3
        self._forget()
        self.title, self.strips = QLabel("Siblings"), SiblingStrips()
        self.count, self.lines = QLabel(), QLabel()
        for label in (self.count, self.lines):
            label.setObjectName("quiet")
        self.lines.setSizePolicy(QSizePolicy.Policy.Ignored, QSizePolicy.Policy.Fixed)
        self.title.setObjectName("heading")
        self.title.setToolTip(TIP)
        self.strips.setAccessibleName("Siblings strips")
        self.strips.setMinimumHeight(150)
        box = QVBoxLayout(self)
        box.setContentsMargins(8, 2, 8, 4)
        box.setSpacing(2)
        head = QHBoxLayout()
        head.setSpacing(8)
        head.addWidget(self.title)
        head.addWidget(self.count, 1)
        box.addLayout(head)
        box.addWidget(self.lines)
        box.addWidget(self.strips, 1)
        self.strips.stripActivated.connect(self._go)
        self._soon = QTimer(self)
        self._soon.setSingleShot(True)
        self._soon.setInterval(REST_MS)
        self._soon.timeout.connect(self.cut_now)

    def _forget(self) -> None:
        self._key, self._made_of, self._said = None, (None,) * 4, None

    def clear(self) -> None:
        self._soon.stop()
        self._found = []
        self._forget()
        self.title.setText("Siblings")
        self._tell("", "")
        self.strips.set_strips([], self._workbench.theme.accent)

    def cut_now(self) -> None:
        """Strips of the candidate that is under consideration by now."""
        self._soon.stop()
        bench = self._workbench
        if bench.selected_row() is not None:
            self.show_candidate(bench.session, bench.candidate(), now=True)

    def show_candidate(self, session, candidate, now: bool = False) -> None:
        """New strips follow in a frame of their own, when the selection has come to rest."""
        bench = self._workbench
        ready = candidate is not None and bench.catalogue is not None and bench.depth is not None
        self.strips.hint = NO_SPECTRUM if bench.spectrum is None else NONE_EXPECTED
        if not ready or bench.spectrum is None:
            self.clear()
            return
        if candidate.origin == "molecular":
            self._show_heads(session, candidate.species)
            return
        velocity = sibling_velocity(session, candidate, bench.view.now.velocity)
        fwhm = float(session.features.fwhm[bench.selected_row()])
        made_of = (session.features, session.continuum, bench.depth, bench.spectrum)
        key = (candidate.species, candidate.wave, velocity, fwhm)
        if key != self._key or any(a is not b for a, b in zip(made_of, self._made_of)):
            if not now:
                self._soon.start()
                return
            self._key, self._made_of = key, made_of
            predicted = bench.catalogue, self._depths(session, candidate.origin)
            self._found = sibling_strips(
                bench.spectrum, session, predicted, candidate, velocity, fwhm)
        elif self._said == (session.claims, bench.theme.name):
            return
        else:
            self._found = said_now(self._found, session, velocity, candidate.species)
        self._said = (session.claims, bench.theme.name)
        named = "" if candidate.origin in OWN_LINES else candidate.species  # the Roll call's are the star's
        roll = next((r for r in session.roll_call if r.species == named), None)
        self._tell(*siblings_words(roll, session.spectrum.medium))
        self._show(candidate, "missing" if roll is None or roll.missing else "no feature")

    def _depths(self, session, origin: str):
        """Depths as this spectrum shows lines of an origin; read again after another solve."""
        bench = self._workbench
        made_of = (session.features, bench.depth, origin)
        if any(a is not b for a, b in zip(made_of, self._depths_of)):
            self._seen = seen_depths(session, bench.catalogue, bench.depth, origin)
            self._depths_of = made_of
        return self._seen

    def _show_heads(self, session, molecule: str) -> None:
        """A band's siblings are the other heads: steps, too wide for strips in velocity."""
        heads = heads_claimed(session, molecule)
        self.clear()
        self.title.setText(f"Heads of {molecule}")
        self._tell(f"{len(heads)} claimed", "")
        self.strips.hint = "Steps claimed as heads, Å:\n" + "   ".join(f"{w:.2f}" for w in heads)
        self.strips.update()

    def _tell(self, count: str, lines: str) -> None:
        for label, words in ((self.count, count), (self.lines, lines)):
            label.setText(words)
            label.setToolTip(COUNT_TIP)
            label.setVisible(bool(words))

    def _show(self, candidate, absent: str) -> None:
        theme = self._workbench.theme
        self.title.setText(
            f"Siblings of {candidate.species}" if self._found else
            f"No sibling of {candidate.species} falls inside this spectrum")
        absorbs = candidate.depth_predicted > 0  # emission has no predicted profile
        absent = absent if absorbs else "not seen"  # emission has no depth that would have to show
        strips = [Strip(f"{s.wave:.2f}", s.velocity, s.flux, _note(s, candidate.species, absent),
                        s.predicted if absorbs else float("nan")) for s in self._found]
        self.strips.set_strips(strips, theme.colour(candidate.species, candidate.origin))

    def _go(self, index: int) -> None:
        strip = self._found[index]
        if strip.feature is not None:
            self._workbench.view.select(strip.feature)
        else:
            self._workbench.look_at(strip.wave)


def _note(strip, species: str, absent: str) -> str:
    if strip.feature is None:
        return absent if strip.searched else "not searched"
    if strip.said == species:
        return "seen"
    return f"in {strip.said}" if strip.said else "unclaimed"
