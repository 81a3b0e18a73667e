"""The state behind the window: open desks, catalogue, view; one event when it changes."""

from __future__ import annotations

import math
from collections.abc import Callable
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from ..errors import LinewrightError
from .engine import Engine
from .notices import Notice
from .tasks import Tasks
from .theme import LIGHT
from .view_state import ViewState

if TYPE_CHECKING:  # the welcome page opens without the core
    import numpy as np

    from ..job.options import SolveOptions
    from ..session.document import Document
    from ..session.model import Candidate, Session
    from ..spectra.spectrum import Spectrum


def _options() -> SolveOptions:
    from ..job.options import SolveOptions

    return SolveOptions()


@dataclass(eq=False)
class Desk:
    """One open spectrum: its samples, its document, its session file, how it was seen."""

    spectrum: Spectrum | None
    document: Document
    path: Path | None = None
    options: SolveOptions = field(default_factory=_options)
    span: tuple[float, float] | None = None
    velocity: float = 0.0
    selected: int | None = None
    weighed: object = None  # what the person's words change elsewhere, once looked up
    asked: object = None  # while that is being looked up
    ready_for: object = None  # the features of which that can be looked up at once
    _sticks: tuple = (None, None)

    @property
    def name(self) -> str:
        reference = self.document.session.spectrum
        return Path(reference.path).name or reference.name or "spectrum"

    @property
    def drawn(self) -> Spectrum | None:
        if self.spectrum is not None:
            return self.spectrum
        features = self.document.session.features
        if self._sticks[0] is not features:
            from ..job.view_sticks import stick_spectrum

            self._sticks = features, stick_spectrum(self.document.session)
        return self._sticks[1]

    @property
    def saved(self) -> bool:
        """True as well for a session in which nothing was done yet."""
        session = self.document.session
        untouched = self.path is None and not len(session.features) and not session.history
        return untouched or (self.path is not None and self.document.saved)


class Workbench:
    """What panels and commands share. ``listen`` gets (old session, new session)."""

    def __init__(self, tasks: Tasks):
        self.engine, self.export_engine = Engine(), Engine()  # saving never waits for a solve
        self.words_engine = Engine(behind=False)  # nor do a person's words, who waits for these
        self.engines = self.engine, self.export_engine, self.words_engine
        self.tasks, self.view, self.theme = tasks, ViewState(), LIGHT
        self.desks: list[Desk] = []
        self.desk: Desk | None = None
        self.catalogue = None
        self.depth: np.ndarray | None = None
        self.notify: Callable[[Notice], None] = lambda notice: None
        self.withdraw: Callable[[str], None] = lambda topic: None
        self.commands: dict = {}
        self.window = None
        self.weighing: set[int] = set()  # features whose claim is on its way
        self.asked_file: Path | None = None
        self.listener = None  # to other programs
        self._listeners: list[Callable[[Session | None, Session | None], None]] = []

    @property
    def session(self) -> Session | None:
        return self.desk.document.session if self.desk else None

    @property
    def spectrum(self) -> Spectrum | None:
        return self.desk.spectrum if self.desk else None

    @property
    def drawn(self) -> Spectrum | None:
        """What the plot shows: the spectrum, or sticks for features without one."""
        return self.desk.drawn if self.desk else None

    @property
    def medium(self) -> str:
        known = self.session.spectrum.medium if self.session else "air"
        return known if known in ("air", "vacuum") else "vacuum"

    def listen(self, listener: Callable[[Session | None, Session | None], None]) -> None:
        self._listeners.append(listener)

    def tell(self, old: Session | None, new: Session | None) -> None:
        for listener in tuple(self._listeners):
            listener(old, new)

    def add_desk(self, desk: Desk) -> None:
        desk.document.subscribe(lambda old, new: self._changed(desk, old, new))
        self.desks.append(desk)
        self.show_desk(desk)

    def show_desk(self, desk: Desk | None) -> None:
        old = self.session
        self._remember()
        self.desk = desk
        self.view.change(selected=None, candidate=0, span=None, rake=None, line=None,
                         velocity=desk.velocity if desk else 0.0)
        self.tell(old, self.session)
        if desk is not None and desk.span is not None:
            self.view.change(span=desk.span, selected=desk.selected)

    def _remember(self) -> None:
        if self.desk is not None:
            now = self.view.now
            self.desk.span, self.desk.velocity = now.span, now.velocity
            self.desk.selected = now.selected

    def _changed(self, desk: Desk, old: Session, new: Session) -> None:
        if desk is not self.desk:
            return
        selected = self.view.now.selected
        if selected is not None and selected not in new.features.number:
            self.view.select(None)
        velocity = new.velocity.velocity
        if velocity != old.velocity.velocity and math.isfinite(velocity):
            self.view.change(velocity=float(velocity))
        self.tell(old, new)

    def selected_row(self) -> int | None:
        """Row of the selected feature in the present session."""
        number = self.view.now.selected
        if self.session is None or number is None:
            return None
        at = (self.session.features.number == number).nonzero()[0]
        return int(at[0]) if len(at) else None

    def about_selected(self) -> tuple[float, float] | None:
        """A few widths about the selected feature, own-medium Angstrom."""
        from .acts import viewing

        return viewing.about_selected(self)

    def vacuum_range(self) -> tuple[float, float] | None:
        """Of what is drawn, vacuum Angstrom."""
        if self.drawn is None:
            return None
        segments = self.drawn.segments
        return (float(min(s.wave[0] for s in segments)), float(max(s.wave[-1] for s in segments)))

    def candidate(self) -> Candidate | None:
        """The candidate under consideration in Evidence."""
        row = self.selected_row()
        if row is None:
            return None
        claim = self.session.claims[row]
        if not claim.candidates:
            return claim.line
        return claim.candidates[min(self.view.now.candidate, len(claim.candidates) - 1)]

    def act(self, edit: Callable[..., Session], *arguments) -> bool:
        """Does an edit as one step of undo; a refusal becomes a notice."""
        if self.desk is None:
            return False
        try:
            self.desk.document.apply(edit, *arguments)
        except LinewrightError as refusal:
            self.refuse(refusal)
            return False
        return True

    def refuse(self, error: Exception) -> None:
        self.notify(Notice(str(error), "refused", topic=type(error).__name__))

    def run(self, command_id: str) -> None:
        if self.allows(command_id):
            self.commands[command_id].run(self)

    def allows(self, command_id: str) -> bool:
        return self.commands[command_id].enabled(self)

    # what panels ask for; each goes to the module that knows how
    def name_species(self, text: str) -> bool:
        from .acts import claiming

        return claiming.name_species(self, text)

    def show_on_rake(self, species: str) -> None:
        from .acts import viewing

        viewing.show_on_rake(self, species)

    def name_rake(self, text: str) -> None:
        from .acts import viewing

        viewing.name_rake(self, text)

    def look_at(self, wave: float) -> None:
        from .acts import viewing

        viewing.look_at(self, wave)

    def look_at_line(self, row: int) -> None:
        from .acts import viewing

        viewing.look_at_line(self, row)
