"""A person's firm claim is data: the other claims are weighed again, looked at, taken over."""

from __future__ import annotations

from dataclasses import replace

from ...errors import LinewrightError
from ...job.view_reweigh import can_reweigh, carried_over, new_word
from ..notices import Notice
from ..tasks import Request

KEY = "reweigh"
CALL = "job.view_reweigh:weighed_again"


def heed(bench, old, new) -> None:
    """After an act: what it changes elsewhere is looked up when the hands come to rest."""
    desk = bench.desk
    if desk is not None and desk.weighed is not None and new is not None:
        if new.features is not desk.weighed.before.features:
            desk.weighed = None
    if new is not None and new_word(old, new):
        bench.window.refresher.reweigh_soon.start()


def propose(bench) -> None:
    """Looks what would change; nothing is changed."""
    if bench.session is None or not can_reweigh(bench.session):
        return
    if bench.tasks.busy("solve") or bench.tasks.busy(KEY):
        bench.window.refresher.reweigh_soon.start()
        return
    _weigh(bench, "Looking what your claim changes", _proposed)


def reweigh(bench) -> None:
    """The other claims change now, as one step of undo."""
    weighed = bench.desk.weighed
    if weighed is not None and weighed.before is bench.session:
        _take(bench, bench.desk, weighed)
        return
    bench.withdraw(KEY)
    _weigh(bench, f"Weighing {bench.desk.name} again", _take)


def _weigh(bench, title: str, then) -> None:
    desk, session, engine = bench.desk, bench.session, bench.engine
    bench.tasks.start(Request(
        key=KEY, title=title,
        work=lambda progress: _weighed(engine, session, progress),
        done=lambda weighed: _arrived(bench, desk, replace(weighed, before=session), then),
        failed=lambda error: _failed(bench, error),
        stop=lambda: engine.stop(CALL)))


def _weighed(engine, session, progress):
    return engine.call(CALL, session, progress=progress)


def _arrived(bench, desk, weighed, then) -> None:
    """Dropped when something was done meanwhile: then it is asked for again."""
    if desk not in bench.desks or desk.document.session is not weighed.before:
        if desk is bench.desk:
            bench.window.refresher.reweigh_soon.start()
        return
    then(bench, desk, weighed)


def _proposed(bench, desk, weighed) -> None:
    desk.weighed = weighed if weighed.changes else None
    bench.window.space.show_changes(desk)
    bench.withdraw(KEY)
    count = len(weighed.changes)
    if count and desk is bench.desk:
        bench.notify(Notice(
            f"{_claims(count)} would change in the light of what you said.", "note",
            (("Re-weigh (F7)", lambda: bench.run("claim.reweigh")),
             ("Show them", lambda: show(bench))), topic=KEY))


def _take(bench, desk, weighed) -> None:
    bench.withdraw(KEY)
    desk.weighed = weighed if weighed.changes else None
    desk.document.replace(carried_over(weighed.before, weighed), "re-weigh")
    count = len(weighed.changes)
    said = (f"{_claims(count)} changed in the light of what you said. Ctrl+Z takes it back."
            if count else "Weighed again: no claim changed.")
    buttons = (("Show them", lambda: show(bench)),) if count else ()
    bench.notify(Notice(said, "note", buttons, seconds=15, topic=KEY))
    bench.window.space.show_changes(desk)


def _claims(count: int) -> str:
    return f"{count:,} claim{'s' if count != 1 else ''}"


def show(bench) -> None:
    """The list of what changed, ready for the arrow keys."""
    space = bench.window.space
    if bench.desk is not None and bench.desk.weighed is not None:
        space.tables.show()
        space.tables.setCurrentWidget(space.changes)
        space.changes.table.setFocus()


def stop(bench) -> None:
    bench.tasks.cancel(KEY)


def _failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.refuse(error)
    else:
        bench.window.report_unexpected(error)
