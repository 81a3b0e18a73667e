"""A person's firm claim is data: the other claims are weighed again, looked at, taken over."""

from __future__ import annotations

from dataclasses import dataclass, replace

from ...errors import LinewrightError
from ...job.view_reweigh import can_reweigh, carried_over, new_word, spoken, weighed_with
from ..notices import Notice
from ..tasks import Request

KEY, READY = "reweigh", "ready to weigh"
CALL, PREPARE = "job.view_reweigh:told_of", "job.view_reweigh:made_ready"


@dataclass(frozen=True, eq=False)
class Asked:
    """The session being weighed, and the one in which the person asked for the outcome."""

    session: object
    wanted: object = None


def heed(bench, old, new) -> None:
    """After an act: what it changes elsewhere is looked up when the hands come to rest."""
    desk = bench.desk
    if desk is not None and desk.weighed is not None and new is not None:
        if new.features is not desk.weighed.before.features:
            desk.weighed = None
    if new is not None and new_word(old, new):
        bench.window.refresher.reweigh_soon.start()
    if new is not None and desk.ready_for is not new.features:
        bench.window.refresher.ready_soon.start()


def make_ready(bench) -> None:
    """What the spectrum says before the person speaks is weighed while nobody waits."""
    desk, engine = bench.desk, bench.words_engine
    if desk is None or not can_reweigh(desk.document.session) or bench.tasks.busy("solve"):
        return
    session = desk.document.session
    if desk.ready_for is session.features or bench.tasks.busy(READY) or bench.tasks.busy(KEY):
        return
    desk.ready_for = session.features
    bench.tasks.start(Request(
        key=READY, title="", shown=False, work=lambda _progress: _made_ready(engine, session),
        done=lambda _none: make_ready(bench), failed=lambda error: _failed(bench, error),
        stop=lambda: engine.stop(PREPARE)))


def _made_ready(engine, session) -> None:
    engine.call(PREPARE, spoken(session))


def propose(bench) -> None:
    """Looks what would change; nothing is changed."""
    if bench.session is None or not can_reweigh(bench.session):
        return
    if bench.tasks.busy("solve") or bench.tasks.busy(KEY):
        bench.window.refresher.reweigh_soon.start()
        return
    _weigh(bench, "Looking what your claim changes", take=False)


def reweigh(bench) -> None:
    """The other claims change now, as one step of undo."""
    desk, weighed = bench.desk, bench.desk.weighed
    if weighed is not None and weighed.before is bench.session:
        _take(bench, desk, weighed)
        return
    bench.withdraw(KEY)
    if bench.tasks.busy(KEY) and desk.asked is not None:  # what is under way serves as well
        desk.asked = replace(desk.asked, wanted=bench.session)
        return
    _weigh(bench, f"Weighing {desk.name} again", take=True)


def _weigh(bench, title: str, take: bool) -> None:
    desk, session, engine = bench.desk, bench.session, bench.words_engine
    desk.asked = Asked(session, session if take else None)
    bench.tasks.start(Request(
        key=KEY, title=title,
        work=lambda progress: _weighed(engine, session, progress),
        done=lambda weighed: _arrived(bench, desk, replace(weighed, before=session)),
        failed=lambda error: _failed(bench, error),
        stop=lambda: engine.stop(CALL)))


def _weighed(engine, session, progress):
    return weighed_with(session, engine.call(CALL, spoken(session), progress=progress))


def _arrived(bench, desk, weighed) -> None:
    """Dropped when something was done meanwhile: then it is asked for again."""
    asked, desk.asked = desk.asked, None
    now = desk.document.session
    take = asked is not None and asked.wanted is now
    if desk not in bench.desks or now is not weighed.before:
        if desk is bench.desk and take:
            _weigh(bench, f"Weighing {desk.name} again", take=True)
        elif desk is bench.desk:
            bench.window.refresher.reweigh_soon.start()
        return
    (_take if take else _proposed)(bench, desk, weighed)


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
    bench.window.refresher.reweigh_soon.stop()  # nothing is left to look up
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
