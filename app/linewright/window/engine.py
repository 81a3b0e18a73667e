"""Long work in a process of its own: frames keep their rate, and stopping is immediate."""

from __future__ import annotations

import os
import sys
import threading
from pathlib import Path
from typing import TYPE_CHECKING

from ..errors import Cancelled, LinewrightError
from ..progress import Progress

if TYPE_CHECKING:
    from subprocess import Popen

_PACKAGE_PARENT = str(Path(__file__).resolve().parents[2])
_START = "from linewright.window.engine_child import serve; serve({})"


class EngineLost(LinewrightError):
    """The process ended by itself, such as for want of memory."""


class Engine:
    """One child process, started when first needed and again after a stop."""

    def __init__(self, behind: bool = True):
        """behind: the window's frames come first; else somebody waits for a quick answer."""
        self._start = _START.format(behind)
        self._child: Popen | None = None
        self._turn = threading.Lock()  # one call at a time
        self._stopped, self._target = False, ""

    def _alive(self) -> Popen:
        if self._child is not None and self._child.poll() is not None:
            self._reap(self._child)
        if self._child is None:
            import subprocess

            paths = [_PACKAGE_PARENT, *filter(None, [os.environ.get("PYTHONPATH", "")])]
            self._child = subprocess.Popen(
                [sys.executable, "-c", self._start],
                stdin=subprocess.PIPE, stdout=subprocess.PIPE, stderr=subprocess.DEVNULL,
                env={**os.environ, "PYTHONPATH": os.pathsep.join(paths)},
            )
        return self._child

    def call(self, target: str, *arguments, progress: Progress | None = None, **keywords):
        """Result of the core function 'module:name'; call it from a worker thread.

        Raises what the function raises, Cancelled after ``stop``, EngineLost when the
        process died.
        """
        import pickle

        from .parcels import packed

        with self._turn:
            self._stopped, self._target = False, target
            if progress is not None:
                progress.report("starting", 0.0)
                keywords["report"] = True
            child = self._alive()
            try:
                pickle.dump(packed((target, arguments, keywords)), child.stdin,
                            protocol=pickle.HIGHEST_PROTOCOL)
                child.stdin.flush()
                kind, content = self._await(child, progress)
            except (EOFError, OSError, pickle.UnpicklingError) as broken:
                self._reap(child)
                raise self._ending() from broken
            except BaseException:  # given up half way, such as by a cancelled progress: what
                self._reap(child)  # the child still says must not answer the next call
                raise
        return _outcome(kind, content)

    def _await(self, child, progress: Progress | None):
        import pickle

        from .parcels import unpacked

        while True:
            kind, *content = unpacked(pickle.load(child.stdout))
            if kind != "progress":
                return kind, content[0]
            if progress is not None:
                progress.report(*content)

    def _ending(self) -> Exception:
        if self._stopped:
            return Cancelled("stopped")
        return EngineLost("the engine", "its process ended by itself", "try again, or solve a "
                          "part of the spectrum if memory is short")

    def _reap(self, child) -> None:
        child.kill()
        child.wait()
        for pipe in (child.stdin, child.stdout):
            try:
                pipe.close()
            except OSError:
                pass
        if self._child is child:
            self._child = None

    @property
    def busy(self) -> bool:
        """Whether a call is under way."""
        return self._turn.locked()

    def stop(self, target: str | None = None) -> None:
        """Ends the call under way at once; the next call starts a new process.

        target: only if this function is what is being called
        """
        if target not in (None, self._target):
            return
        self._stopped = True
        child = self._child
        if child is not None and self._turn.locked():
            child.kill()

    def close(self) -> None:
        """Ends the process; called when the window closes."""
        self.stop()
        with self._turn:
            if self._child is not None:
                self._reap(self._child)


def _outcome(kind: str, content):
    """The result, or what the function raised."""
    if kind == "refused":
        refusal, *words = content
        raise refusal(*words)
    if kind == "failed":
        raise content
    return content
