"""How well origins are told apart on the samples, whose truth tables name them. By hand:

    python tests/studies/origins_study.py

Prints confident claims of the wrong origin, by true origin, for every sample.
"""

from __future__ import annotations

import json
import sys
from pathlib import Path

import numpy as np

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app")]

from astropy.table import Table  # noqa: E402

from linewright.job.solve import solve  # noqa: E402
from linewright.resources import samples_dir  # noqa: E402
from linewright.spectra.medium import C_KM_S, from_medium  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402


def strongest_truth(truth, place, wave, width):
    """Row of the deepest true line within half a width of ``wave``, or None."""
    near = np.nonzero(np.abs(place - wave) < 0.5 * width)[0]
    strength = np.abs(np.asarray(truth["depth" if "depth" in truth.colnames else "flux"]))
    return int(near[np.argmax(strength[near])]) if len(near) else None


def confusion(entry):
    spectrum = read_spectrum(samples_dir() / entry["file"], **entry.get("read_options", {}))
    session = solve(spectrum)
    truth = Table.read(samples_dir() / entry["truth"])
    vacuum = from_medium(np.asarray(truth["wave"], dtype=float), spectrum.medium)
    place = vacuum * (1 + np.asarray(truth["velocity"], dtype=float) / C_KM_S)
    counts: dict = {}
    for wave, width, claim in zip(session.features.wave, session.features.fwhm, session.claims):
        row = strongest_truth(truth, place, wave, width)
        if row is None:
            continue
        origin = str(truth["origin"][row])
        tally = counts.setdefault(origin, [0, 0, 0, 0])
        sure = claim.probability >= 0.95
        tally[0] += 1
        tally[1] += sure
        tally[2] += sure and claim.origin != origin
        tally[3] += sure and claim.species != str(truth["species"][row])
    return session, counts


if __name__ == "__main__":
    listed = json.loads((samples_dir() / "samples.json").read_text())
    for entry in listed if isinstance(listed, list) else listed["samples"]:
        session, counts = confusion(entry)
        print(entry["file"], [(o, round(v, 2)) for o, v, _ in session.components])
        for origin, (n, sure, other, wrong) in sorted(counts.items()):
            print(f"   {origin:13s} {n:5d} features, {sure:5d} confident, {other:3d} of another "
                  f"origin, {wrong:3d} of another species")
