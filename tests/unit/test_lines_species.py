"""Species names: accepted spellings, canonical forms, refusals."""

from __future__ import annotations

import pytest

from linewright.errors import InputRefused
from linewright.lines.species import ELEMENTS, normal_name, parse_species, parse_species_list


@pytest.mark.parametrize(
    ("text", "name"),
    [
        ("fe1", "Fe I"), ("FeI", "Fe I"), ("Fe I", "Fe I"), ("FE 1", "Fe I"), ("  Fe   II ", "Fe II"),
        ("[OIII]", "[O III]"), ("[o 3]", "[O III]"), ("C III]", "C III]"), ("26.1", "Fe II"),
        ("26.0", "Fe I"), ("56.10", "Ba II"), ("NI", "N I"), ("NiI", "Ni I"), ("CoI", "Co I"),
        ("HeII", "He II"), ("Ca2", "Ca II"), ("O2", "O2"), ("O II", "O II"), ("H2O", "H2O"),
        ("CH+", "CH+"), ("dib", "DIB"), ("[Fe II]", "[Fe II]"), ("si 3", "Si III"),
    ],
)
def test_spellings(text, name):
    assert normal_name(text) == name


@pytest.mark.parametrize(
    "text", ["", "Xx I", "Fe", "26", "[O III", "siii", "o2", "H IV", "Fe 0", "123.4", "1.9", "!"]
)
def test_nonsense_and_ambiguity_are_refused(text):
    with pytest.raises(InputRefused):
        parse_species(text)


def test_ambiguity_names_both_readings():
    with pytest.raises(InputRefused, match="S III or Si II"):
        parse_species("siii")


def test_parts():
    line = parse_species("[Fe III]")
    assert (line.element, line.atomic_number, line.stage) == ("Fe", 26, 3)
    assert line.is_forbidden and line.ion == "Fe III"
    assert not parse_species("C III]").is_forbidden
    assert parse_species("TiO").atomic_number == 0 and not parse_species("TiO").is_atomic


def test_canonical_names_come_back_unchanged():
    for element in ELEMENTS[1:]:
        for name in (f"{element} I", f"{element} II", f"[{element} II]"):
            assert normal_name(name) == name


def test_order_is_by_element_then_stage():
    names = ["O2", "Fe II", "[Fe II]", "H I", "Fe I"]
    ordered = sorted(names, key=lambda name: parse_species(name).sort_key)
    assert ordered == ["H I", "Fe I", "Fe II", "[Fe II]", "O2"]


def test_lists():
    assert parse_species_list("Fe I, ti2 ,Fe I") == ("Fe I", "Ti II")
    with pytest.raises(InputRefused):
        parse_species_list(" , ")
