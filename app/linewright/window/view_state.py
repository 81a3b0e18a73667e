"""What is looked at: never saved with the session and never undone."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace


@dataclass(frozen=True)
class View:
    """selected: permanent number of a feature; candidate: row in its ranked candidates
    span: own-medium Angstrom shown; velocity: of the rake, km/s
    rake: species chosen for the rake, None for the most claimed in view
    line: row of the catalogue line looked at
    """

    selected: int | None = None
    candidate: int = 0
    span: tuple[float, float] | None = None
    velocity: float = 0.0
    rake: tuple[str, ...] | None = None
    line: int | None = None

    def pointed_at(self) -> tuple:
        """What decides which commands are possible."""
        return self.selected, self.candidate, self.rake, self.line


class ViewState:
    """Holds one View and tells its listeners (old, new) after each change."""

    def __init__(self) -> None:
        self.now = View()
        self._listeners: list[Callable[[View, View], None]] = []

    def listen(self, listener: Callable[[View, View], None]) -> None:
        self._listeners.append(listener)

    def change(self, **fields) -> None:
        old, new = self.now, replace(self.now, **fields)
        if new == old:
            return
        self.now = new
        for listener in tuple(self._listeners):
            listener(old, new)

    def select(self, number: int | None, candidate: int = 0) -> None:
        self.change(selected=number, candidate=candidate)
