"""One request of a kind at a time beside the window; of those that come meanwhile the newest."""

from __future__ import annotations

from collections.abc import Callable

from .tasks import Request, Tasks


class Coalesced:
    """Fast typing asks often; what is under way ends first, what was overtaken never starts."""

    def __init__(self, tasks: Tasks, key: str, title: str, failed: Callable[[Exception], None]):
        self._tasks, self._key, self._title, self._failed = tasks, key, title, failed
        self._next: tuple | None = None

    @property
    def busy(self) -> bool:
        return self._tasks.busy(self._key)

    def ask(self, work: Callable[[], object], done: Callable[[object], None]) -> None:
        if self.busy:
            self._next = work, done
            return
        self._next = None
        self._tasks.start(Request(
            key=self._key, title=self._title, shown=False, work=lambda progress: work(),
            done=lambda result: self._ended(done, result),
            failed=lambda error: self._ended(self._failed, error)))

    def _ended(self, tell, outcome) -> None:
        following, self._next = self._next, None
        if following is not None:  # what ended is out of date
            self.ask(*following)
        else:
            tell(outcome)
