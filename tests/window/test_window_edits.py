"""Correcting claims: each act by keyboard or button, undone and redone."""

from __future__ import annotations

import pytest
from PySide6.QtCore import Qt


def press(qtbot, window, keys: str) -> None:
    """Triggers the shortcut's action as the keyboard would."""
    found = [a for a in window.menus.actions.values()
             if keys in [s.toString() for s in a.shortcuts()]]
    assert len(found) == 1, keys
    assert found[0].isEnabled(), keys
    found[0].trigger()


@pytest.fixture
def chosen(solved):
    """The window with a feature selected whose claim is the machine's."""
    solved.bench.view.select(13)
    return solved


def claim(window):
    return window.bench.session.claims[window.bench.selected_row()]


def test_accepting_another_candidate_takes_two_actions(chosen, qtbot):
    second = claim(chosen).candidates[1]
    probability = claim(chosen).probability
    qtbot.mouseClick(chosen.space.evidence.rows[1], Qt.MouseButton.LeftButton)
    press(qtbot, chosen, "Ctrl+Return")
    now = claim(chosen)
    assert (now.species, now.standing, now.by) == (second.species, "firm", "person")
    assert now.line == second
    assert now.probability == probability
    assert "✓" in chosen.space.evidence.rows[1].name.text()


def test_the_second_candidate_by_one_key(chosen, qtbot):
    second = claim(chosen).candidates[1]
    press(qtbot, chosen, "Ctrl+2")
    assert claim(chosen).line == second


def test_typing_a_species_claims_it(chosen, qtbot):
    press(qtbot, chosen, "F2")
    field = chosen.space.evidence.species
    qtbot.keyClicks(field, "ca i")
    qtbot.keyClick(field, Qt.Key.Key_Return)
    assert (claim(chosen).species, claim(chosen).by) == ("Ca I", "person")
    assert field.text() == ""


def test_a_species_that_is_none_is_refused_quietly(chosen, qtbot):
    field = chosen.space.evidence.species
    field.setText("Qq IX")
    field.returnPressed.emit()
    assert chosen.notices.current.kind == "refused"
    assert "Qq IX" in chosen.notices.current.text
    assert claim(chosen).by == "machine"


def test_blend_marks_and_unmarks(chosen, qtbot):
    second = claim(chosen).candidates[1]
    chosen.bench.view.change(candidate=1)
    press(qtbot, chosen, "Ctrl+B")
    assert [b[0] for b in claim(chosen).blend] == [second.species]
    assert second.species in chosen.space.evidence.verdict.text()
    press(qtbot, chosen, "Ctrl+B")
    assert claim(chosen).blend == ()


def test_set_aside_restore_and_reasons(chosen, qtbot):
    before = claim(chosen)
    press(qtbot, chosen, "Del")
    assert (claim(chosen).standing, claim(chosen).by) == ("set aside", "person")
    index = chosen.ledger.table.currentIndex()
    assert index.siblingAtColumn(7).data() == "⊗ set aside"
    assert index.data(Qt.ItemDataRole.FontRole).strikeOut()
    press(qtbot, chosen, "Ctrl+R")
    assert (claim(chosen).species, claim(chosen).standing, claim(chosen).by) == (
        before.species, before.standing, "machine")
    press(qtbot, chosen, "Shift+Del")
    assert "cosmic-ray" in claim(chosen).flags


def test_a_note_is_asked_in_the_window_and_shown(chosen, qtbot):
    press(qtbot, chosen, "Ctrl+M")
    edit = chosen.ask_bar.edit
    assert not chosen.ask_bar.isHidden()
    qtbot.keyClicks(edit, "check against the K giant")
    qtbot.keyClick(edit, Qt.Key.Key_Return)
    assert claim(chosen).note == "check against the K giant"
    assert chosen.ask_bar.isHidden()
    titles = [c.title for c in chosen.ledger.model.columns]
    cell = chosen.ledger.table.currentIndex().siblingAtColumn(titles.index("note"))
    assert cell.data() == claim(chosen).note


def test_every_act_is_one_step_of_undo(chosen, qtbot):
    states = [chosen.bench.session]
    for keys in ("Ctrl+2", "Ctrl+B", "Del", "Ctrl+R", "Ctrl+K", "Ctrl+Del"):
        press(qtbot, chosen, keys)
        states.append(chosen.bench.session)
        if keys == "Ctrl+K":
            assert claim(chosen).locked
    for state in reversed(states[:-1]):
        press(qtbot, chosen, "Ctrl+Z")
        assert chosen.bench.session is state
    for state in states[1:]:
        press(qtbot, chosen, "Ctrl+Shift+Z")
        assert chosen.bench.session is state
    assert chosen.bench.view.now.selected is None, "the removed feature stays selected"


def test_undo_names_what_it_takes_back(chosen, qtbot):
    press(qtbot, chosen, "Del")
    assert chosen.menus.actions["edit.undo"].text() == "Undo: set aside"


def test_walking_the_ledger_and_the_undecided(chosen, qtbot):
    press(qtbot, chosen, "Alt+Down")
    assert chosen.bench.view.now.selected == 14
    press(qtbot, chosen, "Alt+Up")
    assert chosen.bench.view.now.selected == 13
    claims = chosen.bench.session.claims
    ahead = [i for i in range(13, len(claims)) if claims[i].standing != "firm"]
    press(qtbot, chosen, "F8")
    assert chosen.bench.selected_row() == ahead[0]


def test_acts_need_a_selected_feature(solved):
    solved.bench.view.select(None)
    for command_id in ("claim.accept", "claim.aside", "claim.note", "claim.blend"):
        assert not solved.menus.actions[command_id].isEnabled()
        assert not solved.bench.allows(command_id)


def test_the_buttons_of_evidence_do_what_the_keys_do(chosen, qtbot):
    buttons = chosen.space.evidence.buttons
    qtbot.mouseClick(buttons["claim.accept"], Qt.MouseButton.LeftButton)
    assert claim(chosen).by == "person"
    qtbot.mouseClick(buttons["claim.aside"], Qt.MouseButton.LeftButton)
    assert claim(chosen).standing == "set aside"


def test_the_walk_begins_in_view_when_nothing_is_selected(solved, qtbot):
    from linewright.spectra.medium import to_medium

    bench = solved.bench
    bench.view.select(None)
    bench.view.change(span=(5200.0, 5220.0))
    press(qtbot, solved, "Alt+Down")
    wave = to_medium(bench.session.features.wave, "air")
    assert bench.selected_row() == int((wave < 5200.0).sum())
