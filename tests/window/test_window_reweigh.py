"""A person's claim re-weighs the rest: offered, looked at, taken over, undone, stopped."""

from __future__ import annotations

import threading
from dataclasses import replace

import pytest
from PySide6.QtCore import Qt

from linewright.job.reweigh import Change
from linewright.job.view_reweigh import Weighed, carried_over, new_word
from linewright.session import edits

CHANGED = (3, 8, 20)  # rows


def answer(session) -> Weighed:
    """As the engine would: three claims become Ti II, two others get new probabilities."""
    claims, changes = list(session.claims), []
    for row, old in enumerate(session.claims):
        if row in CHANGED and old.by == "machine" and not old.locked:
            claims[row] = replace(old, species="Ti II", standing="tentative", probability=0.6)
            changes.append(Change(int(session.features.number[row]),
                                  (old.species, old.standing), ("Ti II", "tentative")))
        elif row in (30, 31):
            claims[row] = replace(old, probability=0.111)
    return Weighed(session, replace(session, claims=tuple(claims)), tuple(changes))


@pytest.fixture
def weighing(solved, monkeypatch):
    """The window with a stand-in for the engine's answer; the hands rest at once."""
    from linewright.window.acts import reweighing

    calls = []

    def work(_engine, session, progress):
        calls.append(session)
        return answer(session)
    monkeypatch.setattr(reweighing, "_weighed", work)
    solved.refresher.reweigh_soon.setInterval(1)
    solved.calls = calls
    return solved


def offered(window, qtbot) -> None:
    qtbot.waitUntil(lambda: window.bench.desk.weighed is not None
                    and not window.tasks.busy("reweigh"), timeout=3000)


def test_a_claim_offers_what_it_changes_and_changes_nothing_yet(weighing, qtbot):
    bench = weighing.bench
    bench.view.select(13)
    bench.run("claim.accept2")
    session = bench.session
    offered(weighing, qtbot)
    assert bench.session is session
    assert weighing.notices.current.text.startswith("3 claims would change")
    panel = weighing.space.changes
    assert panel.model.rowCount() == 3 and "3 would change" in panel.count.text()
    assert weighing.space.tables.isTabVisible(weighing.space.tables.indexOf(panel))


def test_notes_and_selections_offer_nothing(weighing, qtbot):
    bench = weighing.bench
    bench.view.select(13)
    bench.act(edits.set_note, 13, "look again")
    bench.run("claim.lock")
    qtbot.wait(30)
    assert weighing.calls == []
    assert not weighing.space.tables.isTabVisible(4)


def test_re_weighing_is_one_step_and_comes_back(weighing, qtbot):
    bench = weighing.bench
    bench.view.select(13)
    bench.run("claim.accept2")
    offered(weighing, qtbot)
    before = bench.session
    bench.run("claim.reweigh")
    assert len(weighing.calls) == 1, "what was looked up is used"
    assert [bench.session.claims[r].species for r in CHANGED] == ["Ti II"] * 3
    assert bench.session.claims[30].probability == 0.111
    assert bench.session.claims[40] is before.claims[40]
    assert bench.session.claims[12] is before.claims[12]
    panel = weighing.space.changes
    assert "3 changed" in panel.count.text() and not panel.button.isEnabled()
    assert weighing.menus.actions["edit.undo"].text() == "Undo: re-weigh"
    bench.run("edit.undo")
    assert bench.session.claims == before.claims
    assert "3 would change" in panel.count.text()


def test_locked_claims_and_a_persons_stay(weighing, qtbot):
    bench = weighing.bench
    for row, command in ((3, "claim.lock"), (8, "claim.accept2")):
        bench.view.select(row + 1)
        bench.run(command)
    kept = bench.session.claims[3], bench.session.claims[8]
    offered(weighing, qtbot)
    bench.run("claim.reweigh")
    qtbot.waitUntil(lambda: bench.session.history[-1].action == "reweigh", timeout=3000)
    assert (bench.session.claims[3], bench.session.claims[8]) == kept
    assert bench.session.claims[20].species == "Ti II"


def test_carrying_over_never_takes_a_locked_claim(solved):
    """Even from an answer that changed one."""
    session = edits.lock(solved.bench.session, 4)
    bad = replace(session, claims=tuple(
        replace(c, species="Ba II", locked=False) for c in session.claims))
    new = carried_over(session, Weighed(session, bad, ()))
    assert new.claims[3] is session.claims[3]
    assert new.claims[5].species == "Ba II"


def test_the_list_leads_to_the_features(weighing, qtbot):
    bench = weighing.bench
    bench.view.select(13)
    bench.run("claim.accept2")
    offered(weighing, qtbot)
    bench.run("claim.changes")
    panel = weighing.space.changes
    assert weighing.space.tables.currentWidget() is panel
    qtbot.keyClick(panel.table, Qt.Key.Key_Down)
    assert bench.view.now.selected in [r + 1 for r in CHANGED]
    texts = [panel.model.index(0, k).data() for k in range(5)]
    assert texts[2] == "◑ tentative  Ti II" and texts[4] == "0.600"
    panel.text.setText("no such")
    panel.filter_now()
    assert panel.model.rowCount() == 0


def test_without_an_offer_it_runs_with_progress_and_stop(weighing, qtbot, monkeypatch):
    from linewright.window.acts import reweighing

    gate = threading.Event()

    def slow(_engine, session, progress):
        while not gate.wait(0.01):
            progress.report("weighing", 0.5)
        return answer(session)
    monkeypatch.setattr(reweighing, "_weighed", slow)
    bench, session = weighing.bench, weighing.bench.session
    bench.run("claim.reweigh")
    qtbot.waitUntil(lambda: "again: weighing" in weighing.status.stage.text(), timeout=3000)
    qtbot.mouseClick(weighing.status.stop, Qt.MouseButton.LeftButton)
    gate.set()
    qtbot.wait(50)
    assert bench.session is session and not bench.tasks.busy("reweigh")
    monkeypatch.setattr(reweighing, "_weighed", lambda e, s, p: answer(s))
    bench.run("claim.reweigh")
    qtbot.waitUntil(lambda: bench.session is not session, timeout=3000)
    assert bench.session.claims[3].species == "Ti II"


def test_an_answer_about_an_older_session_is_dropped(weighing, qtbot, monkeypatch):
    from linewright.window.acts import reweighing

    gate = threading.Event()

    def slow(_engine, session, progress):
        gate.wait(5)
        return answer(session)
    monkeypatch.setattr(reweighing, "_weighed", slow)
    weighing.refresher.reweigh_soon.setInterval(100000)
    bench = weighing.bench
    bench.run("claim.reweigh")
    bench.view.select(13)
    bench.run("claim.aside")
    session = bench.session
    gate.set()
    qtbot.waitUntil(lambda: not bench.tasks.busy("reweigh"), timeout=3000)
    assert bench.session is session and bench.desk.weighed is None


def test_asked_for_while_it_is_looked_up_it_is_taken_over_without_a_second_look(
        weighing, qtbot, monkeypatch):
    from linewright.window.acts import reweighing

    gate, calls = threading.Event(), []

    def slow(_engine, session, progress):
        calls.append(session)
        gate.wait(5)
        return answer(session)
    monkeypatch.setattr(reweighing, "_weighed", slow)
    bench = weighing.bench
    bench.view.select(13)
    bench.run("claim.accept2")
    qtbot.waitUntil(lambda: len(calls) == 1, timeout=3000)
    bench.run("claim.reweigh")
    gate.set()
    qtbot.waitUntil(lambda: bench.session.history[-1].action == "reweigh", timeout=3000)
    assert len(calls) == 1
    assert bench.session.claims[3].species == "Ti II"


def test_asked_for_while_an_older_session_is_looked_up_the_present_one_is_weighed(
        weighing, qtbot, monkeypatch):
    from linewright.window.acts import reweighing

    gate, calls = threading.Event(), []

    def slow(_engine, session, progress):
        calls.append(session)
        gate.wait(5)
        return answer(session)
    monkeypatch.setattr(reweighing, "_weighed", slow)
    bench = weighing.bench
    bench.view.select(13)
    bench.run("claim.accept2")
    qtbot.waitUntil(lambda: len(calls) == 1, timeout=3000)
    bench.view.select(14)
    bench.run("claim.aside")
    present = bench.session
    bench.run("claim.reweigh")
    gate.set()
    qtbot.waitUntil(lambda: bench.session.history[-1].action == "reweigh", timeout=3000)
    assert len(calls) == 2 and calls[1] is present, "nothing is stopped half way"
    assert bench.session.claims[13] is present.claims[13]


def test_a_solved_session_is_made_ready_while_nobody_waits(solved, qtbot, monkeypatch):
    from linewright.window.acts import reweighing

    calls = []
    monkeypatch.setattr(reweighing, "_made_ready", lambda _engine, session: calls.append(session))
    solved.refresher.ready_soon.setInterval(1)
    bench = solved.bench
    bench.desk.ready_for = None
    bench.view.select(13)
    bench.run("claim.accept2")
    qtbot.waitUntil(lambda: len(calls) == 1, timeout=3000)
    bench.run("claim.accept3")
    qtbot.wait(50)
    assert len(calls) == 1, "once for the same features"


def test_what_is_sent_for_a_word_is_small_and_tells_the_same(qtbot):
    """The words alone go to the other process, and the answer is that of the whole session."""
    import pickle

    import window_builders as build

    from linewright.job.reweigh import told
    from linewright.job.view_reweigh import spoken, told_of

    few = build.catalogue_of(60, low=5160.0, high=5200.0)
    session = edits.set_aside(build.session_of(build.spectrum_of(few), few), 1, "artefact")
    session = edits.lock(edits.accept_candidate(session, 5, 2), 9)
    brief = spoken(session)
    assert [c for c in brief.claims if c.candidates] == [session.claims[k] for k in (0, 4, 8)]
    assert len(pickle.dumps(brief)) < 0.5 * len(pickle.dumps(session))
    whole, part = told(session), told_of(pickle.loads(pickle.dumps(brief)))
    assert repr(whole) == repr(part)


def test_words_are_what_others_may_heed(solved):
    old = solved.bench.session
    assert new_word(old, edits.accept_candidate(old, 5, 2))
    assert new_word(old, edits.set_aside(old, 5, "artefact"))
    assert not new_word(old, edits.set_note(old, 5, "a note"))
    assert not new_word(old, old)


def test_the_engine_weighs_in_its_own_process(qtbot):
    """The real call with the shipped lines, over the process's pipe."""
    import window_builders as build

    from linewright.window.acts.reweighing import _made_ready, _weighed
    from linewright.window.engine import Engine

    few = build.catalogue_of(60, low=5160.0, high=5200.0)
    session = edits.set_aside(build.session_of(build.spectrum_of(few), few), 1, "artefact")
    engine = Engine()
    try:
        _made_ready(engine, session)
        weighed = _weighed(engine, session, None)
    finally:
        engine.close()
    assert weighed.after.claims[0] == session.claims[0]
    assert len(weighed.after.claims) == len(session.claims)
