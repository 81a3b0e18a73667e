"""Session files: any session comes back, and no damage passes or crashes."""

from __future__ import annotations

import copy
import json
import sys
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from linewright.errors import InputRefused
from linewright.session import edits
from linewright.session.encode import session_bytes
from linewright.session.file import load_session, save_session
from linewright.session.model import Session

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "sessions"))
import builders  # noqa: E402, I001

FAST = settings(
    deadline=None, max_examples=60, suppress_health_check=[HealthCheck.function_scoped_fixture]
)
JSON = st.one_of(
    st.none(), st.booleans(), st.integers(-(10**400), 10**400), st.floats(allow_nan=False),
    st.text(max_size=5), st.just([]), st.just({}), st.lists(st.integers(), max_size=3),
)  # fmt: skip


@FAST
@given(count=st.integers(0, 40), seed=st.integers(0, 10**6), segments=st.integers(1, 5))
def test_any_session_comes_back(tmp_path, count, seed, segments):
    made = builders.session(count, seed, segments)
    path = tmp_path / "s.json"
    save_session(made, path, force=True)
    assert session_bytes(load_session(path), tmp_path) == path.read_bytes()


@pytest.fixture(scope="module")
def whole():
    made = edits.accept_candidate(_judged(builders.session(8, seed=11)), 1, 1)
    return json.loads(session_bytes(made, Path("folder")))


def _judged(made: Session) -> Session:
    for number in made.features.number.tolist():
        if made.claims[made.index_of(number)].candidates:
            made = edits.set_aside(made, number, "artefact")
    rows = [i for i, c in enumerate(made.claims) if c.candidates]
    assert rows, "the example needs a claim with candidates"
    numbers = made.features.number.copy()
    numbers[rows[0]], numbers[0] = 1, numbers[rows[0]]
    made.features.number[:] = numbers
    return made


def test_the_example_itself_is_whole(whole, tmp_path):
    path = tmp_path / "s.json"
    path.write_text(json.dumps(whole))
    assert any("machine" in entry.detail for entry in load_session(path).history)


def _places(value, at=()):
    """Every path into nested JSON."""
    yield at
    if isinstance(value, dict):
        for key, item in value.items():
            yield from _places(item, (*at, key))
    elif isinstance(value, list):
        for index, item in enumerate(value[:3]):
            yield from _places(item, (*at, index))


@settings(FAST, max_examples=250)
@given(data=st.data(), value=JSON)
def test_a_changed_value_is_refused_or_harmless(tmp_path, whole, data, value):
    places = [place for place in _places(whole) if place]
    place = data.draw(st.sampled_from(places))
    parts = copy.deepcopy(whole)
    inner = parts
    for key in place[:-1]:
        inner = inner[key]
    inner[place[-1]] = value
    path = tmp_path / "s.json"
    path.write_text(json.dumps(parts))
    _refused_or_usable(path)


def _refused_or_usable(path):
    try:
        session = load_session(path)
        session_bytes(session, path.parent)
        for number in session.features.number.tolist():
            session = edits.restore(session, number)
    except InputRefused as refusal:
        assert "\n" not in str(refusal)


@settings(FAST, max_examples=120)
@given(data=st.data())
def test_damaged_bytes_are_refused_or_harmless(tmp_path, whole, data):
    content = bytearray(json.dumps(whole).encode())
    start = data.draw(st.integers(0, len(content) - 1))
    length = data.draw(st.integers(0, 200))
    content[start : start + length] = data.draw(st.binary(max_size=20))
    path = tmp_path / "s.json"
    path.write_bytes(bytes(content))
    _refused_or_usable(path)
