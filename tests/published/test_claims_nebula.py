"""An H II region's lines named.

Truth: rest wavelengths of the NIST levels (table 2 of the reference values) and the
identifications published with the data.
"""

from __future__ import annotations

import numpy as np
import pytest
from truths import SPECTRA

from linewright.job.solve import solve
from linewright.spectra.medium import C_KM_S, vacuum_to_air
from linewright.spectra.reading import read_spectrum

AREAS = SPECTRA / "nebula" / "full-spectrum-by-area.tab"
LIST = SPECTRA / "nebula" / "basic-line-list.tab"
pytestmark = pytest.mark.skipif(not AREAS.is_file(), reason="the nebula is not beside the checkout")
NAMED = {
    4861.33: "H I", 4958.911: "[O III]", 5006.843: "[O III]", 6562.80: "H I",
    6548.052: "[N II]", 6583.454: "[N II]", 5875.62: "He I", 6716.440: "[S II]",
    6730.816: "[S II]", 6300.304: "[O I]",
}  # fmt: skip


@pytest.fixture(scope="module")
def session():
    return solve(read_spectrum(AREAS, medium="air", columns="wave=11,flux=2"))


@pytest.mark.parametrize("wave", sorted(NAMED))
def test_principal_lines_are_firm(session, wave):
    rest = vacuum_to_air(session.features.wave / (1 + session.velocity.velocity / C_KM_S))
    emission = np.where(session.features.sign < 0, np.abs(rest - wave), np.inf)
    i = int(np.argmin(emission))
    assert emission[i] < 0.5
    assert (session.claims[i].species, session.claims[i].standing) == (NAMED[wave], "firm")


def test_velocity_is_declared_and_plausible(session):
    """The data's authors and this region's ionised gas: +7 to +28 km/s."""
    assert session.velocity.declared
    assert 5.0 < session.velocity.velocity < 30.0


def listed(strongest_class):
    for line in LIST.read_text().splitlines()[1:]:
        cells = line.split("\t")
        if "XXX" in cells[0] or "DIB" in cells[0].upper():
            continue
        if 0 < float(cells[3]) <= strongest_class:
            yield cells[0].strip(), float(cells[2])


@pytest.mark.parametrize(("strongest_class", "goal"), [(3, 0.98), (4, 0.95), (5, 0.90)])
def test_listed_emission_lines_are_named(session, strongest_class, goal):
    rest = vacuum_to_air(session.features.wave / (1 + session.velocity.velocity / C_KM_S))
    lines = list(listed(strongest_class))
    places = np.array([w for _, w in lines])
    right = []
    for ion, wave in lines:
        distance = np.where(session.features.sign < 0, np.abs(rest - wave), np.inf)
        i = int(np.argmin(distance))
        nearest = np.argmin(np.abs(places - rest[i]))
        if distance[i] > 1.0 or places[nearest] != wave:
            continue  # not found, or another listed line is the feature's
        claim = session.claims[i]
        right.append(claim.species == ion or any(b[0] == ion for b in claim.blend))
    assert len(right) >= 30
    assert np.mean(right) >= goal
