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
    desk, spectrum, session = bench.desk, bench.spectrum, bench.session
    span = bench.view.now.span or spectrum.own_range()
    reach = (span[1] - span[0]) * 0.01
    bench.tasks.start(Request(
        key="pick", title="Measuring", shown=False,
        work=lambda progress: _measured(spectrum, session, wave, reach),
        done=lambda row: _add(bench, desk, row),
        failed=lambda error: _failed(bench, error),
    ))


def _measured(spectrum, session, wave: float, reach: float):
    from ...measure import measure_at

    return measure_at(spectrum, wave, reach=reach)


def _add(bench, desk, row) -> None:
    if desk is not bench.desk:
        return
    if row is None or not len(row):
        bench.notify(Notice("Nothing stands out of the noise there. Zoom in and click nearer to "
                            "its centre.", "note", seconds=6, topic="pick"))
        return
    same = _already(bench.session, row)
    if same is not None:
        bench.view.select(same)
        return
    if bench.act(add_feature, row):
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
