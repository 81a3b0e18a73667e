"""Medium, frame and corrections out of what a file states, each with its reason in words."""

from __future__ import annotations

import re
from dataclasses import dataclass

from .kinds import kind_of
from .raw import Card, Raw

_SPECSYS = {
    "TOPOCENT": "topocentric", "GEOCENTR": "geocentric", "BARYCENT": "barycentric",
    "HELIOCEN": "heliocentric", "SOURCE": "rest",
}
_MEDIUM_KEYS = re.compile(
    r"^(?:MEDIUM|WAVEMED\w*|AIRORVAC|AIR_?VAC|VAC_?AIR|AIR_OR_VAC|WAVETYPE|WAVE_?MEDIUM|LAMTYPE"
    r"|LAMBDA_?TYPE|WAVE_?CALIB_?MEDIUM|REFMED)$", re.IGNORECASE)
_BOOL_KEYS = {"VACUUM": "vacuum", "INVACUUM": "vacuum", "VACWAVE": "vacuum", "AIRWAVE": "air",
              "INAIR": "air"}
_FRAME_KEYS = re.compile(r"^(?:FRAME|VELFRAME|WAVEFRAM|REFFRAME|VEL_?REF|VELO_?FRAME|SPECFRAME)$",
                         re.IGNORECASE)
_MEDIUM_TEXT = re.compile(
    r"\b(?P<a>vacuum|air)[ -]wavelengths?\b"
    r"|\bwavelengths?\b[^.;]{0,40}?\b(?P<b>vacuum|vacuo|air)\b(?! ?mass)"
    r"|\b(?:in|standard) (?P<c>vacuum|vacuo|air)\b(?! ?mass)", re.IGNORECASE)
_FRAME_TEXT = re.compile(
    r"\b(?P<f>barycent\w+|heliocent\w+|topocent\w+|geocent\w+|rest)[ -](?:rest[ -])?frame\b"
    r"|\bcorrected to (?:the )?(?P<g>barycent\w+|heliocent\w+)", re.IGNORECASE)
_OFFERED_KEYS = re.compile(
    r"^(?:BERV|BARYCORR|HELIOCORR|VHELIO|BARYVEL|HELIOVEL|BVC|BC|VHELCORR"
    r"|.*\b(?:BERV|BARYCOR|HELICOR))$")


@dataclass(frozen=True)
class Known:
    """What is known about a spectrum's wavelengths.

    observer_velocity: km/s of a correction already applied, NaN when none or not stated
    """

    medium: str
    medium_from: str
    frame: str
    frame_from: str
    corrections: tuple[str, ...]
    warnings: tuple[str, ...]
    observer_velocity: float = float("nan")


def _as_medium(value) -> str:
    text = str(value).lower()
    vacuum, air = "vac" in text, bool(re.search(r"\bair\b|^air|awav", text))
    return "" if vacuum == air else ("vacuum" if vacuum else "air")


def _medium_of_keyword(card: Card) -> tuple[str, str] | None:
    key = card.key.upper()
    if key in _BOOL_KEYS and isinstance(card.value, (bool, int)):
        stated = _BOOL_KEYS[key]
        if not card.value:
            stated = "air" if stated == "vacuum" else "vacuum"
        return stated, f"keyword {key}"
    if _MEDIUM_KEYS.match(key):
        medium = _as_medium(card.value)
        return (medium, f"keyword {key} = {card.value}") if medium else None
    return None


def _medium_of_text(card: Card) -> tuple[str, str] | None:
    free = card.key.upper() in ("", "COMMENT", "HISTORY")
    text = str(card.value) if free else card.comment
    if re.match(r"^(?:CTYPE|CUNIT|TTYPE|TUNIT|CRVAL|NAME)", card.key.upper()):
        text = f"{card.comment} {card.value}"
        compact = str(card.value).lower().replace(" ", "_")
        named = re.search(r"(?:wave|wavelength|lambda|lam)_?(air|vac)", compact)
        if named:
            medium = "air" if named.group(1) == "air" else "vacuum"
            return medium, f"column name {card.value}"
    match = _MEDIUM_TEXT.search(text)
    if not match:
        return None
    word = next(g for g in match.group("a", "b", "c") if g).lower()
    return ("air" if word == "air" else "vacuum"), f"comment '{' '.join(text.split())[:70]}'"


def _agreed(found: list[tuple[str, str]], notes: list[str], subject: str):
    """The one statement made, or None; a contradiction is noted and decides nothing."""
    values = {value for value, _ in found}
    if len(values) > 1:
        notes.append(f"the file contradicts itself about the {subject}: "
                     + "; ".join(dict.fromkeys(f"{v} by {w}" for v, w in found)))
        return None
    return found[0] if found else None


def find_medium(raw: Raw, notes: list[str]) -> tuple[str, str]:
    """(medium, reason): axis type or UCD, then keywords, then comments, then kind of file."""
    if raw.axis_medium and raw.axis_medium[0]:
        return raw.axis_medium
    for reader in (_medium_of_keyword, _medium_of_text):
        found = [m for m in map(reader, raw.cards) if m]
        if found:
            return _agreed(found, notes, "medium") or ("unknown", "contradictory statements")
    kind = kind_of(raw.cards)
    if kind and kind.medium:
        return kind.medium, f"kind of file: {kind.words}"
    return "unknown", "not stated"


def _frame_of_keyword(card: Card) -> tuple[str, str] | None:
    key = card.key.upper()
    if key == "SPECSYS":
        frame = _SPECSYS.get(str(card.value).strip().upper()[:8], "")
        return (frame, f"keyword SPECSYS = {card.value}") if frame else None
    if key in ("HELIO", "BARY", "BARYCENT", "HELIOCEN") and isinstance(card.value, bool):
        name = "heliocentric" if key.startswith("HELIO") else "barycentric"
        return (name, f"keyword {key} = T") if card.value else None
    if key == "HELIO_RV" and re.search(r"added|applied|corrected", card.comment, re.IGNORECASE):
        return "heliocentric", f"keyword HELIO_RV ({card.comment.strip()})"
    if _FRAME_KEYS.match(key):
        for name in ("topocentric", "geocentric", "heliocentric", "barycentric"):
            if str(card.value).lower().startswith(name[:6]):
                return name, f"keyword {key} = {card.value}"
    return None


def _frame_of_text(card: Card) -> tuple[str, str] | None:
    if card.key.upper() not in ("", "COMMENT", "HISTORY"):
        return None
    match = _FRAME_TEXT.search(str(card.value))
    if not match:
        return None
    word = (match.group("f") or match.group("g")).lower()
    for name in ("topocentric", "geocentric", "heliocentric", "barycentric", "rest"):
        if word.startswith(name[:6]):
            return name, f"comment '{' '.join(str(card.value).split())[:70]}'"
    return None


def find_frame(raw: Raw, notes: list[str]) -> tuple[str, str]:
    """(frame, reason) by keywords, then comments, then kind of file."""
    for reader in (_frame_of_keyword, _frame_of_text):
        found = [m for m in map(reader, raw.cards) if m]
        if found:
            return _agreed(found, notes, "frame") or ("unknown", "contradictory statements")
    other = next((c for c in raw.cards if c.key.upper() == "SPECSYS"), None)
    if other is not None and str(other.value).strip():
        notes.append(f"velocity frame {other.value} (SPECSYS) is none of ours: frame unknown")
    kind = kind_of(raw.cards)
    if kind and kind.frame:
        return kind.frame, f"kind of file: {kind.words}"
    return "unknown", "not stated"


def stated_corrections(cards: tuple[Card, ...]) -> list[tuple[float, str, bool]]:
    """(km/s, keyword, whether the kind of file says it is the applied one) in header order."""
    kind, found = kind_of(cards), []
    for card in cards:
        key = card.key.upper()
        if isinstance(card.value, bool) or not isinstance(card.value, (int, float)):
            continue
        wanted = key in ("HELIO_RV", "VCORR") or (kind is not None and key in kind.correction_keys)
        if (wanted or _OFFERED_KEYS.match(key)) and abs(card.value) < 100:
            found.append((float(card.value), key, bool(wanted)))
    return found


def find_corrections(raw: Raw, frame: str, notes: list[str]) -> tuple[tuple[str, ...], float]:
    """(velocity corrections already in the wavelengths, km/s of the first or NaN).

    Offered ones become notes.
    """
    moved = frame in ("heliocentric", "barycentric")
    stated = stated_corrections(raw.cards)
    applied = [(v, key) for v, key, wanted in stated if wanted and moved]
    if applied:
        velocity, key = applied[0]
        text = f"{frame} correction {velocity:+.2f} km/s ({key}) already applied"
        return (text, *_own_history(raw.cards, frame)), velocity
    if stated:
        state = "not applied" if frame == "topocentric" else "whether applied is not said"
        notes.append(f"the header gives a correction of {stated[0][0]:+.2f} km/s "
                     f"({stated[0][1]}): {state}")
    return _own_history(raw.cards, ""), float("nan")


def _own_history(cards: tuple[Card, ...], known: str) -> tuple[str, ...]:
    """What our own writing said it did, but for the correction already told of."""
    lines = (str(c.value) for c in cards if c.key.upper() in ("HISTORY", "CORRECTIONS"))
    found = (re.match(r"(.* (?:applied|removed) here|brought to rest from .*)", x) for x in lines)
    words = (f.group(1).replace(" here", "") for f in found if f)
    return tuple(w for w in dict.fromkeys(words) if not known or not w.startswith(known))


def known_of(raw: Raw) -> Known:
    """Everything ``raw`` states about medium, frame and corrections."""
    notes: list[str] = []
    medium, medium_from = find_medium(raw, notes)
    frame, frame_from = find_frame(raw, notes)
    corrections, velocity = find_corrections(raw, frame, notes)
    return Known(medium, medium_from, frame, frame_from, corrections, tuple(notes), velocity)
