"""Upper limits, Orphans' reasons and odd excitations, on a sample whose lines are known."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from linewright.claims.consistency import excitation_fences
from linewright.claims.upper_limits import carried
from linewright.job.options import SolveOptions
from linewright.job.solve import solve, solve_features
from linewright.job.view_roll import verdict_words
from linewright.measure.features_from import features_from_columns
from linewright.publish.ledger import rollcall_table
from linewright.resources import samples_dir
from linewright.spectra.medium import from_medium
from linewright.spectra.reading import read_spectrum

PART = SolveOptions(ranges=((5130.0, 5230.0),))
WIDTH = 0.107  # Angstrom, FWHM at R 48,000 and 5150 A, of the unbroadened truth


@pytest.fixture(scope="module")
def session():
    return solve(read_spectrum(samples_dir() / "g_dwarf.fits"), options=PART)


@pytest.fixture(scope="module")
def truth():
    from astropy.table import Table

    return Table.read(samples_dir() / "g_dwarf_truth.ecsv")


def test_limits_belong_to_species_with_no_line_seen(session):
    for row in session.roll_call:
        if np.isfinite(row.limit_dex):
            assert row.seen == 0 and row.limit_ew > 0
    assert sum(np.isfinite(r.limit_dex) for r in session.roll_call) >= 5
    assert all(np.isfinite(r.limit_dex) for r in session.roll_call if r.verdict == "absent")


def test_no_hidden_line_is_stronger_than_its_limit(session, truth):
    """The truth's depth of each limiting line, as an equivalent width, against its limit."""
    wave = from_medium(np.asarray(truth["wave"], dtype=float), session.spectrum.medium)
    checked = 0
    for row in session.roll_call:
        if not np.isfinite(row.limit_dex):
            continue
        mine = (np.asarray(truth["species"]) == row.species) & (abs(wave - row.limit_wave) < 0.02)
        ew = 1064.5 * WIDTH * float(np.max(np.asarray(truth["depth"])[mine], initial=0.0))
        assert ew < max(1.3 * row.limit_ew, 0.3)
        checked += 1
    assert checked >= 5


def test_a_quieter_table_gives_no_stricter_limit(session):
    """Without the noise the faintest features stand for it."""
    alone = solve_features(
        session.features,
        options=SolveOptions(velocity=37.6, coverage=((5130.0, 5230.0),), temperature=5800.0),
    )
    measured = {r.species: r.limit_ew for r in session.roll_call if np.isfinite(r.limit_ew)}
    pairs = [(r.limit_ew, measured[r.species]) for r in alone.roll_call
             if np.isfinite(r.limit_ew) and r.species in measured]
    assert len(pairs) >= 3
    assert np.median([a / b for a, b in pairs]) > 0.9


def test_limits_are_kept_for_species_still_unseen(session):
    row = next(r for r in session.roll_call if np.isfinite(r.limit_dex))
    bare = replace(row, limit_dex=np.nan, limit_wave=np.nan, limit_ew=np.nan)
    assert carried((bare,), (row,))[0].limit_dex == row.limit_dex
    assert np.isnan(carried((replace(bare, seen=1),), (row,))[0].limit_dex)


def test_the_verdict_in_words_names_limit_and_caveat(session):
    iron = next(r for r in session.roll_call if r.species == "Fe I")
    said = " ".join(verdict_words(iron, session))
    assert "Fe I is present" in said and "no abundance" in said and "±" in said
    unseen = next(r for r in session.roll_call if np.isfinite(r.limit_dex))
    assert "would show above" in " ".join(verdict_words(unseen, session))


def test_each_verdict_is_said_in_its_own_words(session):
    iron = next(r for r in session.roll_call if r.species == "Fe I")
    said = {
        verdict: verdict_words(replace(iron, verdict=verdict, expected=n, seen=k, p_chance=p), session)[0]
        for verdict, n, k, p in (
            ("present", 20, 18, 1e-12), ("possible", 4, 1, 0.8), ("absent", 5, 0, 1.0),
            ("not testable", 0, 0, 1.0),
        )
    }  # fmt: skip
    assert "18 of 20" in said["present"] and "below 1e-10" in said["present"]
    assert "not more or better placed than chance" in said["possible"]
    assert said["absent"].endswith("none of 5 expected lines is seen")
    assert "probability" not in said["not testable"] + said["absent"]


def test_emission_is_not_compared_with_solar_abundances(session):
    iron = next(r for r in session.roll_call if r.species == "Fe I")
    glowing = replace(
        session, claims=tuple(replace(c, origin="nebular") for c in session.claims)
    )
    assert "solar abundances" in " ".join(verdict_words(iron, session))
    assert "solar" not in " ".join(verdict_words(iron, glowing))


def test_the_table_has_the_limits_after_the_contracts_columns(session):
    table = rollcall_table(session)
    assert table.colnames[:8] == [
        "species", "expected", "seen", "missing", "p_chance", "offset_dex", "offset_err", "verdict",
    ]
    assert {"limit_dex", "limit_wave", "limit_ew"} <= set(table.colnames[8:])


def test_orphans_say_which_lines_were_refused(session):
    assert session.orphans
    words = ("sigma", "in place", "fits", "no predicted line")
    places = ("in the wing of", "from the edge", "where the air absorbs", "molecular band")
    for orphan in session.orphans:
        parts = orphan.why.split("; ")
        lines = [part for part in parts if not any(w in part for w in places)]
        assert 1 <= len(lines) <= 3
        assert all(any(w in part for w in words) for part in lines)


def test_orphans_that_may_be_a_part_of_something_come_last(session):
    """A shallow feature put beside the deepest one, and one at the edge; what is said is checked
    against the features themselves."""
    f = session.features
    deep = int(np.argmax(f.depth))
    low, high = session.spectrum.coverage[0]
    wave = np.concatenate([f.wave, [f.wave[deep] + 1.1 * f.fwhm[deep], low + 0.2]])
    depth = np.concatenate([f.depth, [0.15 * f.depth[deep], 0.3]])
    width = np.concatenate([f.fwhm, [0.1, 0.1]])
    order = np.argsort(wave)
    table = features_from_columns(
        wave[order], wave_err=0.003, depth=depth[order], depth_err=0.003, fwhm=width[order]
    )
    found = solve_features(
        table, options=SolveOptions(coverage=((low, high),), velocity=session.velocity.velocity),
        medium="vacuum",
    )  # fmt: skip
    t, row = found.features, {int(n): i for i, n in enumerate(found.features.number)}
    doubted = ["in the wing of" in o.why or "from the edge" in o.why for o in found.orphans]
    assert doubted == sorted(doubted) and sum(doubted) >= 2 and not all(doubted)
    for orphan in found.orphans:
        i = row[orphan.feature]
        near = np.abs(t.wave - t.wave[i]) < t.fwhm + t.fwhm[i]
        deeper = bool(np.any(near & (t.depth >= 3 * t.depth[i])))
        assert deeper == ("in the wing of" in orphan.why)
        edge = float(np.min(np.abs(np.array([low, high]) - t.wave[i])))
        assert (edge < 5 * t.fwhm[i]) == (f"{edge:.2f} Å from the edge" in orphan.why)
    weight = np.fmin(t.significance, t.depth / t.depth_err)
    plain = [weight[row[o.feature]] for o, d in zip(found.orphans, doubted) if not d]
    assert plain == sorted(plain, reverse=True)


def test_odd_excitations_stand_outside_the_fence(session):
    fences = excitation_fences(session.claims)
    low, high = fences["Fe I", "stellar"]
    energies = [c.line.e_low for c in session.claims if c.species == "Fe I" and c.standing == "firm"]
    assert low < np.median(energies) < high
    for claim in session.claims:
        if "off-excitation" in claim.flags:
            low, high = fences[claim.species, claim.origin]
            assert not low <= claim.line.e_low <= high
