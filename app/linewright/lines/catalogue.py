"""The line catalogue: columns sorted by vacuum wavelength."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

ORIGINS = ("stellar", "nebular", "telluric", "interstellar", "sky", "lamp", "molecular")


@dataclass(frozen=True, eq=False)
class LineCatalogue:
    """Lines as arrays of equal length n, sorted by ``wave``.

    wave, wave_err: vacuum wavelength and its one-sigma error, Angstrom
    species: index into ``species_names`` ('Fe I', '[O III]', 'O2', 'H2O')
    origin: index into ORIGINS
    e_low: lower-level energy, eV (NaN unknown)
    loggf, loggf_err: dex (NaN where the line has no absorption strength)
    emission: log10 of the line's emissivity relative to H beta = 100 at the stated
        nebular conditions and solar abundances (NaN where it has no emission model)
    depth_ref: telluric central optical depth at air mass 1 (NaN elsewhere)
    j_low, j_up: total angular momenta (NaN unknown)
    spread: rms spread of collapsed hyperfine, isotopic or fine components, Angstrom
    source: index into ``source_keys`` (bibliographic keys)
    """

    wave: np.ndarray
    wave_err: np.ndarray
    species: np.ndarray
    origin: np.ndarray
    e_low: np.ndarray
    loggf: np.ndarray
    loggf_err: np.ndarray
    emission: np.ndarray
    depth_ref: np.ndarray
    j_low: np.ndarray
    j_up: np.ndarray
    spread: np.ndarray
    source: np.ndarray
    species_names: tuple[str, ...]
    source_keys: tuple[str, ...]
    identity: str = ""

    def __len__(self) -> int:
        return len(self.wave)

    def take(self, which) -> LineCatalogue:
        """Rows by boolean mask, slice or ascending integer index; names stay whole."""
        columns = {
            f.name: getattr(self, f.name)[which]
            for f in fields(self)
            if isinstance(getattr(self, f.name), np.ndarray)
        }
        return LineCatalogue(
            **columns,
            species_names=self.species_names,
            source_keys=self.source_keys,
            identity=self.identity,
        )

    def between(self, low: float, high: float) -> LineCatalogue:
        """Lines with low <= vacuum wavelength <= high (Angstrom); a view, no copy."""
        first, last = np.searchsorted(self.wave, [low, np.nextafter(high, np.inf)])
        return self.take(slice(int(first), int(last)))

    def species_of(self, row: int) -> str:
        return self.species_names[int(self.species[row])]
