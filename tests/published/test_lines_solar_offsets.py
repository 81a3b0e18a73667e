"""Measured positions of isolated solar lines against the catalogue, species by species.

Source: the solar spectrum beside the checkout (Gaia-ESO reference, R = 47,000, 4835-6723 A).
How lines are chosen: tests/studies/lines_solar_offsets.py.
"""

from __future__ import annotations

import sys
from pathlib import Path

import numpy as np
import pytest

STUDIES = Path(__file__).resolve().parents[1] / "studies"
sys.path.insert(0, str(STUDIES))

from lines_solar_offsets import LIMIT, SUN, isolated, offsets_by_species  # noqa: E402

from linewright.job.solve import solve  # noqa: E402
from linewright.lines.loading import load_catalogue  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402

pytestmark = pytest.mark.skipif(
    not SUN.is_file(), reason="the solar spectrum is not beside this checkout"
)
# Level values and hyperfine patterns that the Sun contradicts; their errors are set to cover it.
# Bounds are what was measured, rounded up: not met, and not to get worse.
FEW = 20  # lines: the median of fewer has an error of its own (of a normal sample), allowed for
CONTRADICTED = {"Ca I": 0.0035, "Mn I": 0.013, "Sc II": 0.018}


@pytest.fixture(scope="module")
def offsets():
    session = solve(read_spectrum(SUN, medium="air"), load_catalogue())
    return offsets_by_species(isolated(session))


def test_medians_of_well_sampled_species_lie_within_2_mA(offsets):
    sampled = {name: values for name, values in offsets.items() if len(values) >= 10}
    assert {"Fe I", "Fe II", "Ni I", "Ti I", "Ti II", "Cr I", "Cr II", "Si I"} <= set(sampled)
    for name, values in sampled.items():
        shift = values[:, 0]
        error = 1.2533 * 1.4826 * np.median(np.abs(shift - np.median(shift))) / np.sqrt(len(shift))
        within = CONTRADICTED.get(name, LIMIT + (error if len(shift) < FEW else 0.0))
        assert abs(np.median(shift)) < within, name


def test_few_lines_lie_beyond_three_stated_errors(offsets):
    every = np.concatenate(list(offsets.values()))
    assert len(every) > 1200
    assert np.mean(np.abs(every[:, 0]) > 3 * every[:, 1]) < 0.12
    for name in CONTRADICTED:
        values = offsets[name]
        assert np.mean(np.abs(values[:, 0]) > 3 * values[:, 1]) < 0.12, name
