"""Who was observed, from where and when: what a barycentric correction needs.

Everything comes from header statements or is typed; nothing is looked up on a network.
"""

from __future__ import annotations

import math
import re
from dataclasses import dataclass, replace

from ..errors import InputRefused
from .raw import Card
from .sites import Site, find_site

_COORDINATES = (("PLUG_RA", "PLUG_DEC"), ("RA_TARG", "DEC_TARG"), ("TARG_RA", "TARG_DEC"),
                ("OBJRA", "OBJDEC"), ("OBJ_RA", "OBJ_DEC"), ("RA_OBJ", "DEC_OBJ"), ("RA", "DEC"),
                ("RA_OBS", "DEC_OBS"), ("RA_TEL", "DEC_TEL"))
_GEODETIC = (("ESO TEL GEOLAT", "ESO TEL GEOLON", "ESO TEL GEOELEV"),
             ("OBSGEO-B", "OBSGEO-L", "OBSGEO-H"), ("SITELAT", "SITELONG", "SITEELEV"),
             ("LATITUDE", "LONGITUD", "ALTITUDE"), ("LAT-OBS", "LONG-OBS", "ALT-OBS"),
             ("GEOLAT", "GEOLON", "GEOELEV"))
_NAMES = ("OBSERVAT", "SITENAME", "OBSERVATORY", "TELESCOP")
_EXPOSURES = ("EXPTIME", "TEXPTIME", "EXPOSURE", "ITIME")
_SCALES = {"UTC": "utc", "UT": "utc", "TAI": "tai", "TT": "tt", "TDB": "tdb", "TDT": "tt"}


@dataclass(frozen=True)
class Observation:
    """NaN or None where not known.

    ra, dec: ICRS degrees at ``epoch`` (Julian year); pm_ra (with cos dec), pm_dec: mas/yr
    parallax: mas; velocity: of the star, km/s; time: JD of mid-exposure as two parts in
    ``scale``; sources: words for each fact
    """

    site: Site | None = None
    ra: float = math.nan
    dec: float = math.nan
    pm_ra: float = 0.0
    pm_dec: float = 0.0
    parallax: float = math.nan
    velocity: float = 0.0
    epoch: float = 2000.0
    time: tuple[float, float] | None = None
    scale: str = "utc"
    sources: tuple[str, ...] = ()

    def missing(self) -> tuple[str, ...]:
        """Names of the facts a correction still lacks."""
        lacking = []
        if self.site is None:
            lacking.append("the site (--site)")
        if not (math.isfinite(self.ra) and math.isfinite(self.dec)):
            lacking.append("the star's coordinates (--coordinates)")
        if self.time is None:
            lacking.append("the time of mid-exposure (--time)")
        return tuple(lacking)


def sexagesimal(text: str) -> float | None:
    """'15 23 30.3', '-38:21:27.8' or a plain number as a number; None when it is neither."""
    word = str(text).strip()
    try:
        return float(word)
    except ValueError:
        pass
    match = re.fullmatch(r"([-+]?)(\d{1,3})[:hd ]\s*(\d{1,2})(?:[:m' ]\s*(\d{1,2}(?:\.\d*)?)[s\"]?)?",
                         word)
    if not match:
        return None
    sign, whole, minutes, seconds = match.groups()
    value = float(whole) + float(minutes) / 60 + float(seconds or 0) / 3600
    return -value if sign == "-" else value


def _angle(value, hours: bool) -> float | None:
    """Degrees of a header value; sexagesimal right ascensions are hours."""
    if isinstance(value, bool) or value is None:
        return None
    number = sexagesimal(value)
    if number is None or not math.isfinite(number):
        return None
    return number * 15.0 if hours and not _plain(value) else number


def _plain(value) -> bool:
    return isinstance(value, (int, float)) or re.fullmatch(r"\s*[-+]?[\d.]+\s*", str(value)) is not None


def _coordinates(header: dict):
    for ra_key, dec_key in _COORDINATES:
        ra, dec = _angle(header.get(ra_key), True), _angle(header.get(dec_key), False)
        if ra is not None and dec is not None and 0 <= ra <= 360 and -90 <= dec <= 90:
            return ra, dec, f"{ra_key} and {dec_key}"
    return None


def _number(header: dict, key: str) -> float:
    value = header.get(key)
    if isinstance(value, bool) or not isinstance(value, (int, float)):
        return math.nan
    return float(value)


def geodetic(x: float, y: float, z: float) -> tuple[float, float, float]:
    """(degrees north, degrees east, metres) of geocentric metres, WGS 84, by iteration."""
    a, f = 6378137.0, 1 / 298.257223563
    e2, p = f * (2 - f), math.hypot(x, y)
    latitude = math.atan2(z, p * (1 - e2))
    for _ in range(6):
        n = a / math.sqrt(1 - e2 * math.sin(latitude) ** 2)
        latitude = math.atan2(z + e2 * n * math.sin(latitude), p)
    n = a / math.sqrt(1 - e2 * math.sin(latitude) ** 2)
    height = p * math.cos(latitude) + z * math.sin(latitude) - a * a / n
    return math.degrees(latitude), math.degrees(math.atan2(y, x)), height


def _site(header: dict) -> tuple[Site, str] | None:
    x, y, z = (_number(header, f"OBSGEO-{axis}") for axis in "XYZ")
    if 6.3e6 < math.sqrt(x * x + y * y + z * z) < 6.4e6:
        return Site("OBSGEO site", *geodetic(x, y, z)), "OBSGEO-X, -Y, -Z"
    named = next(((find_site(header[k]), k) for k in _NAMES if find_site(header.get(k, ""))), None)
    for keys in _GEODETIC:
        values = [sexagesimal(header.get(k, "")) for k in keys]
        if values[0] is not None and values[1] is not None and abs(values[0]) <= 90:
            height = values[2] if values[2] is not None else named[0].height if named else 0.0
            return Site("site of the header", values[0], values[1], height), ", ".join(keys)
    return (named[0], f"{named[1]} = {header[named[1]]}") if named else None


def _middle(cards: dict, key: str) -> bool:
    comment = cards[key].comment.lower() if key in cards else ""
    return bool(re.search(r"\bmid|median|average|\bmean\b", comment)) or key.endswith("-AVG")


def parse_time(text: str) -> tuple[float, float] | None:
    """JD in two parts of 'YYYY-MM-DDThh:mm:ss.s', or of a number (JD, or MJD below 1e6)."""
    word = str(text).strip()
    match = re.fullmatch(r"(\d{4})-(\d\d)-(\d\d)[T ](\d\d):(\d\d)(?::(\d\d(?:\.\d*)?))?Z?", word)
    if match:
        year, month, day, hour, minute = (int(g) for g in match.groups()[:5])
        if not (1 <= month <= 12 and 1 <= day <= 31 and hour < 24 and minute < 60):
            return None
        fraction = (hour + minute / 60 + float(match.group(6) or 0) / 3600) / 24
        return _julian_day(year, month, day), fraction
    try:
        number = float(word)
    except ValueError:
        return None
    if not 0 < number < 1e7:
        return None
    whole = math.floor(number)
    return (whole + 2400000.5 if number < 1e6 else float(whole)), number - whole


def _julian_day(year: int, month: int, day: int) -> float:
    """JD at 0 h of a Gregorian date (Fliegel & Van Flandern 1968, CACM 11, 657)."""
    a = int((month - 14) / 12)
    return (1461 * (year + 4800 + a) // 4 + 367 * (month - 2 - 12 * a) // 12
            - 3 * ((year + 4900 + a) // 100) // 4 + day - 32075) - 0.5


def _time(cards: dict, header: dict):
    """(JD parts at mid-exposure, words) or None; whole-day MJDs are no time."""
    exposure = next((v for v in (_number(header, k) for k in _EXPOSURES) if v >= 0), math.nan)
    for key in ("MJD-AVG", "DATE-AVG", "MJD-OBS", "DATE-OBS", "DATE-BEG", "MJD-BEG", "JD", "MJD"):
        value = header.get(key, "")
        if key == "DATE-OBS" and "T" not in str(value):
            value = f"{value}T{header.get('TIME-OBS', header.get('UT', header.get('UTC', '')))}"
        found = parse_time(value) if not isinstance(value, bool) else None
        if found is None or (_plain(value) and found[1] == 0.0):
            continue
        if _middle(cards, key):
            return found, f"{key} (mid-exposure)"
        if math.isfinite(exposure):
            return (found[0], found[1] + exposure / 2 / 86400), f"{key} + half of {exposure:g} s"
        return found, f"{key} (exposure time not stated: taken as the middle)"
    return None


def observation_of(cards: tuple[Card, ...]) -> Observation:
    """What header statements say of place, target and time."""
    by_key = {c.key.upper(): c for c in cards if c.key}
    header = {key: card.value for key, card in by_key.items()}
    sources, found = [], Observation()
    site, place, time = _site(header), _coordinates(header), _time(by_key, header)
    if site:
        found, sources = replace(found, site=site[0]), [f"site from {site[1]}"]
    if place:
        found = replace(found, ra=place[0], dec=place[1])
        sources.append(f"coordinates from {place[2]}")
    if time:
        scale = _SCALES.get(str(header.get("TIMESYS", "UTC")).strip().upper(), "utc")
        found = replace(found, time=time[0], scale=scale)
        sources.append(f"time from {time[1]}")
    pm_ra, pm_dec = _number(header, "ESO TEL TARG PMA"), _number(header, "ESO TEL TARG PMD")
    if abs(pm_ra) < 11 and abs(pm_dec) < 11 and (pm_ra or pm_dec):
        found = replace(found, pm_ra=1e3 * pm_ra, pm_dec=1e3 * pm_dec)
        sources.append("proper motion from ESO TEL TARG PMA and PMD")
    return replace(found, sources=tuple(sources))


def typed_coordinates(text: str) -> tuple[float, float]:
    """'RA,DEC' in degrees, or sexagesimal with the right ascension in hours."""
    parts = [part.strip() for part in text.split(",")]
    if len(parts) == 2:
        ra, dec = _angle(parts[0], True), _angle(parts[1], False)
        if ra is not None and dec is not None and 0 <= ra <= 360 and -90 <= dec <= 90:
            return ra, dec
    raise InputRefused("--coordinates", f"'{text}' is not RA,DEC",
                       "write degrees (26.02,-15.94) or hours and degrees (01:44:04,-15:56:15)")
