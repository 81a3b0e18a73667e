"""Core functions called for work by hand: in the engine's process where that is free."""

from __future__ import annotations


def call(engine, target: str, *arguments):
    """Result of 'module:name' of the core, from a worker thread."""
    if engine is not None:
        return engine.call(target, *arguments)
    from .engine_child import function_of

    return function_of(target)(*arguments)


def free_engine(bench):
    """None while the engine's process is at work: a drag does not wait for it, short work is
    done in a thread then."""
    return None if bench.tasks.busy("solve") or bench.engine.busy else bench.engine


def ready_to_fit(lean, stretch):
    """``job.hand_edits.prepared``, with what the fits that follow will import."""
    import scipy.optimize  # noqa: F401

    from ..job.hand_edits import prepared

    return prepared(lean, stretch)
