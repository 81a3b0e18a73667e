"""Emission lines of H II regions and planetary nebulae with nominal strengths.

Usage: python linedata/builders/nebular_lines.py SOURCE_DIR [--out FOLDER]

Forbidden lines: Ritz wavelengths from NIST levels, published A values and collision
strengths (level populations solved here). Permitted lines: see recombination.py.
"""

from __future__ import annotations

import numpy as np

from collisional import nominal_ion, published_ion
from common import ORIGIN_CODE, pack_lines, script_arguments, write_table
from hydrogenic import HELIUM_II, HYDROGEN
from level_physics import abundances, ionisation_energies
from nebula_model import DENSITY, TEMPERATURE, collisional_level, log_ion_abundance
from recombination import FAINTEST, helium_rows, hydrogenic_ratios, one_electron_rows
from recombination import permitted_rows
from symbols import ELEMENTS, ROMAN

# Ion: (atom file, collision file, bibliographic key of the A values).
PUBLISHED = {
    ("C", 1): ("c_i_atom_FFS85.dat", "c_i_coll_JBK87-PA76.dat", "FroeseFischer1985"),
    ("N", 1): ("n_i_atom_KS86-WFD96.dat", "n_i_coll_PA76-DMR76.dat", "Wiese1996"),
    ("N", 2): ("n_ii_atom_FFT04.dat", "n_ii_coll_T11.dat", "FroeseFischer2004"),
    ("O", 1): ("o_i_atom_WFD96.dat", "o_i_coll_BK95.dat", "Wiese1996"),
    ("O", 2): ("o_ii_atom_FFT04.dat", "o_ii_coll_Kal09.dat", "FroeseFischer2004"),
    ("O", 3): ("o_iii_atom_FFT04-SZ00.dat", "o_iii_coll_SSB14.dat", "Storey2000"),
    ("Ne", 3): ("ne_iii_atom_FFT04.dat", "ne_iii_coll_McLB00.dat", "FroeseFischer2004"),
    ("Ne", 4): ("ne_iv_atom_FFT04.dat", "ne_iv_coll_G81.dat", "FroeseFischer2004"),
    ("Ne", 5): ("ne_v_atom_GMZ97-U-BD93.dat", "ne_v_coll_LB94.dat", "Galavis1997"),
    ("Na", 4): ("na_iv_atom_GMZ97.dat", "na_iv_coll_BZ94.dat", "Galavis1997"),
    ("Mg", 5): ("mg_v_atom_GMZ97.dat", "mg_v_coll_BZ94.dat", "Galavis1997"),
    ("P", 2): ("p_ii_atom_MZ82.dat", "p_ii_coll_T04.dat", "Mendoza1982"),
    ("S", 2): ("s_ii_atom_RGJ19.dat", "s_ii_coll_TZ10.dat", "Rynkun2019"),
    ("S", 3): ("s_iii_atom_FFTI06.dat", "s_iii_coll_TG99.dat", "FroeseFischer2006"),
    ("Cl", 2): ("cl_ii_atom_MZ83.dat", "cl_ii_coll_T04.dat", "Mendoza1983"),
    ("Cl", 3): ("cl_iii_atom_RGJ19.dat", "cl_iii_coll_BZ89.dat", "Rynkun2019"),
    ("Cl", 4): ("cl_iv_atom_KS86-MZ82-EM84.dat", "cl_iv_coll_GMZ95.dat", "Mendoza1982"),
    ("Ar", 3): ("ar_iii_atom_MB09.dat", "ar_iii_coll_MB09.dat", "MunozBurgos2009"),
    ("Ar", 4): ("ar_iv_atom_RGJ19.dat", "ar_iv_coll_RB97.dat", "Rynkun2019"),
    ("Ar", 5): ("ar_v_atom_LL93-MZ82-KS86.dat", "ar_v_coll_GMZ95.dat", "Mendoza1982"),
    ("K", 4): ("k_iv_atom_M83-KS86.dat", "k_iv_coll_GMZ95.dat", "Mendoza1983"),
    ("K", 5): ("k_v_atom_M83-KS86.dat", "k_v_coll_BZL88.dat", "Mendoza1983"),
    ("Ca", 5): ("ca_v_atom_M83-KS86.dat", "ca_v_coll_GMZ95.dat", "Mendoza1983"),
    ("Fe", 2): ("fe_ii_atom_B15_52.dat", "fe_ii_coll_B15_52.dat", "Bautista2015"),
    ("Fe", 3): ("fe_iii_atom_DH09_34.dat", "fe_iii_coll_BBQ10_34.dat", "Deb2009"),
    ("Fe", 4): ("fe_iv_atom_FFRR08.dat", "fe_iv_coll_ZP97.dat", "FroeseFischer2008"),
    ("Fe", 5): ("fe_v_atom_Nal00.dat", "fe_v_coll_BGMcL07.dat", "Nahar2000"),
    ("Fe", 6): ("fe_vi_atom_CP00.dat", "fe_vi_coll_CP99.dat", "Chen2000"),
    ("Fe", 7): ("fe_vii_atom_WB08.dat", "fe_vii_coll_WB08.dat", "Witthoeft2008"),
    ("Ni", 3): ("ni_iii_atom_B01.dat", "ni_iii_coll_B01.dat", "Bautista2001"),
    ("Kr", 3): ("kr_iii_atom_BH86.dat", "kr_iii_coll_S97.dat", "Biemont1986"),
    ("Kr", 4): ("kr_iv_atom_BH86.dat", "kr_iv_coll_S97.dat", "Biemont1986"),
    ("Xe", 3): ("xe_iii_atom_BHQZ95.dat", "xe_iii_coll_SB98.dat", "Biemont1995"),
    ("Xe", 4): ("xe_iv_atom_BHQZ95.dat", "xe_iv_coll_SB98.dat", "Biemont1995"),
}
# Higher [Fe II] levels than the preferred source has.
MORE_IRON = ("fe_ii_atom_TZ18_173.dat", "fe_ii_coll_TZ18_173.dat", "Tayal2018")
# Ions without published data here: highest level used, cm-1.
NOMINAL = {
    ("Ni", 2): 33000.0, ("Cr", 2): 33000.0, ("Co", 2): 25000.0, ("Mn", 2): 33000.0,
    ("Ti", 2): 15000.0, ("V", 2): 20000.0, ("Ca", 2): 14000.0, ("S", 1): 23000.0,
    ("Fe", 1): 13000.0, ("Cr", 3): 30000.0, ("Si", 1): 16000.0, ("Cu", 2): 27000.0,
    ("Mn", 3): 33000.0, ("Co", 3): 30000.0, ("Ni", 4): 40000.0,
}
PERMITTED = [
    ("C", 1), ("C", 2), ("C", 3), ("N", 1), ("N", 2), ("N", 3), ("O", 1), ("O", 2), ("O", 3),
    ("Ne", 2), ("Mg", 1), ("Mg", 2), ("Al", 2), ("Si", 2), ("Si", 3), ("S", 2), ("S", 3),
    ("Ar", 2), ("Ca", 2), ("C", 4), ("N", 4), ("O", 4), ("Na", 1),
]


class Collector:
    """Gathers rows with species and source names."""

    def __init__(self):
        self.rows: list[dict] = []
        self.names: list[str] = []
        self.keys: list[str] = []

    def _index(self, words: list[str], word: str) -> int:
        if word not in words:
            words.append(word)
        return words.index(word)

    def add(self, species: str, key: str, rows: list[dict]) -> None:
        codes = {"species": self._index(self.names, species), "source": self._index(self.keys, key)}
        self.rows += [row | codes for row in rows]


def forbidden_rows(emissions, log_abundance: float) -> list[dict]:
    rows = []
    for line in emissions:
        level = collisional_level(line.power, log_abundance)
        if level > FAINTEST and line.wave > 3000.0:
            rows.append({
                "wave": line.wave, "wave_err": line.wave_err, "e_low": line.e_low,
                "j_low": line.j_low, "j_up": line.j_up, "spread": 0.0, "emission": level,
                "term_low": line.term_low, "term_up": line.term_up,
            })
    return rows


def collect(source) -> Collector:
    """All rows of the table."""
    energies, solar = ionisation_energies(source), abundances(source)
    found, conditions = Collector(), (TEMPERATURE, DENSITY)

    def abundance(element, stage):
        return log_ion_abundance(element, ELEMENTS.index(element) + 1, stage, energies, solar)

    for ion, (atom, collisions, key) in PUBLISHED.items():
        lines = published_ion(source, ion, (atom, collisions), conditions)
        name = f"[{ion[0]} {ROMAN[ion[1] - 1]}]"
        found.add(name, key, forbidden_rows(lines, abundance(*ion)))
    extra = published_ion(source, ("Fe", 2), MORE_IRON[:2], conditions)
    known = {round(row["wave"], 2) for row in found.rows}
    rows = forbidden_rows(extra, abundance("Fe", 2))
    found.add("[Fe II]", MORE_IRON[2], [r for r in rows if round(r["wave"], 2) not in known])
    for ion, top in NOMINAL.items():
        lines = nominal_ion(source, ion, top, conditions)
        name = f"[{ion[0]} {ROMAN[ion[1] - 1]}]"
        found.add(name, "NIST_ASD", forbidden_rows(lines, abundance(*ion)))
    hydrogen = hydrogenic_ratios(source, "h_i_rec_SH95.fits")
    found.add("H I", "Storey1995", one_electron_rows(HYDROGEN, hydrogen, 0.0))
    helium = hydrogenic_ratios(source, "he_ii_rec_SH95.fits")
    found.add("He II", "Storey1995", one_electron_rows(HELIUM_II, helium, -3.5))
    found.add("He I", "Porter2013", helium_rows(source, solar[1] - 12.0))
    for element, stage in PERMITTED:
        limit = energies[ELEMENTS.index(element), stage - 1]
        rows = permitted_rows(source, (element, stage), limit, abundance(element, stage + 1))
        found.add(f"{element} {ROMAN[stage - 1]}", "NIST_ASD", rows)
    return found


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    found = collect(arguments.source_dir)
    columns = ("wave", "wave_err", "e_low", "j_low", "j_up", "spread", "emission")
    lines = {key: np.array([row[key] for row in found.rows], float) for key in columns}
    for key in ("term_low", "term_up"):
        lines[key] = np.array([row.get(key, "") for row in found.rows], dtype=object)
    lines["species"] = np.array([row["species"] for row in found.rows])
    lines["source"] = np.array([row["source"] for row in found.rows])
    lines["origin"] = np.full(len(found.rows), ORIGIN_CODE["nebular"])
    write_table("nebular_lines", pack_lines(lines, found.names, found.keys), arguments.out)
    print(len(found.rows), "lines of", len(found.names), "species")


if __name__ == "__main__":
    main()
