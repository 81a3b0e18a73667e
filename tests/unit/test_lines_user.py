"""User tables in VOTable and fixed width, with units, column names, medium and citation."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.lines.citations import citation
from linewright.lines.loading import load_catalogue
from linewright.lines.user import merge_catalogues, questions, read_user_catalogue, read_user_rows
from linewright.lines.user_layout import Layout
from linewright.spectra.medium import air_to_vacuum

TEXT = (
    "# a list of my own\n"
    "Fe I    500.0100   9685.0  -1.20\n"
    "Ti II   450.1270           -0.70\n"
    "Xx I    450.0000           -0.70\n"
    "Ca I    nonsense  15210.1  -0.40\n"
)
FIXED = Layout(
    columns={"species": (1, 7), "wave": (8, 17), "e_low": (18, 26), "loggf": (27, 33)},
    units={"wave": "nm", "e_low": "cm-1"},
    citation="Me 2025, Journal 1, 2",
)


def votable(folder, unit="um", **meta):
    from astropy.table import Table

    table = Table({"ion": ["Fe I", "O I"], "lam": [0.5, 0.7774], "E": [1.2, 9.15]})
    table["lam"].unit, table["E"].unit = unit, "eV"
    table["lam"].info.meta = {"ucd": "em.wl"}
    table.meta.update(meta)
    path = folder / "mine.vot"
    table.write(path, format="votable")
    return path


def test_fixed_width_with_units_and_citation(tmp_path):
    path = tmp_path / "mine.txt"
    path.write_text(TEXT)
    found = read_user_rows(path, "air", layout=FIXED)
    lines = found.catalogue
    assert [lines.species_of(k) for k in range(2)] == ["Ti II", "Fe I"]
    assert lines.wave == pytest.approx(air_to_vacuum([4501.27, 5000.1]), abs=1e-9)
    assert lines.e_low[1] == pytest.approx(9685.0 / 8065.543937)
    assert np.isnan(lines.e_low[0]) and lines.loggf[0] == -0.7
    assert [text.split(":")[0] for text in found.problems] == ["row 4", "row 5"]
    assert citation(lines.source_keys[0]) == "Me 2025, Journal 1, 2"


def test_votable_in_micron_with_mapped_columns(tmp_path):
    layout = Layout(columns={"species": "ion", "wave": "lam", "e_low": "E"})
    lines = read_user_catalogue(votable(tmp_path), "vacuum", layout)
    assert lines.wave == pytest.approx([5000.0, 7774.0])
    assert lines.e_low == pytest.approx([1.2, 9.15])


def test_the_wavelength_column_of_a_votable_is_known_by_its_ucd(tmp_path):
    lines = read_user_catalogue(votable(tmp_path, "nm"), "vacuum", Layout({"species": "ion"}))
    assert lines.wave == pytest.approx([5.0, 7.774])


def test_wavenumbers_turn_into_wavelengths(tmp_path):
    path = tmp_path / "mine.csv"
    path.write_text("species,wave,wave_err\nFe I,20000,0.02\n")
    lines = read_user_catalogue(path, "vacuum", Layout(units={"wave": "cm-1"}))
    assert lines.wave[0] == pytest.approx(5000.0)
    assert lines.wave_err[0] == pytest.approx(0.005)


def test_what_a_file_does_not_say_is_asked(tmp_path):
    bare = tmp_path / "bare.csv"
    bare.write_text("species,wave\nFe I,5000\n")
    assert questions(bare) == ("medium", "unit of wave", "citation")
    full = tmp_path / "full.ecsv"
    full.write_text(
        "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: species, datatype: string}\n"
        "# - {name: wave, unit: Angstrom, datatype: float64}\n"
        "# meta: {medium: vacuum, citation: 'Me 2025'}\nspecies wave\n\"Fe I\" 5000.0\n"
    )
    assert questions(full) == ()
    assert read_user_catalogue(full).source_keys == ("Me 2025",)


@pytest.mark.parametrize(
    "layout",
    [
        Layout(units={"wave": "parsec"}), Layout(units={"e_low": "kg"}),
        Layout(columns={"wave": "lambda"}), Layout(columns={"species": (5, 2), "wave": (1, 4)}),
    ],
)
def test_impossible_layouts_are_refused(tmp_path, layout):
    path = tmp_path / "mine.csv"
    path.write_text("species,wave,e_low\nFe I,5000,1\n")
    with pytest.raises(InputRefused):
        read_user_catalogue(path, "air", layout)


def test_merged_and_instead(tmp_path):
    path = tmp_path / "mine.txt"
    path.write_text("\n".join(TEXT.splitlines()[:3]) + "\n")
    mine = read_user_catalogue(path, "air", FIXED)
    shipped = load_catalogue("level_lines")
    both = merge_catalogues(shipped, mine)
    assert len(both) == len(shipped) + 2 == len(both.term_low)
    row = int(np.argmin(np.abs(both.wave - mine.wave[1])))
    assert both.species_of(row) == "Fe I" and both.term_of(row) == ("", "")
    old = int(np.flatnonzero(both.term_low > 0)[0])
    where = int(np.argmin(np.abs(shipped.wave - both.wave[old])))
    assert both.term_of(old) == shipped.term_of(where)
    assert len(mine) == 2 and mine.grade.tolist() == [0, 0]
