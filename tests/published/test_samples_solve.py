"""The whole job on two sample spectra, against the line lists they were made from.

The truth tables are simulated (sample_spectra/README.md). Thresholds are what was measured,
less a margin: G dwarf 37.592 +- 0.008 km/s, main species right 0.984, firm claims right 0.998,
lines found 0.982; nebula 52.50 +- 0.22 km/s, right 0.964, firm claims all right, all lines found.
No feature made by unlisted lines alone was firm in either (98 and 14 such features).
"""

from __future__ import annotations

import json
from dataclasses import dataclass
from pathlib import Path

import numpy as np
import pytest
from astropy.table import Table

from linewright.job.solve import solve
from linewright.session.model import Session
from linewright.spectra.medium import C_KM_S, from_medium
from linewright.spectra.reading import read_spectrum

FOLDER = Path(__file__).resolve().parents[2] / "sample_spectra"
MIXED = 0.2  # a species with this share of a feature is one of its contributors
pytestmark = pytest.mark.timeout(120)


@dataclass(frozen=True, eq=False)
class Solved:
    """A session beside the simulated lines, in the spectrum's frame and sorted."""

    session: Session
    wave: np.ndarray
    size: np.ndarray
    species: np.ndarray
    origin: np.ndarray
    velocity: float
    resolution: float

    def shares(self, row: int) -> dict[str, float]:
        """Share of each simulated species in the feature of this row; {} where none is near."""
        centre = float(self.session.features.wave[row])
        fwhm = max(float(self.session.features.fwhm[row]), centre / self.resolution)
        first, last = np.searchsorted(self.wave, [centre - fwhm, centre + fwhm])
        offset = (self.wave[first:last] - centre) / (0.45 * fwhm)
        weight = self.size[first:last] * np.exp(-0.5 * offset**2)
        found: dict[str, float] = {}
        for name, part in zip(self.species[first:last], weight, strict=True):
            found[str(name)] = found.get(str(name), 0.0) + float(part)
        whole = sum(found.values())
        return {name: part / whole for name, part in found.items()} if whole > 0 else {}


def _solved(file: str) -> Solved:
    row = next(r for r in json.loads((FOLDER / "samples.json").read_text()) if r["file"] == file)
    truth = Table.read(FOLDER / row["truth"], format="ascii.ecsv")
    size = np.abs(np.asarray(truth["flux" if "flux" in truth.colnames else "depth"]))
    wave = from_medium(np.asarray(truth["wave"]), row["medium"])
    wave = wave * (1.0 + np.asarray(truth["velocity"]) / C_KM_S)
    order = np.argsort(wave)
    own = np.isin(truth["origin"], ["stellar", "nebular"])
    return Solved(
        solve(read_spectrum(FOLDER / file, **row["read_options"])),
        wave[order], size[order], np.asarray(truth["species"])[order],
        np.asarray(truth["origin"])[order], float(np.asarray(truth["velocity"])[own][0]),
        float(truth.meta["resolution"]))


@pytest.fixture(scope="module")
def dwarf() -> Solved:
    return _solved("g_dwarf.fits")


@pytest.fixture(scope="module")
def nebula() -> Solved:
    return _solved("nebula.ecsv")


def _named(solved: Solved, above: float):
    """(claims right, of them all; firm claims right, of all firm) of features above a depth."""
    right, firm = [], []
    for row, claim in enumerate(solved.session.claims):
        shares = solved.shares(row)
        if not shares or abs(solved.session.features.depth[row]) < above:
            continue
        main = max(shares, key=shares.get)
        if main in ("unlisted", "cosmic ray"):
            continue
        right.append(claim.species == main)
        firm.append(claim.standing == "firm")
    right, firm = np.array(right), np.array(firm)
    return right, right[firm]


def _found(solved: Solved, above: float) -> np.ndarray:
    """Of known lines above a size that lead their resolution element: was each detected?"""
    features, inside = solved.session.features, []
    for j in np.nonzero(solved.size > above)[0]:
        reach = float(solved.wave[j]) / solved.resolution
        first, last = np.searchsorted(
            solved.wave, [solved.wave[j] - reach, solved.wave[j] + reach])
        covered = any(a < solved.wave[j] < b for a, b in solved.session.spectrum.coverage)
        leads = solved.size[j] >= solved.size[first:last].max()
        if covered and leads and solved.species[j] not in ("unlisted", "cosmic ray"):
            inside.append(np.abs(features.wave - solved.wave[j]).min() < reach)
    return np.array(inside)


def _refused(solved: Solved) -> np.ndarray:
    """Features made by unlisted lines alone (no listed species has MIXED): not firm?"""
    kept = []
    for row, claim in enumerate(solved.session.claims):
        shares = solved.shares(row)
        if shares.get("unlisted", 0.0) > 1.0 - MIXED:
            kept.append(claim.standing != "firm")
    return np.array(kept)


def test_dwarf_velocity(dwarf):
    found = dwarf.session.velocity
    assert found.declared and dwarf.velocity == 37.6
    assert abs(found.velocity - 37.6) < max(3 * found.error, 0.3)
    assert found.error < 0.1


def test_dwarf_names(dwarf):
    right, firm = _named(dwarf, above=0.1)
    assert len(right) > 900 and len(firm) > 700
    assert right.mean() > 0.96
    assert firm.mean() > 0.99
    assert _found(dwarf, above=0.1).mean() > 0.94


def test_dwarf_telluric_lines_are_called_so(dwarf):
    called = [
        dwarf.session.claims[row].origin == "telluric"
        for row in range(len(dwarf.session.claims))
        if sum(dwarf.shares(row).get(name, 0.0) for name in ("O2", "H2O")) > 1.0 - MIXED
        and abs(dwarf.session.features.depth[row]) > 0.1
    ]
    assert len(called) > 25
    assert np.mean(called) > 0.95


def test_dwarf_unlisted_lines_are_not_made_firm(dwarf):
    kept = _refused(dwarf)
    assert len(kept) > 40
    assert (~kept).mean() <= 0.03


def test_nebula_velocity(nebula):
    found = nebula.session.velocity
    assert found.declared and nebula.velocity == 52.6
    assert abs(found.velocity - 52.6) < 3 * found.error
    assert found.error < 1.0


def test_nebula_names(nebula):
    right, firm = _named(nebula, above=0.1)
    assert len(right) > 80 and len(firm) > 70
    assert right.mean() > 0.93
    assert firm.mean() > 0.98
    assert _found(nebula, above=1.0).mean() > 0.96


def test_nebula_unlisted_lines_are_not_made_firm(nebula):
    kept = _refused(nebula)
    assert len(kept) >= 8
    assert kept.all()


def test_a_wrong_velocity_or_species_would_be_noticed(dwarf):
    """The scores fall when the truth is moved by 20 km/s: they are no tautology."""
    from dataclasses import replace

    moved = replace(dwarf, wave=dwarf.wave * (1.0 + 20.0 / C_KM_S))
    right, _ = _named(moved, above=0.1)
    assert right.mean() < 0.6
