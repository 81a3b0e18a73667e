"""A click on a bare trough or peak measures it and adds it to the Ledger."""

from __future__ import annotations

import numpy as np

from ...errors import LinewrightError
from ...session.feature_edits import add_feature
from ..notices import Notice
from ..tasks import Request


def pick(bench, wave: float) -> None:
    """Snaps to the extremum nearest a vacuum wavelength and fits it, beside the window."""
    if bench.spectrum is None:
        return
    from ...job.view_pick import surroundings, without_claims

    desk, session = bench.desk, bench.session
    about = surroundings(bench.spectrum, session, wave)
    if about is None:
        return
    low, high = bench.view.now.span or bench.spectrum.own_range()
    arguments = (*about, without_claims(session), wave, (high - low) * 0.01)
    engine = None if bench.tasks.busy("solve") else bench.engine
    bench.tasks.start(Request(
        key="pick", title="Measuring", shown=False,
        work=lambda progress: _picked(engine, arguments),
        done=lambda found: _add(bench, desk, found),
        failed=lambda error: _failed(bench, error),
    ))


def _picked(engine, arguments):
    """In the engine's process, or here in the worker while that one is solving."""
    if engine is not None:
        return engine.call("job.view_pick:pick", *arguments)
    from ...job.view_pick import pick as pick_here

    return pick_here(*arguments)


def _add(bench, desk, found) -> None:
    if desk is not bench.desk:
        return
    if found is None:
        bench.notify(Notice("Nothing stands out of the noise there. Zoom in and click nearer to "
                            "its centre.", "note", seconds=6, topic="pick"))
        return
    row, claim = found
    same = _already(bench.session, row)
    if same is not None:
        bench.view.select(same)
    elif bench.act(add_feature, row, claim):
        features = bench.session.features
        bench.view.select(int(features.number[np.argmax(features.number)]))


def _already(session, row) -> int | None:
    f = session.features
    reach = max(0.3 * np.nan_to_num(float(row.fwhm[0])), 0.01)
    near = np.nonzero(np.abs(f.wave - row.wave[0]) < reach)[0] if len(f) else []
    return int(f.number[near[0]]) if len(near) else None


def _failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.refuse(error)
    else:
        bench.window.report_unexpected(error)
