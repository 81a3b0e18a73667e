"""The line catalogue: columns sorted by vacuum wavelength."""

from __future__ import annotations

from dataclasses import dataclass, fields

import numpy as np

ORIGINS = ("stellar", "nebular", "telluric", "interstellar", "sky", "lamp", "molecular")
# Grade of a line's strength by its stated error: A 0.05 dex or better, B 0.12, C 0.25, D 0.5,
# E worse or nominal; '' where the line has no strength.
GRADES = ("", "A", "B", "C", "D", "E")
# Bits of ``flags``.
NONLTE, NOMINAL, COLLAPSED = 1, 2, 4
FLAG_NAMES = {NONLTE: "non-LTE", NOMINAL: "nominal strength", COLLAPSED: "components collapsed"}
EV_ANGSTROM = 12398.41984  # h c, CODATA 2022
# Optional columns: value where unknown, type.
OPTIONAL_COLUMNS = {
    "wave_alt": (np.nan, np.float64), "source_alt": (-1, np.int32), "grade": (0, np.uint8),
    "flags": (0, np.uint8), "gamma_rad": (np.nan, np.float32),
    "gamma_waals": (np.nan, np.float32), "gamma_stark": (np.nan, np.float32),
    "loggf_alt": (np.nan, np.float32), "source_loggf_alt": (-1, np.int32),
    "term_low": (0, np.int32), "term_up": (0, np.int32),
}


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

    Optional columns, filled with 'unknown' where not given:
    wave_alt, source_alt: vacuum wavelength and source of the second, not preferred value
        (NaN, -1 without one); within three ``wave_err`` of ``wave``
    grade: index into GRADES; flags: bits NONLTE, NOMINAL, COLLAPSED
    gamma_rad: log10 of the radiative damping constant, rad/s (NaN unknown)
    gamma_waals: log10 of van der Waals damping per hydrogen atom at 10,000 K, rad/s cm3
    gamma_stark: log10 of Stark damping per electron at 10,000 K, rad/s cm3, approximate
    loggf_alt, source_loggf_alt: log gf of a second source (NaN, -1 without one); within three
        ``loggf_err`` of ``loggf``
    term_low, term_up: index into ``term_names`` ('configuration|term', entry 0 '' unknown)
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
    wave_alt: np.ndarray | None = None
    source_alt: np.ndarray | None = None
    grade: np.ndarray | None = None
    flags: np.ndarray | None = None
    gamma_rad: np.ndarray | None = None
    gamma_waals: np.ndarray | None = None
    gamma_stark: np.ndarray | None = None
    loggf_alt: np.ndarray | None = None
    source_loggf_alt: np.ndarray | None = None
    term_low: np.ndarray | None = None
    term_up: np.ndarray | None = None
    term_names: tuple[str, ...] = ("",)

    def __post_init__(self):
        for name, (value, dtype) in OPTIONAL_COLUMNS.items():
            if getattr(self, name) is None:
                object.__setattr__(self, name, np.full(len(self.wave), value, dtype))

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
            term_names=self.term_names,
        )

    def between(self, low: float, high: float) -> LineCatalogue:
        """Lines with low <= vacuum wavelength <= high (Angstrom); a view, no copy."""
        first, last = np.searchsorted(self.wave, [low, np.nextafter(high, np.inf)])
        return self.take(slice(int(first), int(last)))

    def species_of(self, row: int) -> str:
        return self.species_names[int(self.species[row])]

    @property
    def e_up(self) -> np.ndarray:
        """Upper-level energy, eV: e_low + h c / wave (NaN where e_low is unknown)."""
        return self.e_low + EV_ANGSTROM / self.wave

    @property
    def multiplet(self) -> np.ndarray:
        """One number per line, equal for lines of one species between the same two terms.

        -1 where a term is unknown.
        """
        known = (self.term_low > 0) & (self.term_up > 0)
        key = (self.species.astype(np.int64) << 40) | (self.term_low.astype(np.int64) << 20)
        return np.where(known, key | self.term_up, -1)

    def term_of(self, row: int, upper: bool = False) -> tuple[str, str]:
        """(configuration, term) of a line's lower or upper level; empty where unknown."""
        code = int((self.term_up if upper else self.term_low)[row])
        configuration, _, term = self.term_names[code].partition("|")
        return configuration, term
