"""Searching the catalogue and a line's page from the command line."""

from __future__ import annotations

from linewright.cli.main import main


def test_page_of_a_line_names_its_siblings_and_sources(capsys):
    assert main(["lines", "--range", "5183:5184", "--species", "Mg I", "--page"]) == 0
    text = capsys.readouterr().out
    assert text.startswith("Mg I 5183.604")
    # The Mg b triplet (NIST levels, vacuum): 5168.7605, 5174.1251, 5185.0479.
    assert "multiplet (vacuum): 5168.761, 5174.125" in text
    assert "E_low: 2.7166 eV" in text
    assert "@misc{NIST_ASD" in text


def test_energy_and_strength_narrow_the_list(capsys):
    wanted = ["lines", "--range", "5160:5190", "--species", "Mg I,Fe I", "-o", "-"]
    assert main([*wanted, "--e-low", "2.7:2.72", "--loggf-above", "-1.1"]) == 0
    rows = [r for r in capsys.readouterr().out.splitlines() if r.startswith('"')]
    assert len(rows) == 3
    assert all(r.startswith('"Mg I"') for r in rows)


def test_a_list_without_output_is_wrong_usage(capsys):
    assert main(["lines", "--range", "5160:5190"]) == 2
    assert "-o" in capsys.readouterr().err
