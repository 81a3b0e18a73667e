"""Energy levels beyond the end of the level files, and O II 3d' 2G.

Values: NIST ASD (copies of October 2013, recopied by hand from the level files of the plasma code
Cloudy, data/stout; zlib licence), after Nave et al. 1994 (ApJS 94, 221) and Nave & Johansson 1993
(Fe I), Saloman 2012 (J. Phys. Chem. Ref. Data 41, 043103; Cr I, above the limit), Litzen, Brault &
Thorne 1993 (Phys. Scr. 47, 628; Ni I), Martin & Zalubas 1983 (J. Phys. Chem. Ref. Data 12, 323;
Si I) and Sansonetti 2008 (J. Phys. Chem. Ref. Data 37, 1659; Na I). The texts in ``levels/`` have a
line per term: configuration | term | J level(cm-1), J level ...; a term with a star is odd.
"""

from __future__ import annotations

from pathlib import Path

FOLDER = Path(__file__).with_name("levels")
FILES = {
    ("Cr", 1): "cr_1", ("Fe", 1): "fe_1", ("Na", 1): "na_1", ("Ni", 1): "ni_1", ("Si", 1): "si_1",
}
# Error (cm-1) of levels whose printed digits promise too much: Cr I above the limit and the general
# list differ by 0.11 cm-1 (robust, 5,900 lines), shared alike by the two.
LEAST_ERROR = {("Cr", 1): 0.08}
# O II 3d' 2G, missing in the file: from the observed 4185.440 and 4189.788 A (Wenaker 1990, Phys.
# Scr. 42, 667; from memory).
OXYGEN = "2s2.2p2.(1D).3d | 2G | 7/2 252609.46, 9/2 252608.28"


def beyond(element: str, stage: int) -> list[tuple[str, str, str, str]]:
    """(configuration, term, J, level) of one ion, as text; empty where there are none."""
    if (element, stage) == ("O", 2):
        text = OXYGEN
    elif (element, stage) in FILES:
        text = (FOLDER / f"{FILES[element, stage]}.txt").read_text()
    else:
        return []
    rows = []
    for line in text.strip().splitlines():
        configuration, term, levels = (cell.strip() for cell in line.split("|"))
        for level in levels.split(","):
            j, energy = level.split()
            rows.append((configuration, term, j, energy))
    return rows
