"""Tables of measured features as input."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.job.feature_file import read_feature_file
from linewright.spectra.medium import to_medium


def _write(tmp_path, name, text):
    path = tmp_path / name
    path.write_text(text)
    return path


@pytest.mark.parametrize(
    ("name", "text"),
    [
        ("a.csv", "# air\nwave,wave_err,depth,fwhm,kind\n5269.54,0.01,0.5,0.12,absorption\n"
                  "5006.84,,-2.0,,\n5183.6,0.02,,0.2,\n"),
        ("a.txt", "wave wave_err depth fwhm kind\n5269.54 0.01 0.5 0.12 absorption\n"
                  "# a remark\n\n5006.84 nan -2.0 nan --\n5183.6 0.02 nan 0.2 nan\n"),
        ("a.ecsv", "# %ECSV 1.0\n# ---\n# datatype:\n# - {name: wave, datatype: float64, unit: nm}\n"
                   "# - {name: wave_err, datatype: float64}\n# - {name: depth, datatype: float64}\n"
                   "# - {name: fwhm, datatype: float64}\n# - {name: kind, datatype: string}\n"
                   "# schema: astropy-2.0\nwave wave_err depth fwhm kind\n"
                   '526.954 0.01 0.5 0.12 absorption\n500.684 "" -2.0 "" ""\n518.36 0.02 "" 0.2 ""\n'),
    ],
)  # fmt: skip
def test_three_spellings_of_one_table(tmp_path, name, text):
    table = read_feature_file(_write(tmp_path, name, text))
    np.testing.assert_allclose(to_medium(table.wave, "air"), [5006.84, 5183.6, 5269.54], rtol=1e-12)
    assert table.number.tolist() == [2, 3, 1], "numbers count the rows of the file"
    assert table.sign.tolist() == [-1, 1, 1]
    np.testing.assert_array_equal(table.wave_err, [np.nan, 0.02, 0.01])
    np.testing.assert_array_equal(table.depth, [-2.0, np.nan, 0.5])
    np.testing.assert_array_equal(table.fwhm, [np.nan, 0.2, 0.12])
    assert np.isnan(table.significance).all() and np.isnan(table.continuum).all()


def test_vacuum_wavelengths_stay(tmp_path):
    path = _write(tmp_path, "a.csv", "wave,species\n5271.0,Fe I\n")
    assert read_feature_file(path, "vacuum").wave.tolist() == [5271.0]


def test_kind_alone_sets_the_sign(tmp_path):
    path = _write(tmp_path, "a.csv", "wave,kind\n5000,emission\n5001,Abs\n")
    assert read_feature_file(path).sign.tolist() == [-1, 1]


@pytest.mark.parametrize(
    ("text", "cause"),
    [
        ("", "no rows"),
        ("# only remarks\n", "no rows"),
        ("wave,depth\n", "no rows"),
        ("5000.0,0.1\n5001.0,0.2\n", "line 1: numbers where names are due"),
        ("lambda,depth\n5000,0.1\n", "no column 'wave'"),
        ("wave,wave\n1,2\n", "repeated"),
        ("wave,depth\n5000,0.1\n5001\n", "line 3: 1 cells for 2 columns"),
        ("wave,depth\n5000,0.1\nabc,0.1\n", "line 3: wave is no number: 'abc'"),
        ("wave,depth\n# x\n,0.1\n", "line 3: wave is empty"),
        ("wave\n-5000\n", "line 2: wave is -5000; must be above zero"),
        ("wave\ninf\n", "line 2: wave is inf"),
        ("wave,wave_err\n5000,0\n", "line 2: wave_err is 0"),
        ("wave,depth\n5000,inf\n", "line 2: depth is inf; must be finite"),
        ("wave,kind\n5000,hole\n", "line 2: no kind 'hole'"),
        ("wave,kind,depth\n5000,emission,0.5\n", "line 2: emission with depth 0.5"),
    ],
)
def test_refusals_name_the_line(tmp_path, text, cause):
    path = _write(tmp_path, "a.csv", text)
    with pytest.raises(InputRefused) as refused:
        read_feature_file(path)
    assert cause in str(refused.value) and "\n" not in str(refused.value)


def test_other_files_are_refused(tmp_path):
    with pytest.raises(InputRefused, match="no feature table format"):
        read_feature_file(tmp_path / "a.xls")
    with pytest.raises(InputRefused, match="No such file"):
        read_feature_file(tmp_path / "a.csv")
    (tmp_path / "b.csv").write_bytes(b"\xff\xfe\x00\x01")
    with pytest.raises(InputRefused, match="not UTF-8"):
        read_feature_file(tmp_path / "b.csv")
    with pytest.raises(InputRefused, match="damaged ECSV"):
        read_feature_file(_write(tmp_path, "c.ecsv", "# %ECSV 1.0\n# ---\nwave\n5000\n"))


def test_a_ledger_is_a_feature_table_and_its_medium_counts(tmp_path):
    import sys
    from pathlib import Path

    sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "sessions"))
    import builders

    from linewright.publish.ledger import ledger_table
    from linewright.publish.writers import write_table

    made = builders.session(9)
    write_table(ledger_table(made), tmp_path / "l.ecsv")
    back = read_feature_file(tmp_path / "l.ecsv", "air")
    np.testing.assert_allclose(back.wave, made.features.wave, rtol=1e-12)
    np.testing.assert_array_equal(back.ew, made.features.ew)
    with pytest.raises(InputRefused, match="wavelengths are air; give --medium air"):
        read_feature_file(tmp_path / "l.ecsv", "vacuum")
