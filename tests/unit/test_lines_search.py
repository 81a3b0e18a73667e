"""Finding lines, multiplets and the page of a line."""

from __future__ import annotations


import numpy as np
import pytest

from linewright.errors import InputRefused
from linewright.lines.export import catalogue_table
from linewright.lines.loading import load_catalogue
from linewright.lines.page import line_page
from linewright.lines.search import LineQuery, search
from linewright.spectra.medium import vacuum_to_air


@pytest.fixture(scope="module")
def catalogue():
    return load_catalogue()


def one(catalogue, text):
    rows = search(catalogue, LineQuery(text=text, origin="stellar"))
    assert len(rows) == 1, text
    return int(rows[0])


def test_range_species_energy_and_strength_all_bind(catalogue):
    query = LineQuery((5000.0, 5100.0), "air", ("Fe I",), "stellar", (2.0, 3.0), -2.5)
    rows = search(catalogue, query)
    air = vacuum_to_air(catalogue.wave[rows])
    assert len(rows) >= 3
    assert (air >= 5000.0).all() and (air <= 5100.0).all()
    assert {catalogue.species_of(k) for k in rows} == {"Fe I"}
    assert (catalogue.e_low[rows] >= 2.0).all() and (catalogue.e_low[rows] <= 3.0).all()
    assert (catalogue.loggf[rows] > -2.5).all()
    plain = np.flatnonzero(
        (vacuum_to_air(catalogue.wave) >= 5000.0) & (vacuum_to_air(catalogue.wave) <= 5100.0)
        & (catalogue.species == catalogue.species_names.index("Fe I")) & (catalogue.origin == 0)
        & (catalogue.e_low >= 2.0) & (catalogue.e_low <= 3.0) & (catalogue.loggf > -2.5)
    )
    assert rows.tolist() == plain.tolist()


def test_an_empty_query_leaves_every_line(catalogue):
    assert len(search(catalogue, LineQuery())) == len(catalogue)


def test_sodium_d_multiplet_has_its_two_lines(catalogue):
    row = one(catalogue, "NaI 5889.95")
    mates = search(catalogue, LineQuery(multiplet_of=row))
    air = sorted(float(w) for w in vacuum_to_air(catalogue.wave[mates]))
    assert air == pytest.approx([5889.951, 5895.924], abs=0.002)


def test_magnesium_b_multiplet_has_three_lines(catalogue):
    row = one(catalogue, "Mg I 5183.60")
    air = vacuum_to_air(catalogue.wave[search(catalogue, LineQuery(multiplet_of=row))])
    assert air == pytest.approx([5167.321, 5172.684, 5183.604], abs=0.002)


def test_words_find_terms_sources_and_wavelengths(catalogue):
    rows = search(catalogue, LineQuery(text="Fe z 7D*"))
    terms = {catalogue.term_of(k, up)[1] for k in rows for up in (False, True)}
    assert len(rows) > 20 and "z 7D*" in terms
    for k in rows:
        assert catalogue.species_of(k).strip("[]").startswith("Fe ")
    sources = {catalogue.source_keys[catalogue.source[k]]
               for k in search(catalogue, LineQuery(text="storey1995"))}
    assert sources == {"Storey1995"}
    assert len(search(catalogue, LineQuery(text="nothing-of-the-kind"))) == 0


def test_grade_keeps_the_better_ones(catalogue):
    rows = search(catalogue, LineQuery(grade="B", origin="stellar"))
    assert len(rows) > 1000
    assert (catalogue.loggf_err[rows] <= 0.1201).all()


@pytest.mark.parametrize(
    "query", [LineQuery(origin="lunar"), LineQuery(grade="Z"), LineQuery(multiplet_of=-1)]
)
def test_unknown_wishes_are_refused(catalogue, query):
    with pytest.raises(InputRefused):
        search(catalogue, query)


def test_page_of_a_line_shows_data_siblings_and_source(catalogue):
    """Fe I 6173.334: a 5P 1 - y 5D* 0, E_low 2.2227 eV, E_up 4.2305 eV (NIST ASD levels)."""
    page = line_page(catalogue, one(catalogue, "FeI 6173.334"))
    values = {label: value for label, value, _ in page.entries}
    assert page.title == "Fe I 6173.334"
    assert values["E_low"] == "2.2227" and values["E_up"] == "4.2305"
    assert values["J"] == "1 - 0"
    assert values["lower level"].endswith("a 5P") and values["upper level"].endswith("y 5D*")
    assert len(page.multiplet) == 8 and len(page.strongest) == 12
    assert all(s.strength >= page.strongest[-1].strength for s in page.strongest)
    assert page.row not in {s.row for s in page.multiplet + page.strongest}
    assert {key for key, _ in page.sources} == {"NIST_ASD", "Placco2021"}
    assert "@misc{NIST_ASD," in page.bibtex and "@article{Placco2021," in page.bibtex


def test_every_origin_has_pages(catalogue):
    for origin in range(6):
        row = int(np.flatnonzero(catalogue.origin == origin)[7])
        page = line_page(catalogue, row)
        assert page.title and page.sources


def test_a_page_beyond_the_catalogue_is_refused(catalogue):
    with pytest.raises(InputRefused):
        line_page(catalogue, len(catalogue))


def test_non_lte_lines_are_flagged_and_nominal_ones_graded_e(catalogue):
    rows = search(catalogue, LineQuery((5695.8, 5696.0), species=("C III",), origin="stellar"))
    assert len(rows) and (catalogue.flags[rows] & 1).all()
    nominal = (catalogue.flags & 2) > 0
    assert nominal.sum() > 100 and (catalogue.grade[nominal] == 5).all()


def test_second_sources_lie_within_three_errors(catalogue):
    known = np.isfinite(catalogue.wave_alt)
    assert known.sum() > 100000
    pull = np.abs(catalogue.wave_alt - catalogue.wave)[known] / catalogue.wave_err[known]
    assert pull.max() < 3.02


def test_second_strengths_lie_within_three_errors(catalogue):
    known = np.isfinite(catalogue.loggf_alt)
    assert known.sum() > 1000 and (catalogue.source_loggf_alt[known] >= 0).all()
    pull = np.abs(catalogue.loggf_alt - catalogue.loggf)[known] / catalogue.loggf_err[known]
    assert pull.max() < 3.03


@pytest.mark.parametrize(
    ("air", "published"),
    [(4443.80, -0.72), (4468.49, -0.62), (4501.27, -0.77), (4571.97, -0.32)],
)
def test_strengths_of_ionised_titanium_are_published_ones(catalogue, air, published):
    """Pickering, Thorne & Perez 2001 (ApJS 132, 403), from memory; the list's value is kept."""
    row = one(catalogue, f"TiII {air:.2f}")
    assert float(catalogue.loggf[row]) == pytest.approx(published, abs=0.03)
    assert catalogue.source_keys[catalogue.source_loggf_alt[row]] == "Placco2021"
    page = line_page(catalogue, row)
    values = {label: value for label, value, _ in page.entries}
    assert "Placco2021" in {key for key, _ in page.sources}
    difference = float(values["log gf, second source"]) - float(values["log gf"])
    assert float(values["difference of log gf"]) == pytest.approx(difference, abs=0.0015)


def test_the_page_tells_grade_and_nominal_strengths(catalogue):
    nominal = int(np.flatnonzero(catalogue.flags & 2)[0])
    values = {label: value for label, value, _ in line_page(catalogue, nominal).entries}
    assert values["grade"] == "E" and "nominal strength" in values["flags"]
    good = int(np.flatnonzero((catalogue.grade == 2) & (catalogue.flags == 0))[0])
    values = {label: value for label, value, _ in line_page(catalogue, good).entries}
    assert values["grade"] == "B" and "flags" not in values


def test_upper_energy_follows_from_the_wavelength(catalogue):
    """Na I 5889.951: 2P* 3/2 at 16973.366 cm-1 (NIST ASD)."""
    row = one(catalogue, "NaI 5889.95")
    assert catalogue.e_up[row] == pytest.approx(16973.366 / 8065.543937, abs=2e-6)


def test_extra_columns_of_exported_tables(catalogue):
    table = catalogue_table(catalogue, (5889.0, 5897.0), species=("Na I",))
    strong = table[np.asarray(table["loggf"]) > -0.5]
    assert set(strong["term_up"][np.asarray(strong["origin"]) == "stellar"]) == {"2p6.3p 2P*"}
    assert "non-LTE" in strong["flags"][0]
