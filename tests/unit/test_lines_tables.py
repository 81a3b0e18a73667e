"""User catalogues, merged catalogues, exported tables and predicted depths."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.lines.depths import catalogue_depths, predicted_depth, typical_log_pe
from linewright.lines.export import catalogue_table
from linewright.lines.loading import load_catalogue
from linewright.lines.user import merge_catalogues, read_user_catalogue, read_user_rows
from linewright.spectra.medium import air_to_vacuum

GOOD = "species,wave,wave_err,e_low,loggf\nFe I,5000.1,0.003,1.2,-1.0\nti2,4501.27,,,-0.7\n"
BAD = GOOD + "Zz 9,4000,,1,1\nCa I,abc,,,\nCa I,4226.7,,x,\n"


def write(folder, text, name="mine.csv"):
    path = folder / name
    path.write_text(text)
    return path


def test_user_lines_in_air(tmp_path):
    found = read_user_catalogue(write(tmp_path, GOOD), "air")
    assert [found.species_of(k) for k in range(2)] == ["Ti II", "Fe I"]
    assert found.wave == pytest.approx(air_to_vacuum([4501.27, 5000.1]), abs=1e-9)
    assert found.wave_err == pytest.approx([0.01, 0.003])
    assert np.isnan(found.e_low[0]) and found.loggf[1] == -1.0
    assert found.source_keys == ("user:mine.csv",)


def test_bad_rows_are_reported_by_number(tmp_path):
    found = read_user_rows(write(tmp_path, BAD), "vacuum")
    assert len(found.catalogue) == 2
    assert [text.split(":")[0] for text in found.problems] == ["row 3", "row 4", "row 5"]
    assert "e_low" in found.problems[2]


def test_a_catalogue_with_bad_rows_is_refused_with_their_numbers(tmp_path):
    with pytest.raises(InputRefused, match="row 3.*row 4.*row 5"):
        read_user_catalogue(write(tmp_path, BAD), "air")


def test_unknown_medium_is_asked_for(tmp_path):
    with pytest.raises(InputRefused, match="air or vacuum"):
        read_user_catalogue(write(tmp_path, GOOD))


@pytest.mark.parametrize("text", ["wave\n5000\n", "species,wave\n", "species,wave\nFe I,-3\n"])
def test_useless_tables_are_refused(tmp_path, text):
    with pytest.raises(InputRefused):
        read_user_catalogue(write(tmp_path, text), "air")


def test_missing_file_is_refused(tmp_path):
    with pytest.raises(InputRefused, match="no such file"):
        read_user_catalogue(tmp_path / "none.csv", "air")


def test_exported_ecsv_comes_back(tmp_path):
    shipped = load_catalogue()
    table = catalogue_table(shipped, (5000.0, 5010.0), "air", ("Fe I",))
    path = tmp_path / "lines.ecsv"
    table.write(path, format="ascii.ecsv")
    back = read_user_catalogue(path)
    assert len(back) == len(table) > 10
    assert back.wave == pytest.approx(air_to_vacuum(np.asarray(table["wave"])), abs=1e-7)


def test_merged_catalogue_keeps_every_row_and_name(tmp_path):
    shipped = load_catalogue("hydrogen_helium")
    mine = read_user_catalogue(write(tmp_path, GOOD), "air")
    both = merge_catalogues(shipped, mine)
    assert len(both) == len(shipped) + 2
    assert np.all(np.diff(both.wave) >= 0)
    row = int(np.argmin(np.abs(both.wave - mine.wave[0])))
    assert both.species_of(row) == "Ti II"
    assert both.source_keys[both.source[row]] == "user:mine.csv"


def test_table_columns_begin_as_agreed_and_mask_the_unknown():
    table = catalogue_table(load_catalogue(), (6280.0, 6290.0))
    assert table.colnames[:6] == ["species", "wave", "wave_err", "e_low", "loggf", "source"]
    assert table.meta["medium"] == "air"
    telluric = np.asarray(table["origin"]) == "telluric"
    assert telluric.any() and table["loggf"].mask[telluric].all()
    assert np.asarray(table["wave"]).min() >= 6280.0


def test_depth_filter_needs_a_temperature_and_works():
    with pytest.raises(InputRefused, match="temperature"):
        catalogue_table(load_catalogue(), (5000.0, 5010.0), depth_above=0.1)
    table = catalogue_table(
        load_catalogue(), (5160.0, 5190.0), depth_above=0.3, temperature=5777.0
    )
    assert (np.asarray(table["depth"]) > 0.3).all()
    names = set(table["species"])
    assert {"Mg I", "Fe I", "Fe II"} <= names and len(table) < 60


def test_depth_grows_with_strength_and_saturates():
    strength = np.linspace(-8.0, 8.0, 200)
    depth = predicted_depth(strength, 0.0)
    assert np.all(np.diff(depth) > 0)
    assert predicted_depth(0.0, 0.0) == pytest.approx(0.45)
    assert depth[0] < 1e-5 and 0.89 < depth[-1] < 0.9
    assert np.isnan(predicted_depth(np.nan, 0.0))


def test_telluric_depth_follows_the_optical_depth():
    telluric = load_catalogue(origins="telluric")
    depth = catalogue_depths(telluric, 5777.0)
    assert depth == pytest.approx(1.0 - np.exp(-telluric.depth_ref))


def test_electron_pressure_rises_with_temperature():
    values = [typical_log_pe(t) for t in (3500, 5000, 8000, 20000)]
    assert values == sorted(values)
