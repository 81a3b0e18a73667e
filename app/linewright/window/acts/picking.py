"""A click on a bare trough or peak measures it and adds it to the Ledger."""

from __future__ import annotations

import numpy as np

from ...errors import LinewrightError
from ...session.feature_edits import add_feature
from ..notices import Notice
from ..tasks import Request

MAKING = ("add_feature", "split_feature", "fit_features")  # acts that bring new features


def pick(bench, wave: float) -> None:
    """Snaps to the extremum nearest a vacuum wavelength and fits it, beside the window."""
    if bench.spectrum is None:
        return
    from ...job.view_pick import surroundings

    desk = bench.desk
    about = surroundings(bench.spectrum, bench.session, wave)
    if about is None:
        return
    low, high = bench.view.now.span or bench.spectrum.own_range()
    arguments = (*about, wave, (high - low) * 0.01)
    engine = _free_engine(bench)
    bench.window.spectrum_view.show_pointed(wave)
    bench.tasks.start(Request(
        key="pick", title="Measuring", shown=False,
        work=lambda progress: _call(engine, "pick", arguments),
        done=lambda row: _add(bench, desk, row),
        failed=lambda error: (bench.window.spectrum_view.show_pointed(None),
                              _failed(bench, error)),
    ))


def _free_engine(bench):
    """None while the engine's process is busy: short work is done in a thread then."""
    return None if bench.tasks.busy("solve") or bench.tasks.busy("reweigh") else bench.engine


def _call(engine, name: str, arguments):
    if engine is not None:
        return engine.call(f"job.view_pick:{name}", *arguments)
    from ...job import view_pick

    return getattr(view_pick, name)(*arguments)


def _add(bench, desk, row) -> None:
    if desk is not bench.desk:
        return
    bench.window.spectrum_view.show_pointed(None)
    if row is None:
        bench.notify(Notice("Nothing stands out of the noise there. Zoom in and click nearer to "
                            "its centre.", "note", seconds=6, topic="pick"))
        return
    same = _already(bench.session, row)
    if same is not None:
        bench.view.select(same)
        return
    before = bench.session
    if bench.act(add_feature, row):
        features = bench.session.features
        number = int(features.number[np.argmax(features.number)])
        bench.view.select(number)
        _weigh(bench, desk, before, row, number)


def _weigh(bench, desk, before, row, number: int) -> None:
    """The machine's word on the new feature follows when it is found."""
    from ...job.view_pick import can_weigh, without_claims

    if not can_weigh(before):
        return
    bench.weighing.add(number)
    engine, arguments = _free_engine(bench), (without_claims(before), row, before.spectrum.frame)
    bench.tasks.start(Request(
        key=f"weigh {number}", title="Weighing", shown=False,
        work=lambda progress: _call(engine, "weighed", arguments),
        done=lambda claim: _weighed(bench, desk, number, claim),
        failed=lambda error: (bench.weighing.discard(number), _failed(bench, error)),
    ))
    bench.window.space.evidence.refresh()


def weigh_new(bench, desk, before, number: int) -> None:
    """As after a pick, for a feature that a fit by hand brought."""
    session = bench.session
    _weigh(bench, desk, before, session.features.take([session.index_of(number)]), number)


def _weighed(bench, desk, number: int, claim) -> None:
    """Part of the pick's own step where nothing was done since, else a step of its own."""
    from ...job.view_pick import with_claim

    bench.weighing.discard(number)
    session = desk.document.session
    if number not in session.features.number:
        return
    new = with_claim(session, number, claim)
    if new is session:
        bench.window.space.evidence.refresh()
        return
    selected = bench.view.now.selected
    still_last, label = session.history[-1].action in MAKING, desk.document.undo_label
    if still_last:
        desk.document.undo()
    desk.document.replace(new, label if still_last else "weigh")
    if desk is bench.desk:
        bench.view.select(selected)


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
