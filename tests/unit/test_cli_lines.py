"""``linewright lines`` and catalogues of one's own."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.cli.catalogues import chosen_catalogue
from linewright.cli.main import main
from linewright.errors import InputRefused
from linewright.lines.loading import load_catalogue
from linewright.resources import tables_dir

COLUMNS = ["species", "wave", "wave_err", "e_low", "loggf", "source"]


def _shipped():
    try:
        return "hydrogen_helium.npz" in {path.name for path in tables_dir().iterdir()}
    except InputRefused:
        return False


pytestmark = pytest.mark.skipif(not _shipped(), reason="the line tables are not built")


def _read(text):
    from astropy.table import Table

    return Table.read(text, format="ascii.ecsv")


def test_the_sodium_doublet_on_standard_output(capsys):
    # Na I D2, D1: 5889.951, 5895.924 A in air (NIST ASD)
    assert main("lines --range 5885:5900 --species na1 -o -".split()) == 0
    table = _read(capsys.readouterr().out)
    assert table.colnames[:6] == COLUMNS and table.meta["medium"] == "air"
    strong = table[(table["loggf"] > -0.5) & (table["origin"] == "stellar")]
    np.testing.assert_allclose(strong["wave"], [5889.951, 5895.924], atol=0.002)
    assert set(table["species"]) == {"Na I"}


def test_vacuum_and_depth(tmp_path, capsys):
    # Na I D2 5891.583 A in vacuum (NIST ASD)
    out = tmp_path / "l.ecsv"
    arguments = "lines --range 5885:5900 --medium vacuum --depth-above 0.5 --temperature 5800"
    assert main([*arguments.split(), "-o", str(out)]) == 0
    table = _read(out.read_text())
    assert np.abs(table["wave"] - 5891.583).min() < 0.002
    assert len(table) > 1 and np.all(table["depth"] > 0.5)
    assert main([*arguments.split(), "-o", str(out)]) == 1
    assert "exists already" in capsys.readouterr().err


def test_refusals_and_empty_ranges(capsys):
    assert main("lines --range 5885:5900 --depth-above 0.5 -o -".split()) == 1
    assert "give --temperature" in capsys.readouterr().err
    assert main(["lines", "--range", "5885:5900", "--species", "Zz I", "-o", "-"]) == 1
    capsys.readouterr()
    assert main("lines --range 5889.0:5889.1 --species He2 -o -".split()) == 0
    told = capsys.readouterr()
    assert "no line of the catalogue" in told.err and len(_read(told.out)) == 0


def test_catalogues_of_ones_own_replace_or_join_the_shipped(tmp_path):
    own = tmp_path / "own.csv"
    own.write_text("species,wave,loggf\nFe I,5000.0,-1\n")
    assert chosen_catalogue([], "air") == (None, ())
    assert chosen_catalogue(["shipped"], "air") == (None, ())
    alone, notes = chosen_catalogue([str(own)], "air")
    assert len(alone) == 1
    assert any("taken as air like the spectrum" in note for note in notes)
    own.write_text("species,wave,loggf\nFe I,5000.0,-1\nXx I,5001.0,-1\n")
    with pytest.raises(InputRefused, match="row 2"):
        chosen_catalogue([str(own)], "air")
    own.write_text("species,wave,loggf\nFe I,5000.0,-1\n")
    both, _ = chosen_catalogue(["shipped", str(own)], "air")
    assert len(both) == len(load_catalogue()) + 1
    with pytest.raises(InputRefused, match="no such file"):
        chosen_catalogue([str(tmp_path / "none.csv")], "air")
