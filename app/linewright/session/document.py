"""The open session of a window or script: undo, redo, and one event."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

from .change import Change, change_between
from .model import Session

Watcher = Callable[[Session, Session], None]


@dataclass(frozen=True)
class _Step:
    label: str
    back: Change
    on: Change


class Document:
    """Holds one Session at a time and the way back.

    A step holds only what it changed, both ways, so memory grows with the acts and not with
    the size of the session; the oldest of more than ``depth`` steps are forgotten. Callbacks given to ``subscribe`` get (old, new) after
    every change, undo and redo included.
    """

    def __init__(self, session: Session, depth: int = 1000):
        self._session = session
        self._saved = session
        self._depth = depth
        self._done: list[_Step] = []
        self._undone: list[_Step] = []
        self._watchers: list[Watcher] = []

    @property
    def session(self) -> Session:
        return self._session

    def subscribe(self, changed: Watcher) -> Callable[[], None]:
        """Call ``changed(old, new)`` after every change; returns the way to stop it."""
        self._watchers.append(changed)
        return lambda: self._watchers.remove(changed) if changed in self._watchers else None

    def apply(self, edit: Callable[..., Session], *args, **kwargs) -> Session:
        """Run an edit on the session. When it refuses (raises), nothing changes."""
        old = self._session
        new = edit(old, *args, **kwargs)
        acted = len(new.history) > len(old.history)
        name = new.history[-1].action if acted else getattr(edit, "__name__", "edit")
        return self.replace(new, name.replace("_", " "))

    def replace(self, new: Session, label: str) -> Session:
        """Make ``new`` the session as one step of undo, such as the result of a solve."""
        old = self._session
        if new is not old:
            step = _Step(label, change_between(new, old), change_between(old, new))
            self._done.append(step)
            del self._done[: -self._depth]
            self._undone.clear()
            self._show(new)
        return new

    def _show(self, new: Session) -> None:
        old, self._session = self._session, new
        for watcher in tuple(self._watchers):
            watcher(old, new)

    @property
    def can_undo(self) -> bool:
        return bool(self._done)

    @property
    def can_redo(self) -> bool:
        return bool(self._undone)

    @property
    def undo_label(self) -> str:
        """What undo would take back; empty when there is nothing."""
        return self._done[-1].label if self._done else ""

    @property
    def redo_label(self) -> str:
        """What redo would do again; empty when there is nothing."""
        return self._undone[-1].label if self._undone else ""

    def undo(self) -> bool:
        """Back by one step; False when there is none."""
        if not self._done:
            return False
        step = self._done.pop()
        self._undone.append(step)
        self._show(step.back.apply(self._session))
        return True

    def redo(self) -> bool:
        """Forward by one step; False when there is none."""
        if not self._undone:
            return False
        step = self._undone.pop()
        self._done.append(step)
        self._show(step.on.apply(self._session))
        return True

    @property
    def saved(self) -> bool:
        """Whether the session is the one last saved or opened (undo can come back to it)."""
        return self._session is self._saved

    def mark_saved(self) -> None:
        """The present session is on disk now."""
        self._saved = self._session
