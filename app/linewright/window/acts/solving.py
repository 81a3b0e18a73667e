"""Solving in a worker: a frozen request, progress, cancel, and one step of undo."""

from __future__ import annotations

from ...errors import LinewrightError
from ...job.view_keep import keep_acts
from ..notices import Notice
from ..tasks import Request
from ..typeset import typeset
from . import opening

SOLVE = "job.solve:solve"


def solve(bench) -> None:
    """Solves the shown spectrum as it stands now; editing goes on meanwhile."""
    if bench.session.spectrum.medium not in ("air", "vacuum"):
        opening.ask_medium(bench, lambda: solve(bench))
        return
    desk, spectrum, options = bench.desk, bench.spectrum, bench.desk.options
    engine, before = bench.engine, bench.session
    bench.tasks.start(Request(
        key="solve", title=f"Solving {desk.name}",
        work=lambda progress: _anchored(
            engine, before, spectrum, _solved(engine, spectrum, options, progress)),
        done=lambda session: _take(bench, desk, spectrum, session),
        failed=lambda error: _failed(bench, error),
        stop=lambda: engine.stop(SOLVE),
    ))


def _solved(engine, spectrum, options, progress):
    return engine.call(SOLVE, spectrum, None, options, progress=progress)


def _anchored(engine, before, spectrum, session):
    """Measured again under the continuum anchors a person laid, if any."""
    if not any(len(laid.wave) for laid in before.anchors):
        return session
    return engine.call("job.hand_anchors:keep_anchors", spectrum, before, session)


def _take(bench, desk, spectrum, session) -> None:
    if desk not in bench.desks or desk.spectrum is not spectrum:
        return  # closed, or read in another medium since
    desk.document.replace(keep_acts(desk.document.session, session), "solve")
    told = summary(session)
    bench.notify(with_warnings(bench, told, session, spectrum) if len(session.features) else told)


def summary(session) -> Notice:
    standings = [c.standing for c in session.claims]
    count = len(standings)
    firm = sum(s in ("firm", "likely") for s in standings)
    v = session.velocity
    if not count:
        return Notice("No significant feature was found. Check the continuum and the units, or "
                      "click a trough or peak to measure it.", "warning", topic="solved")
    words = f"{count:,} features, {firm:,} firm or likely, {len(session.orphans):,} orphans."
    if v.declared:
        return Notice(f"{words} Velocity {signed(v.velocity)} ± {v.error:.2f} km/s.", "note",
                      seconds=12, topic="solved")
    return Notice(f"{words} The velocity is not certain: see the other peaks in the Velocity "
                  "track, slide there and solve again.", "warning", topic="solved")


def with_warnings(bench, told: Notice, session, spectrum) -> Notice:
    """The summary with what the solve warns of; what the reading said was said before."""
    new = [w for w in session.warnings if w not in spectrum.warnings]
    if not new:
        return told
    more = f" And {len(new) - 1} more: see the tip of the status line." if len(new) > 1 else ""
    drifts = any("drifts" in w for w in new)
    buttons = (("Velocity residuals", lambda: bench.run("view.residuals")),) if drifts else ()
    first = next((w for w in new if "drifts" in w), new[0])
    return Notice(f"{told.text} Note: {typeset(first)}.{more}", "warning", buttons, topic="solved")


def signed(value: float) -> str:
    return f"{value:+.2f}".replace("-", "−")


def stop(bench) -> None:
    if bench.tasks.cancel("solve"):
        bench.notify(Notice("Stopped. Nothing was changed.", "note", seconds=5, topic="solved"))


def _failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.refuse(error)
    else:
        bench.window.report_unexpected(error)
