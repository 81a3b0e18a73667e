"""The shipped catalogue as loaded: shape, order, identity, speed; tables against the manifest."""

from __future__ import annotations

import hashlib
import json
import os
import subprocess
import sys
from pathlib import Path

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.lines import loading
from linewright.lines.catalogue import ORIGINS
from linewright.lines.citations import bibtex, citation
from linewright.lines.loading import LINE_TABLES, load_catalogue
from linewright.lines.species import parse_species
from linewright.lines.strengths import absorption_strength
from linewright.resources import tables_dir

ROOT = Path(__file__).resolve().parents[2]
SOURCES = os.environ.get("LINEWRIGHT_SOURCES", "")


@pytest.fixture(scope="module")
def catalogue():
    return load_catalogue()


def test_sorted_finite_and_of_equal_length(catalogue):
    assert np.all(np.diff(catalogue.wave) >= 0)
    for name, values in vars(catalogue).items():
        if isinstance(values, np.ndarray):
            assert len(values) == len(catalogue), name
    assert np.isfinite(catalogue.wave).all()
    assert (catalogue.wave_err > 0).all() and np.isfinite(catalogue.wave_err).all()
    assert (catalogue.spread >= 0).all()
    assert catalogue.wave[0] > 1150 and catalogue.wave[-1] < 25001


def test_every_origin_has_what_it_needs(catalogue):
    origin = np.array(ORIGINS)[catalogue.origin]
    assert set(origin) >= {"stellar", "nebular", "telluric", "interstellar", "sky"}
    assert np.isfinite(catalogue.loggf[origin == "stellar"]).all()
    assert np.isfinite(catalogue.e_low[origin == "stellar"]).all()
    assert np.isfinite(catalogue.emission[origin == "nebular"]).all()
    assert (catalogue.depth_ref[origin == "telluric"] > 0).all()
    assert not np.isfinite(catalogue.loggf[origin == "telluric"]).any()


def test_species_names_are_canonical_and_used(catalogue):
    for name in catalogue.species_names:
        assert str(parse_species(name)) == name
    assert set(catalogue.species) == set(range(len(catalogue.species_names)))


def test_no_line_is_entered_twice(catalogue):
    """Same origin and species, E_low within 1 meV and wavelength within 1 mA."""
    order = np.lexsort((catalogue.wave, catalogue.species, catalogue.origin))
    same = (np.diff(catalogue.species[order]) == 0) & (np.diff(catalogue.origin[order]) == 0)
    near = np.diff(catalogue.wave[order]) < 0.001
    level = ~(np.abs(np.diff(catalogue.e_low[order])) > 0.001)
    assert np.flatnonzero(same & near & level).tolist() == []


def test_no_pair_of_levels_has_two_lines(catalogue):
    """Same origin, species, terms and J within 0.05 A; lines of unresolved terms aside."""
    c = catalogue
    known = (c.term_low > 0) & (c.term_up > 0) & np.isfinite(c.j_low) & np.isfinite(c.j_up)
    rows = np.flatnonzero(known)
    key = np.stack([c.origin, c.species, c.term_low, c.term_up, 2 * c.j_low, 2 * c.j_up], axis=1)
    rows = rows[np.lexsort((c.wave[rows], *key[rows].T))]
    same = (key[rows][1:] == key[rows][:-1]).all(axis=1) & (np.diff(c.wave[rows]) < 0.05)
    assert known.sum() > 150000
    assert np.flatnonzero(same).tolist() == []


def test_arrays_are_read_only_and_shared(catalogue):
    assert load_catalogue() is catalogue
    with pytest.raises(ValueError, match="read-only"):
        catalogue.wave[0] = 1.0


def test_selection_by_origin_and_table(catalogue):
    sky = load_catalogue(origins=("sky", "telluric"))
    assert 0 < len(sky) < len(catalogue)
    assert set(np.array(ORIGINS)[sky.origin]) == {"sky", "telluric"}
    parts = [load_catalogue(name) for name in LINE_TABLES]
    assert sum(len(part) for part in parts) == len(catalogue)
    assert {part.identity for part in parts} == {catalogue.identity}


def test_unknown_origin_and_table_are_refused():
    with pytest.raises(InputRefused):
        load_catalogue(origins=("lunar",))
    with pytest.raises(InputRefused):
        load_catalogue("everything")


def test_every_source_has_a_citation_and_a_bibtex_entry(catalogue):
    for key in catalogue.source_keys:
        assert citation(key) != key
        assert f"{{{key}," in bibtex([key])


def test_a_users_own_source_is_its_own_citation():
    assert citation("user:mine.csv") == "user:mine.csv" and bibtex(["user:mine.csv"]) == ""


def test_strengths_are_known_where_log_gf_is(catalogue):
    strength = absorption_strength(catalogue, 5777.0, 1.2)
    assert strength.shape == (len(catalogue),)
    assert np.isfinite(strength[catalogue.origin == ORIGINS.index("stellar")]).all()
    assert np.isnan(strength[np.isnan(catalogue.loggf)]).all()


def test_metallicity_and_abundance_shift_what_they_should(catalogue):
    names = [catalogue.species_names.index(n) for n in ("Fe I", "Ba II", "H I")]
    base = absorption_strength(catalogue, 5000.0, 1.0)
    poor = absorption_strength(catalogue, 5000.0, 1.0, -1.0, {"Ba": 0.7})
    for code, shift in zip(names, (-1.0, -0.3, 0.0), strict=True):
        mine = (catalogue.species == code) & np.isfinite(base)
        assert (poor - base)[mine] == pytest.approx(shift, abs=1e-9)


def test_tables_are_the_ones_in_the_manifest():
    folder = tables_dir()
    manifest = json.loads((folder / "manifest.json").read_text())
    shipped = {path.name for path in folder.iterdir()} - {"manifest.json"}
    assert shipped == set(manifest)
    for name, entry in manifest.items():
        data = (folder / name).read_bytes()
        assert hashlib.sha256(data).hexdigest() == entry["sha256"], name
    assert sum(entry["bytes"] for entry in manifest.values()) < 15e6
    assert max(entry["bytes"] for entry in manifest.values()) < 4e6


def _rebuild(builder, folder):
    script = ROOT / "linedata" / "builders" / f"{builder}.py"
    command = [sys.executable, str(script), SOURCES, "--out", str(folder)]
    subprocess.run(command, check=True, capture_output=True)
    return json.loads((folder / "manifest.json").read_text())


@pytest.mark.timeout(900)
@pytest.mark.skipif(not SOURCES, reason="LINEWRIGHT_SOURCES names no folder of source packages")
def test_rebuilding_every_table_gives_the_same_bytes(tmp_path):
    """Minutes: build_all from an empty folder, against the shipped manifest."""
    assert _rebuild("build_all", tmp_path) == json.loads(
        (tables_dir() / "manifest.json").read_text()
    )


@pytest.mark.parametrize("text", ["", "{}", "[", '{"citations.json": {}}'])
def test_an_empty_or_damaged_manifest_is_refused_in_one_line(tmp_path, monkeypatch, text):
    """A manifest caught half written, or of another kind, ends in a plain refusal."""
    (tmp_path / "manifest.json").write_text(text)
    monkeypatch.setattr(loading, "tables_dir", lambda: tmp_path)
    loading._load.cache_clear()
    try:
        with pytest.raises(InputRefused) as refusal:
            load_catalogue()
    finally:
        loading._load.cache_clear()
    assert "\n" not in str(refusal.value) and "Linewright again" in str(refusal.value)


def test_a_damaged_table_is_refused_in_one_line(tmp_path, monkeypatch):
    (tmp_path / "manifest.json").write_text('{"atomic_lines.npz": {}}')
    (tmp_path / "atomic_lines.npz").write_bytes(b"no archive")
    monkeypatch.setattr(loading, "tables_dir", lambda: tmp_path)
    loading._load.cache_clear()
    try:
        with pytest.raises(InputRefused, match="damaged"):
            load_catalogue()
    finally:
        loading._load.cache_clear()
