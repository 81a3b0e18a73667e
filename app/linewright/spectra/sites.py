"""Where observatories stand, so that no network is needed to know it.

Geodetic latitude and east longitude in degrees, height in metres, of the telescopes or of
the site's middle. The positions are common knowledge, written from memory and rounded; those
of Cerro Tololo, Kitt Peak and Haute-Provence are as in Wright & Eastman 2014 (PASP 126, 838)
and its companion tests. An error of 1 km changes a correction by less than 0.1 m/s.
"""

from __future__ import annotations

import re
from dataclasses import dataclass

from ..errors import InputRefused


@dataclass(frozen=True)
class Site:
    """A place on the Earth: degrees north and east, metres above the ellipsoid."""

    name: str
    latitude: float
    longitude: float
    height: float

    def in_words(self) -> str:
        return f"{self.name} ({self.latitude:+.4f}, {self.longitude:+.4f}, {self.height:.0f} m)"


_TABLE = (
    # name; other names in TELESCOP, OBSERVAT or typed (a pattern); degrees, degrees, metres
    ("La Silla", r"la ?silla|eso-?3\.?6|eso-ntt|eso-3p6|eso 1\.52|mpg|harps", -29.2584, -70.7345, 2400),
    ("Paranal", r"paranal|eso-vlt|\bvlt|\but[1-4]\b|vista", -24.6272, -70.4048, 2648),
    ("Armazones", r"armazones|eso-elt", -24.5895, -70.1920, 3046),
    ("Cerro Tololo", r"tololo|ctio|blanco", -30.169283, -70.806789, 2241.9),
    ("Cerro Pachon", r"pach[oó]n|gemini-?_?s|\bsoar\b|rubin", -30.2407, -70.7367, 2722),
    ("Las Campanas", r"campanas|\blco\b|magellan|clay|baade|du ?pont", -29.0146, -70.6926, 2380),
    ("Mauna Kea", r"mauna|keck|cfht|gemini-?_?n|subaru|irtf|ukirt", 19.8255, -155.4722, 4160),
    ("Haleakala", r"haleakala", 20.7075, -156.2561, 3055),
    ("Kitt Peak", r"kitt ?peak|kpno|mayall|wiyn|bok", 31.9599, -111.5997, 2096),
    ("Mount Hopkins", r"hopkins|flwo|whipple|tillinghast|\bmmt\b", 31.6811, -110.8783, 2340),
    ("Mount Graham", r"mt\.? ?graham|mount graham|\blbt\b", 32.7013, -109.8890, 3221),
    ("Apache Point", r"apache|\bapo|sdss|arc 3\.5", 32.7803, -105.8203, 2788),
    ("McDonald", r"mcdonald|hobby|\bhet\b|smith 2\.7", 30.6714, -104.0217, 2075),
    ("Lick", r"\blick\b|shane|\bapf\b", 37.3414, -121.6429, 1283),
    ("Palomar", r"palomar|hale|\bp200", 33.3563, -116.8648, 1706),
    ("Mount Wilson", r"mount wilson|mt\.? ?wilson", 34.2236, -118.0565, 1742),
    ("Lowell", r"lowell|\bldt\b|discovery channel", 34.7444, -111.4223, 2361),
    ("San Pedro Martir", r"pedro ?m[aá]rtir|\bspm\b", 31.0442, -115.4637, 2830),
    ("La Palma", r"la ?palma|roque|\borm\b|\btng\b|\bwht\b|\bint\b|\bnot\b|nordic|mercator|\bgtc\b|william",
     28.7569, -17.8850, 2370),
    ("Teide", r"teide|tenerife|iza[nñ]a|\bstella", 28.3003, -16.5119, 2390),
    ("Calar Alto", r"calar|\bcaha\b|\bca[ -]?[23]\.[25]", 37.2236, -2.5461, 2168),
    ("Haute-Provence", r"haute[- ]?provence|\bohp\b", 43.9308, 5.7133, 650),
    ("Pic du Midi", r"pic ?du ?midi|\btbl\b|bernard lyot", 42.9365, 0.1426, 2877),
    ("Asiago", r"asiago|ekar", 45.8486, 11.5690, 1370),
    ("Ondrejov", r"ond[rř]ejov|perek", 49.9105, 14.7836, 528),
    ("Tautenburg", r"tautenburg|\btls\b", 50.9804, 11.7112, 341),
    ("Rozhen", r"rozhen", 41.6931, 24.7389, 1759),
    ("Zelenchuk", r"zelenchuk|\bsao ras\b|\bbta\b", 43.6468, 41.4405, 2070),
    ("Sutherland", r"sutherland|saao|\bsalt\b", -32.3794, 20.8107, 1798),
    ("Siding Spring", r"siding|\baat\b|\bsso\b|anglo-australian|\banu\b", -31.2770, 149.0661, 1164),
    ("Mount John", r"mt\.? ?john|mount john|\bmjuo\b", -43.9856, 170.4650, 1029),
    ("El Leoncito", r"leoncito|casleo", -31.7992, -69.3033, 2552),
    ("Pico dos Dias", r"pico dos dias|\bopd\b|\blna\b", -22.5344, -45.5825, 1864),
    ("Xinglong", r"xinglong|lamost|guoshoujing", 40.3956, 117.5783, 960),
    ("Okayama", r"okayama|\boao\b", 34.5761, 133.5940, 372),
    ("Bohyunsan", r"bohyun|\bboao\b", 36.1648, 128.9767, 1127),
    ("Dominion", r"dominion|\bdao\b", 48.5197, -123.4169, 238),
    ("David Dunlap", r"dunlap|\bddo\b", 43.8628, -79.4217, 244),
)
SITES = {name: Site(name, lat, lon, height) for name, _, lat, lon, height in _TABLE}


def find_site(text: str) -> Site | None:
    """The site a telescope's or observatory's name stands for; None when it is not known."""
    word = " ".join(str(text).lower().split())
    if not word:
        return None
    for name, pattern, *_ in _TABLE:
        if word == name.lower() or re.search(pattern, word):
            return SITES[name]
    return None


def _typed(text: str) -> Site | None:
    parts = text.replace(",", " ").split()
    try:
        numbers = [float(part) for part in parts]
    except ValueError:
        return None
    if len(numbers) not in (2, 3):
        return None
    latitude, longitude, height = (*numbers, 0.0)[:3]
    return Site("typed site", latitude, longitude, height)


def required_site(text: str) -> Site:
    """A site by name, or typed as 'LAT,LON,HEIGHT' (degrees north, degrees east, metres).

    Raises InputRefused for an unknown name and for impossible coordinates.
    """
    site = _typed(text) or find_site(text)
    if site is None:
        raise InputRefused("--site", f"'{text}' is not in the table of sites",
                           "type it as LAT,LON,HEIGHT (degrees north, degrees east, metres)")
    if not (-90 <= site.latitude <= 90 and -360 <= site.longitude <= 360
            and -500 <= site.height < 9000):
        raise InputRefused("--site", f"'{text}' is no place on the Earth",
                           "use degrees north, degrees east, metres")
    return site
