"""Bibliographic keys of the tables: full citation and BibTeX entry of each.

Usage: python linedata/builders/citations.py SOURCE_DIR [--out FOLDER]  (reads nothing)
"""

from __future__ import annotations

import json

from common import TABLES, enter_in_manifest, replace_bytes, script_arguments

# key: authors (BibTeX), year, journal, volume, page, title
ARTICLES = {
    "Asplund2009": (
        "Asplund, M. and Grevesse, N. and Sauval, A. J. and Scott, P.", 2009,
        "Annual Review of Astronomy and Astrophysics", "47", "481",
        "The Chemical Composition of the Sun",
    ),
    "Barklem2016": (
        "Barklem, P. S. and Collet, R.", 2016, "Astronomy and Astrophysics", "588", "A96",
        "Partition functions and equilibrium constants for diatomic molecules and atoms of "
        "astrophysical interest",
    ),
    "BatesDamgaard1949": (
        "Bates, D. R. and Damgaard, A.", 1949,
        "Philosophical Transactions of the Royal Society of London A", "242", "101",
        "The Calculation of the Absolute Strengths of Spectral Lines",
    ),
    "Bautista2001": ("Bautista, M. A.", 2001, "Astronomy and Astrophysics", "365", "268", ""),
    "Bautista2015": (
        "Bautista, M. A. and Fivet, V. and Ballance, C. and others", 2015,
        "The Astrophysical Journal", "808", "174", "",
    ),
    "Biemont1986": (
        "Bi\\'emont, E. and Hansen, J. E.", 1986, "Physica Scripta", "33", "117", "",
    ),
    "Biemont1995": (
        "Bi\\'emont, E. and Hansen, J. E. and Quinet, P. and Zeippen, C. J.", 1995,
        "Astronomy and Astrophysics Supplement", "111", "333", "",
    ),
    "Brooke2014": (
        "Brooke, J. S. A. and Ram, R. S. and Western, C. M. and others", 2014,
        "The Astrophysical Journal Supplement", "210", "23",
        "Einstein A Coefficients and Oscillator Strengths for the A-X (Red) and B-X (Violet) "
        "Systems and Rovibrational Transitions in the X State of CN",
    ),
    "Chen2000": (
        "Chen, G. X. and Pradhan, A. K.", 2000, "Astronomy and Astrophysics Supplement", "147",
        "111", "",
    ),
    "Deb2009": ("Deb, N. C. and Hibbert, A.", 2009, "Journal of Physics B", "42", "065003", ""),
    "Dulick2003": (
        "Dulick, M. and Bauschlicher, C. W. and Burrows, A. and others", 2003,
        "The Astrophysical Journal", "594", "651", "Line Intensities and Molecular Opacities of "
        "the FeH F-X Transition",
    ),
    "Ekberg1993": (
        "Ekberg, J. O.", 1993, "Astronomy and Astrophysics Supplement", "101", "1", "",
    ),
    "FroeseFischer1985": (
        "Froese Fischer, C. and Saha, H. P.", 1985, "Physica Scripta", "32", "181", "",
    ),
    "FroeseFischer2004": (
        "Froese Fischer, C. and Tachiev, G.", 2004, "Atomic Data and Nuclear Data Tables", "87",
        "1", "",
    ),
    "FroeseFischer2006": (
        "Froese Fischer, C. and Tachiev, G. and Irimia, A.", 2006,
        "Atomic Data and Nuclear Data Tables", "92", "607", "",
    ),
    "FroeseFischer2008": (
        "Froese Fischer, C. and Rubin, R. H. and Rodr{\\'\\i}guez, M.", 2008,
        "Monthly Notices of the Royal Astronomical Society", "391", "1828", "",
    ),
    "Galavis1997": (
        "Galavis, M. E. and Mendoza, C. and Zeippen, C. J.", 1997,
        "Astronomy and Astrophysics Supplement", "123", "159", "",
    ),
    "Goorvitch1994": (
        "Goorvitch, D.", 1994, "The Astrophysical Journal Supplement", "95", "535",
        "Infrared CO Line List for the X 1Sigma+ State",
    ),
    "Gredel1993": (
        "Gredel, R. and van Dishoeck, E. F. and Black, J. H.", 1993,
        "Astronomy and Astrophysics", "269", "477", "",
    ),
    "Hinkle2013": (
        "Hinkle, K. H. and Wallace, L. and Ram, R. S. and others", 2013,
        "The Astrophysical Journal Supplement", "207", "26",
        "The Magnesium Isotopologues of MgH in the A-X System",
    ),
    "Hobbs2008": (
        "Hobbs, L. M. and York, D. G. and Snow, T. P. and others", 2008,
        "The Astrophysical Journal", "680", "1256", "A Catalog of Diffuse Interstellar Bands in "
        "the Spectrum of HD 204827",
    ),
    "Masseron2014": (
        "Masseron, T. and Plez, B. and Van Eck, S. and others", 2014,
        "Astronomy and Astrophysics", "571", "A47", "CH in stellar atmospheres: an extensive "
        "linelist",
    ),
    "Mendoza1982": (
        "Mendoza, C. and Zeippen, C. J.", 1982,
        "Monthly Notices of the Royal Astronomical Society", "199", "1025", "",
    ),
    "Mendoza1983": (
        "Mendoza, C. and Zeippen, C. J.", 1983,
        "Monthly Notices of the Royal Astronomical Society", "202", "981", "",
    ),
    "Morton2003": (
        "Morton, D. C.", 2003, "The Astrophysical Journal Supplement", "149", "205",
        "Atomic Data for Resonance Absorption Lines. III.",
    ),
    "MunozBurgos2009": (
        "Mu{\\~n}oz Burgos, J. M. and Loch, S. D. and Ballance, C. P. and Boivin, R. F.", 2009,
        "Astronomy and Astrophysics", "500", "1253", "",
    ),
    "Nahar2000": (
        "Nahar, S. N. and Delahaye, F. and Pradhan, A. K. and Zeippen, C. J.", 2000,
        "Astronomy and Astrophysics Supplement", "144", "141", "",
    ),
    "Osterbrock1996": (
        "Osterbrock, D. E. and Fulbright, J. P. and Martel, A. R. and others", 1996,
        "Publications of the Astronomical Society of the Pacific", "108", "277",
        "Night-Sky High-Resolution Spectral Atlas of OH and O2 Emission Lines for Echelle "
        "Spectrograph Wavelength Calibration",
    ),
    "Plez1998": (
        "Plez, B.", 1998, "Astronomy and Astrophysics", "337", "495", "A new TiO line list",
    ),
    "Placco2021": (
        "Placco, V. M. and Sneden, C. and Roederer, I. U. and others", 2021,
        "Research Notes of the American Astronomical Society", "5", "92",
        "Linemake: An Atomic and Molecular Line List Generator",
    ),
    "Porter2013": (
        "Porter, R. L. and Ferland, G. J. and Storey, P. J. and Detisch, M. J.", 2013,
        "Monthly Notices of the Royal Astronomical Society", "433", "L89",
        "Improved He I emissivities in the case B approximation (erratum of 2012, 425, L28)",
    ),
    "Ram2014": (
        "Ram, R. S. and Brooke, J. S. A. and Bernath, P. F. and others", 2014,
        "The Astrophysical Journal Supplement", "211", "5", "Improved Line Data for the Swan "
        "System 12C13C Isotopologue",
    ),
    "Rothman2005": (
        "Rothman, L. S. and Jacquemart, D. and Barbe, A. and others", 2005,
        "Journal of Quantitative Spectroscopy and Radiative Transfer", "96", "139",
        "The HITRAN 2004 molecular spectroscopic database",
    ),
    "Rynkun2019": (
        "Rynkun, P. and Gaigalas, G. and J{\\\"o}nsson, P.", 2019, "Astronomy and Astrophysics",
        "623", "A155", "",
    ),
    "Sansonetti1996": (
        "Sansonetti, C. J. and Salit, M. L. and Reader, J.", 1996, "Applied Optics", "35", "74",
        "Wavelengths of spectral lines in mercury pencil lamps",
    ),
    "Storey1995": (
        "Storey, P. J. and Hummer, D. G.", 1995,
        "Monthly Notices of the Royal Astronomical Society", "272", "41", "",
    ),
    "Storey2000": (
        "Storey, P. J. and Zeippen, C. J.", 2000,
        "Monthly Notices of the Royal Astronomical Society", "312", "813",
        "Theoretical values for the [O III] 5007/4959 line-intensity ratio and homologous cases",
    ),
    "Tayal2018": (
        "Tayal, S. S. and Zatsarinny, O.", 2018, "Physical Review A", "98", "012706", "",
    ),
    "Wiese1996": (
        "Wiese, W. L. and Fuhr, J. R. and Deters, T. M.", 1996,
        "Journal of Physical and Chemical Reference Data, Monograph", "7", "1",
        "Atomic transition probabilities of carbon, nitrogen, and oxygen",
    ),
    "Witthoeft2008": (
        "Witthoeft, M. C. and Badnell, N. R.", 2008, "Astronomy and Astrophysics", "481", "543",
        "",
    ),
    "YanDrake1995": (
        "Yan, Z.-C. and Drake, G. W. F.", 1995, "Physical Review A", "52", "R4316", "",
    ),
}
# key: (citation, BibTeX body)
OTHERS = {
    "PearseGaydon1976": (
        "Pearse, R. W. B. and Gaydon, A. G. 1976, The Identification of Molecular Spectra, 4th "
        "ed., Chapman and Hall (values recalled from memory)",
        "@book{PearseGaydon1976,\n  author = {Pearse, R. W. B. and Gaydon, A. G.},\n  title = "
        "{The Identification of Molecular Spectra},\n  edition = {4},\n  publisher = {Chapman "
        "and Hall},\n  year = {1976}\n}",
    ),
    "NIST_ASD": (
        "Kramida, A., Ralchenko, Yu., Reader, J., and NIST ASD Team, NIST Atomic Spectra "
        "Database: energy levels; Ritz wavelengths computed from them",
        "@misc{NIST_ASD,\n  author = {Kramida, A. and Ralchenko, Yu. and Reader, J. and {NIST "
        "ASD Team}},\n  title = {{NIST Atomic Spectra Database}},\n  howpublished = {National "
        "Institute of Standards and Technology, Gaithersburg, MD},\n  doi = {10.18434/T4W30F}\n}",
    ),
    "Hydrogenic": (
        "Computed here: Dirac fine structure, Lamb shift of s states, exact dipole strengths; "
        "limits and Rydberg constants of NIST ASD (H: Kramida 2010, ADNDT 96, 586)",
        "@article{Hydrogenic,\n  author = {Kramida, A. E.},\n  title = {A critical compilation of "
        "experimental data on spectral lines and energy levels of hydrogen, deuterium, and "
        "tritium},\n  journal = {Atomic Data and Nuclear Data Tables},\n  year = {2010},\n"
        "  volume = {96},\n  pages = {586}\n}",
    ),
}


def article(key: str) -> dict[str, str]:
    """Citation and BibTeX entry of a journal article."""
    authors, year, journal, volume, page, title = ARTICLES[key]
    shown = authors.replace(" and others", " et al.").replace(" and ", "; ")
    for mark, letter in (("{\\'\\i}", "í"), ("{\\~n}", "ñ"), ('{\\"o}', "ö"), ("\\'e", "é")):
        shown = shown.replace(mark, letter)
    heading = f", {title}" if title else ""
    lines = [("author", authors), ("title", title), ("journal", journal), ("year", str(year)),
             ("volume", volume), ("pages", page)]
    body = ",\n".join(f"  {name} = {{{value}}}" for name, value in lines if value)
    return {
        "citation": f"{shown} {year}{heading}, {journal} {volume}, {page}",
        "bibtex": f"@article{{{key},\n{body}\n}}",
    }


def main() -> None:
    arguments = script_arguments(__doc__.splitlines()[0])
    entries = {key: article(key) for key in ARTICLES}
    for key, (citation, bibtex) in OTHERS.items():
        entries[key] = {"citation": citation, "bibtex": bibtex}
    path = (arguments.out or TABLES) / "citations.json"
    text = json.dumps(entries, indent=1, sort_keys=True, ensure_ascii=False)
    replace_bytes(path, (text + "\n").encode())
    enter_in_manifest(path)
    print(len(entries), "citations")


if __name__ == "__main__":
    main()
