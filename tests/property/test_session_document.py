"""Random edits, undo and redo on a Document: always back to identical bytes."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest
from hypothesis import settings
from hypothesis import strategies as st
from hypothesis.stateful import RuleBasedStateMachine, invariant, rule

from linewright.errors import InputRefused
from linewright.session import edits, feature_edits
from linewright.session.document import Document
from linewright.session.encode import session_bytes
from linewright.session.model import STANDINGS
from linewright.session.plain import row_from

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "sessions"))
import builders

FOLDER = Path("folder")
WAVES = st.floats(4990, 5410)


class Sessions(RuleBasedStateMachine):
    """The model: a list of byte strings, and where in it the document stands."""

    def __init__(self):
        super().__init__()
        self.document = Document(builders.session(6, segments=2))
        self.events = []
        self.document.subscribe(lambda old, new: self.events.append((old, new)))
        self.past = [session_bytes(self.document.session, FOLDER)]
        self.at = 0
        self.ever = set(self.document.session.features.number.tolist())

    def _try(self, edit, *args):
        before, heard = self.document.session, len(self.events)
        try:
            self.document.apply(edit, *args)
        except InputRefused:
            assert self.document.session is before and len(self.events) == heard
            return
        if self.document.session is not before:
            assert self.events[-1] == (before, self.document.session)
            self.past = [*self.past[: self.at + 1], session_bytes(self.document.session, FOLDER)]
            self.at += 1

    @rule(data=st.data(), rank=st.integers(0, 4))
    def accept(self, data, rank):
        self._try(edits.accept_candidate, self._number(data), rank)

    def _number(self, data):
        return data.draw(st.sampled_from([*map(int, self.document.session.features.number), 999]))

    @rule(data=st.data(), species=st.sampled_from(["Fe I", "Eu II", ""]))
    def species(self, data, species):
        self._try(edits.set_species, self._number(data), species)

    @rule(data=st.data(), wave=WAVES, share=st.floats(0, 1.2))
    def blend(self, data, wave, share):
        self._try(edits.mark_blend, self._number(data), [("Fe I", wave, share)])

    @rule(data=st.data(), reason=st.sampled_from(["cosmic ray", "gap edge", ""]))
    def aside(self, data, reason):
        self._try(edits.set_aside, self._number(data), reason)

    @rule(data=st.data())
    def restore(self, data):
        self._try(edits.restore, self._number(data))

    @rule(data=st.data(), standing=st.sampled_from([*STANDINGS, "sure"]))
    def standing(self, data, standing):
        self._try(edits.set_standing, self._number(data), standing)

    @rule(data=st.data(), note=st.text(max_size=8))
    def note(self, data, note):
        self._try(edits.set_note, self._number(data), note)

    @rule(wave=WAVES, segment=st.integers(0, 2))
    def add(self, wave, segment):
        before = set(self.document.session.features.number.tolist())
        at = self.at
        row = row_from({"wave": wave, "sign": 1, "segment": segment})
        self._try(feature_edits.add_feature, row)
        if self.at > at:
            assert len(set(self.document.session.features.number.tolist()) - before) == 1

    @rule(data=st.data())
    def remove(self, data):
        self._try(feature_edits.remove_feature, self._number(data))

    @rule(velocity=st.floats(-4e5, 4e5))
    def velocity(self, velocity):
        self._try(edits.set_velocity, velocity)

    @rule()
    def undo(self):
        assert self.document.undo() == (self.at > 0)
        self.at = max(self.at - 1, 0)

    @rule()
    def redo(self):
        assert self.document.redo() == (self.at < len(self.past) - 1)
        self.at = min(self.at + 1, len(self.past) - 1)

    @rule()
    def all_the_way_back_and_forth(self):
        here, start = self.at, self.past[0]
        while self.document.can_undo:
            self.document.undo()
        assert session_bytes(self.document.session, FOLDER) == start
        for _ in range(here):
            assert self.document.redo()

    @invariant()
    def same_bytes_as_the_model(self):
        assert session_bytes(self.document.session, FOLDER) == self.past[self.at]
        assert self.document.can_undo == (self.at > 0)

    @invariant()
    def rows_and_claims_agree(self):
        session = self.document.session
        numbers = session.features.number.tolist()
        assert len(numbers) == len(set(numbers)) == len(session.claims)
        keys = list(zip(session.features.segment, session.features.wave, strict=True))
        assert keys == sorted(keys)


Sessions.TestCase.settings = settings(max_examples=12, stateful_step_count=30, deadline=None)
TestSessions = Sessions.TestCase


def test_saved_follows_undo():
    document = Document(builders.session(3))
    assert document.saved and not document.can_undo and document.undo_label == ""
    document.apply(edits.set_note, 1, "a")
    assert not document.saved and document.undo_label == "set note"
    document.undo()
    assert document.saved and document.redo_label == "set note"
    document.redo()
    document.mark_saved()
    document.undo()
    assert not document.saved


def test_the_oldest_steps_are_forgotten():
    document = Document(builders.session(3), depth=5)
    for turn in range(9):
        document.apply(edits.set_note, 1, str(turn))
    assert sum(document.undo() for _ in range(20)) == 5
    assert document.session.claims[0].note == "3"


def test_a_stopped_subscription_hears_nothing():
    document, heard = Document(builders.session(3)), []
    stop = document.subscribe(lambda old, new: heard.append(new))
    document.apply(edits.set_note, 1, "a")
    stop()
    stop()
    document.undo()
    assert len(heard) == 1


def test_replace_is_one_step():
    document = Document(builders.session(3))
    new = builders.session(4)
    document.replace(new, "solve")
    assert document.session is new and document.undo_label == "solve"
    with pytest.raises(InputRefused):
        document.apply(edits.restore, 77)
    assert document.session is new
