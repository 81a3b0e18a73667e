"""The session file: round trip, determinism, atomic save, refusals."""

from __future__ import annotations

import json
import os
from dataclasses import fields, replace

import builders
import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.measure.features import FeatureTable
from linewright.session import edits, file, upgrades
from linewright.session.encode import session_bytes


@pytest.fixture
def saved(tmp_path):
    path = tmp_path / "a.linewright.json"
    made = builders.session(40, segments=3, path=str(tmp_path / "data" / "x.fits"))
    file.save_session(made, path)
    return made, path


def test_everything_comes_back(saved):
    made, path = saved
    back = file.load_session(path)
    for field in fields(FeatureTable):
        expected, found = (
            getattr(made.features, field.name),
            getattr(back.features, field.name),
        )
        if field.name == "flags":
            assert expected == found
        else:
            np.testing.assert_array_equal(expected, found)
    assert repr(back.claims) == repr(made.claims)
    assert repr(back.components) == repr(made.components)
    assert back.spectrum == made.spectrum
    assert back.roll_call == made.roll_call and back.orphans == made.orphans
    np.testing.assert_array_equal(back.velocity.score, made.velocity.score)
    np.testing.assert_array_equal(back.continuum[0].wave, made.continuum[0].wave)
    assert back.velocity.rivals == made.velocity.rivals
    assert back.warnings == made.warnings and back.measurement == made.measurement


def test_saving_what_was_loaded_gives_the_same_bytes(saved, tmp_path):
    _, path = saved
    again = tmp_path / "b.linewright.json"
    file.save_session(file.load_session(path), again)
    assert again.read_bytes() == path.read_bytes()


def test_edits_survive_the_file_and_can_be_restored_after_it(saved, tmp_path):
    made, _ = saved
    number = next(
        int(n)
        for n, c in zip(made.features.number, made.claims, strict=True)
        if len(c.candidates) > 1
    )
    changed = edits.set_aside(edits.accept_candidate(made, number, 2), number, "cosmic ray")
    path = tmp_path / "c.json"
    file.save_session(changed, path)
    back = file.load_session(path)
    assert repr(back.claims) == repr(changed.claims)
    restored = edits.restore(back, number)
    assert repr(restored.claims) == repr(made.claims)


def test_infinities_survive(tmp_path):
    made = builders.session(3)
    made = replace(made, velocity=replace(made.velocity, margin=np.inf), log_pe=-np.inf)
    made = replace(made, measurement={"b": [1.0, np.inf], "a": {"x": -np.inf, "w": "inf"}})
    made.features.wave_err[0] = np.inf
    file.save_session(made, tmp_path / "i.json")
    back = file.load_session(tmp_path / "i.json")
    assert back.velocity.margin == np.inf and back.log_pe == -np.inf
    assert back.features.wave_err[0] == np.inf
    assert back.measurement == made.measurement


def test_any_text_survives(tmp_path):
    made = edits.set_note(builders.session(3), 1, '\u03bb 5007 \ud800 \U0001f31f "q" \\')
    file.save_session(made, tmp_path / "t.json")
    assert file.load_session(tmp_path / "t.json").claims[0].note == made.claims[0].note


def test_the_empty_ledger_is_a_session_too(tmp_path):
    made = builders.session(0)
    file.save_session(made, tmp_path / "e.json")
    back = file.load_session(tmp_path / "e.json")
    assert len(back.features) == 0 and back.claims == ()
    assert back.features.wave.dtype == float


def test_the_spectrum_path_is_relative_in_the_file(saved):
    _, path = saved
    parts = json.loads(path.read_text())
    assert parts["spectrum"]["path"] == "data/x.fits"
    assert parts["wavelengths"].startswith("vacuum")


def test_not_a_number_is_null_and_the_json_is_strict(saved):
    made, path = saved
    parts = json.loads(path.read_text(), parse_constant=lambda name: pytest.fail(name))
    assert np.isnan(made.features.fwhm).sum() > 0
    assert parts["features"]["fwhm"].count(None) == np.isnan(made.features.fwhm).sum()


def test_an_existing_file_is_kept_without_force(saved):
    made, path = saved
    before = path.read_bytes()
    with pytest.raises(InputRefused, match="exists already; use --force"):
        file.save_session(replace(made, seed=9), path)
    assert path.read_bytes() == before
    file.save_session(replace(made, seed=9), path, force=True)
    assert file.load_session(path).seed == 9


@pytest.mark.parametrize("fails", ["replace", "fsync"])
def test_a_failing_save_leaves_the_old_file_whole(saved, monkeypatch, fails):
    made, path = saved
    before = path.read_bytes()

    def broken(*_):
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, fails, broken)
    with pytest.raises(InputRefused, match="No space left"):
        file.save_session(replace(made, seed=9), path, force=True)
    monkeypatch.undo()
    assert path.read_bytes() == before
    assert [p.name for p in path.parent.iterdir()] == [path.name]


def _tampered(path, change):
    parts = json.loads(path.read_text())
    change(parts)
    path.write_text(json.dumps(parts))


TAMPERING = {
    "a column is missing": lambda p: p["features"].pop("depth"),
    "a column is short": lambda p: p["features"]["depth"].pop(),
    "text for a number": lambda p: p["features"]["wave"].__setitem__(0, "5000"),
    "no such standing": lambda p: p["claims"]["standing"].__setitem__(0, "sure"),
    "a probability of 2": lambda p: p["claims"]["probability"].__setitem__(0, 2.0),
    "a claim too few": lambda p: [column.pop() for column in p["claims"].values()],
    "a number twice": lambda p: p["features"]["number"].__setitem__(1, p["features"]["number"][0]),
    "counts that do not add up": lambda p: p["candidates"]["count"].__setitem__(0, 99),
    "an unknown part": lambda p: p.__setitem__("extra", 1),
    "a part is missing": lambda p: p.pop("history"),
    "history not of objects": lambda p: p.__setitem__("history", ["x"]),
    "a broken checksum": lambda p: p["spectrum"].__setitem__("sha256", "abc"),
    "other wavelengths": lambda p: p.__setitem__("wavelengths", "air"),
    "negative wavelength": lambda p: p["features"]["wave"].__setitem__(0, -1.0),
    "half a blend": lambda p: p["claims"]["blend"].__setitem__(0, [["Fe I"]]),
    "a truncated chosen line": lambda p: p["claims"]["chosen"].__setitem__(0, {"species": "Fe I"}),
}


@pytest.mark.parametrize("name", TAMPERING)
def test_a_tampered_file_is_refused(saved, name):
    _, path = saved
    _tampered(path, TAMPERING[name])
    with pytest.raises(InputRefused, match="damaged session") as refused:
        file.load_session(path)
    assert "\n" not in str(refused.value)


@pytest.mark.parametrize(
    ("content", "cause"),
    [
        (b"", "broken or no JSON"),
        (b"{", "broken or no JSON"),
        (b"\xff\xfe", "broken or no JSON"),
        (b"[" * 100_000, "broken or no JSON"),
        (b"[1]", "not a session"),
        (b'{"format": "other"}', "not a session"),
        (b'{"format": "linewright-session"}', "no version"),
        (b'{"format": "linewright-session", "version": true}', "no version"),
        (b'{"format": "linewright-session", "version": 3}', "newer than this program"),
        (b'{"format": "linewright-session", "version": 1}', "damaged"),
        (b'{"format": "linewright-session", "version": NaN}', "broken or no JSON"),
        (b'{"version": 1, "version": 1}', "broken or no JSON"),
    ],
)
def test_other_files_are_refused_in_one_line(tmp_path, content, cause):
    path = tmp_path / "x.json"
    path.write_bytes(content)
    with pytest.raises(InputRefused, match=cause) as refused:
        file.load_session(path)
    assert str(path) in str(refused.value) and "\n" not in str(refused.value)


def test_missing_files_and_folders_are_refused(tmp_path):
    with pytest.raises(InputRefused, match="No such file"):
        file.load_session(tmp_path / "no.json")
    with pytest.raises(InputRefused, match="folder"):
        file.save_session(builders.session(1), tmp_path / "no" / "x.json")
    with pytest.raises(InputRefused, match="is a folder"):
        file.save_session(builders.session(1), tmp_path, force=True)


def test_older_versions_are_lifted_step_by_step():
    steps = {1: lambda p: {**p, "b": p["a"] + 1}, 2: lambda p: {**p, "c": p["b"] + 1}}
    assert upgrades.upgraded({"version": 1, "a": 1}, 3, steps) == {
        "version": 3, "a": 1, "b": 2, "c": 3
    }  # fmt: skip


def test_a_session_of_version_1_still_opens(saved):
    made, path = saved
    _tampered(path, lambda p: (p.pop("temperatures"), p.__setitem__("version", 1)))
    back = file.load_session(path)
    assert back.temperatures == () and back.temperature_k == made.temperature_k
    file.save_session(back, path, force=True)
    assert json.loads(path.read_text())["version"] == 2


def test_temperatures_come_back_with_label_and_error(saved):
    made, path = saved
    adopted, growth = file.load_session(path).temperatures
    assert adopted == made.temperatures[0]
    assert np.isnan(growth.error) and growth.note == "40 lines" and growth.used


def test_the_spectrum_is_found_by_its_checksum(tmp_path):
    data = tmp_path / "x.txt"
    data.write_text("5000 1\n")
    made = builders.session(2, path=str(data), sha=file.file_sha256(data))
    assert file.locate_spectrum(made) == data
    data.write_text("5000 2\n")
    with pytest.raises(InputRefused, match="changed since the session"):
        file.locate_spectrum(made)
    moved = tmp_path / "moved"
    moved.mkdir()
    data.unlink()
    with pytest.raises(InputRefused, match="not there any more"):
        file.locate_spectrum(made, [moved])
    (moved / "x.txt").write_text("5000 1\n")
    assert file.locate_spectrum(made, [moved]) == moved / "x.txt"


def test_is_session_knows_its_own(saved, tmp_path):
    _, path = saved
    other = tmp_path / "o.json"
    other.write_text('{"format": 1}')
    assert file.is_session(path)
    assert not file.is_session(other) and not file.is_session(tmp_path / "none")


def test_bytes_do_not_depend_on_the_order_of_dictionaries(tmp_path):
    made = builders.session(2)
    one = session_bytes(replace(made, options={"a": 1, "b": 2}), tmp_path)
    other = session_bytes(replace(made, options={"b": 2, "a": 1}), tmp_path)
    assert one == other
