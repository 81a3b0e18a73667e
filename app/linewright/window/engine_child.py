"""The engine's own process: receives calls of core functions, sends reports and results.

Messages are pickles on standard input and output; both ends are the same program on the
same machine.
"""

from __future__ import annotations

import importlib
import os
import pickle
import sys
import traceback

from ..errors import LinewrightError
from ..progress import Progress
from .parcels import packed, unpacked


def serve(behind: bool = True) -> None:
    """Answers calls until the window closes the pipe; behind: its frames come first."""
    if behind and hasattr(os, "nice"):
        os.nice(5)
    source = sys.stdin.buffer
    sink = os.fdopen(os.dup(sys.stdout.fileno()), "wb")
    os.dup2(sys.stderr.fileno(), sys.stdout.fileno())  # a stray print must not break a pickle
    while True:
        try:
            target, arguments, keywords = unpacked(pickle.load(source))
        except EOFError:
            return
        _send(sink, _answer(target, arguments, keywords, sink))


def _answer(target: str, arguments, keywords, sink) -> tuple:
    try:
        if keywords.pop("report", False):
            keywords["progress"] = Progress(lambda *told: _send(sink, ("progress", *told)))
        return "done", function_of(target)(*arguments, **keywords)
    except LinewrightError as refusal:
        return "refused", (type(refusal), refusal.what, refusal.cause, refusal.cure)
    except Exception as error:
        error.add_note(traceback.format_exc())
        return "failed", _sendable(error)


def function_of(target: str):
    """The function named 'module:name' below the package."""
    module, _, name = target.partition(":")
    return getattr(importlib.import_module(f"{__package__.rpartition('.')[0]}.{module}"), name)


def _sendable(error: Exception) -> Exception:
    try:
        pickle.loads(pickle.dumps(error))
        return error
    except Exception:
        return RuntimeError("".join(traceback.format_exception(error)))


def _send(sink, message) -> None:
    pickle.dump(packed(message), sink, protocol=pickle.HIGHEST_PROTOCOL)
    sink.flush()


def warm() -> bool:
    """Loads what a solve will need, so that the first one starts at once."""
    from ..lines.loading import load_catalogue

    for name in ("linewright.job.solve", "scipy.optimize"):
        importlib.import_module(name)
    return len(load_catalogue()) > 0
