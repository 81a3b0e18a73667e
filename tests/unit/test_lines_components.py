"""Components kept with collapsed lines."""

from __future__ import annotations

import numpy as np
import pytest

from linewright.lines.components import component_waves, components_of
from linewright.lines.loading import load_catalogue
from linewright.lines.search import LineQuery, search
from linewright.spectra.medium import vacuum_to_air


@pytest.fixture(scope="module")
def catalogue():
    return load_catalogue(origins="stellar")


def test_h_alpha_has_its_seven_fine_structure_lines(catalogue):
    """Strongest components at 6562.852 and 6562.710 A (air), ratio 9:5 (Dirac theory)."""
    row = int(search(catalogue, LineQuery((6562.0, 6563.5), species=("H I",)))[0])
    found = components_of(catalogue, row)
    air = vacuum_to_air(found.wave)
    order = np.argsort(-found.share)
    assert air[order[0]] == pytest.approx(6562.852, abs=0.002)
    assert air[order[1]] == pytest.approx(6562.710, abs=0.002)
    assert found.share.sum() > 0.97
    mean = float((found.share * found.wave).sum() / found.share.sum())
    assert mean == pytest.approx(catalogue.wave[row], abs=0.002)


def test_components_of_one_line_add_up(catalogue):
    rows = [k for k in search(catalogue, LineQuery(species=("Mg I",))) if catalogue.spread[k] > 0]
    checked = 0
    for row in rows:
        found = components_of(catalogue, int(row))
        if len(found.wave) > 1:
            checked += 1
            assert found.share.sum() == pytest.approx(1.0, abs=0.05)
            assert np.ptp(found.wave) < 0.6
    assert checked >= 20


def test_a_single_line_has_none(catalogue):
    row = int(search(catalogue, LineQuery(text="CaI 4226.728", origin="stellar"))[0])
    assert len(components_of(catalogue, row).wave) == 0
    assert len(component_waves("Zz I")) == 0
