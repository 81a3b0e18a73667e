"""Lines whose strength departs from LTE enough to mislead a Saha-Boltzmann prediction.

Sources: N III 4634-4642 Mihalas & Hummer 1973 (ApJ 179, 827); C III 5696 Sakhibullin, Auer & van
der Hucht 1982 (SvA 26, 563); Si IV 6667, 6701 and the Of emission lines Walborn 2001 (ASP Conf.
242, 217); O I 7772-7775, 8446 Kiselman 1993 (A&A 275, 269); the rest as reviewed by Asplund 2005
(ARA&A 43, 481). Ions whose red lines are all affected are named without wavelengths.
"""

from __future__ import annotations

import numpy as np

from linewright.spectra.medium import air_to_vacuum

# species: air wavelengths, Angstrom
NONLTE = {
    "N III": (4634.13, 4640.64, 4641.85), "C III": (5695.92, 4647.42, 4650.25, 4651.47),
    "Si IV": (6667.56, 6701.21, 4088.86, 4116.10), "N IV": (4057.76, 6380.77),
    "He II": (4685.70,), "He I": (5875.62, 6678.15, 7065.19, 10830.3, 20581.3),
    "H I": (6562.80,), "O I": (7771.94, 7774.17, 7775.39, 8446.25, 8446.36, 8446.76),
    "Na I": (5889.95, 5895.92, 8183.26, 8194.82, 8194.79), "K I": (7664.90, 7698.96),
    "Li I": (6707.76, 6707.91, 6103.65), "Ca II": (8498.02, 8542.09, 8662.14, 3933.66, 3968.47),
    "C I": (8335.15, 9061.43, 9078.29, 9088.51, 9094.83, 9111.80, 10683.1, 10691.2),
    "N I": (8680.28, 8683.40, 8686.15), "Al I": (3944.01, 3961.52),
    "S I": (9212.86, 9228.09, 9237.54), "Ba II": (4554.03, 5853.67, 6141.71, 6496.90),
}
WHOLE_SPECIES = ("Ne I",)
REACH = 0.05  # Angstrom


def mark_nonlte(wave, species, names: list[str]) -> np.ndarray:
    """1 where a line (vacuum Angstrom) is one of the list, else 0."""
    wave, species = np.asarray(wave), np.asarray(species)
    marks = np.zeros(len(wave), int)
    for code, name in enumerate(names):
        if name in WHOLE_SPECIES:
            marks[species == code] = 1
        for air in NONLTE.get(name, ()):
            reach = 0.3 if name in ("H I", "He I", "He II") else REACH
            marks[(species == code) & (np.abs(wave - air_to_vacuum(air)) < reach)] = 1
    return marks
