"""Plain words about lines become the query a person means."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.job.view_line_words import Places, as_words, asked
from linewright.job.view_lines import Order, lines_found
from linewright.lines.loading import load_catalogue
from linewright.spectra.medium import vacuum_to_air

NAMES = ("Fe I", "Fe II", "O III", "[O III]", "Ti II", "H2O", "Na I", "CH+")


def query(words, where=Places()):
    return asked(words, NAMES, where).query


@pytest.mark.parametrize("words", ["Fe I", "fe i", "FeI", "fe1", "FE I"])
def test_a_species_in_many_spellings(words):
    assert query(words).species == ("Fe I",)


def test_elements_brackets_and_molecules():
    assert query("fe").species == ("Fe I", "Fe II")
    assert query("o iii").species == ("O III", "[O III]")
    assert query("[O III]").species == ("[O III]",)
    assert query("h2o").species == ("H2O",)
    assert query("Fe I, Ti II").species == ("Fe I", "Ti II")


def test_numbers_with_their_words():
    q = asked("Fe I 5160:5200 e<3 loggf>-1.5 depth>0.05 grade b telluric", NAMES)
    assert q.query.wave_range == (5160.0, 5200.0)
    assert q.query.e_low == (0.0, 3.0)
    assert q.query.loggf_above == -1.5
    assert (q.query.grade, q.query.origin, q.depth_above) == ("B", "telluric", 0.05)
    assert q.query.text == ""
    assert query("E_low 2:3 eV").e_low == (2.0, 3.0)
    assert query("E > 2 e < 4").e_low == (2.0, 4.0)
    assert query("log gf > −1").loggf_above == -1.0
    assert query("5160–5200").wave_range == (5160.0, 5200.0)


def test_what_is_left_is_text():
    assert query("3d6 NIST 5183.6").text == "3d6 NIST 5183.6"


def test_places():
    where = Places("air", (4000.0, 7000.0), (5000.0, 5100.0), None)
    assert query("", where).wave_range == (4000.0, 7000.0)
    assert query("in view", where).wave_range == (5000.0, 5100.0)
    assert query("view 5050:5200", where).wave_range == (5050.0, 5100.0)
    assert query("all", where).wave_range is None
    with pytest.raises(InputRefused):
        query("here", where)
    with pytest.raises(InputRefused):
        query("multiplet", where)
    with pytest.raises(InputRefused):
        query("gf=3", where)


def test_small_fields_become_words():
    fields = {"range": "5160:5200", "species": "Fe I", "e_low": "3", "loggf": "−1", "depth": "0.1"}
    q = asked(as_words(fields), NAMES)
    assert q.query.e_low == (0.0, 3.0) and q.query.loggf_above == -1.0 and q.depth_above == 0.1
    assert asked(as_words({"e_low": ">5"}), NAMES).query.e_low[0] == 5.0
    assert asked(as_words({"e_low": "2:3"}), NAMES).query.e_low == (2.0, 3.0)


def test_the_magnesium_triplet_is_found_in_the_shipped_catalogue():
    """Air wavelengths of the Mg I b lines, from memory of NIST ASD."""
    c = load_catalogue()
    rows = lines_found(c, None, asked("Mg I 5160:5190 e 2.7:2.8 gf>-2", c.species_names))
    assert vacuum_to_air(c.wave[rows]) == pytest.approx([5167.3216, 5172.6843, 5183.6042], abs=2e-3)
    rows = lines_found(c, None, asked("multiplet", c.species_names, Places(line=int(rows[0]))))
    assert len(rows) == 3


def test_orders_keep_what_is_unknown_last():
    c = load_catalogue()
    wanted = asked("5180:5190", c.species_names)
    depth = np.linspace(1, 0, len(c))
    for by in ("e_low", "loggf", "depth"):
        keys = depth if by == "depth" else getattr(c, by)
        for down in (False, True):
            got = keys[lines_found(c, depth, wanted, Order(by, down))]
            known = got[: np.count_nonzero(np.isfinite(got))]
            assert np.all(np.isfinite(known)) and len(known) > 10
            assert np.all(np.diff(known) <= 0 if down else np.diff(known) >= 0)
    names = [c.species_of(r) for r in lines_found(c, None, wanted, Order("species"))]
    assert names == sorted(names)
