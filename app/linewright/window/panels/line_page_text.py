"""The page of a catalogue line as rich text."""

from __future__ import annotations

from html import escape

from ...lines.page import LinePage
from ...spectra.medium import to_medium
from . import words

SHOWN = 12  # siblings of a kind
WIDTHS = ("", "", " width='46%'")
_TITLES = {"wavelength in air": "air", "wavelength in vacuum": "vacuum",
           "second source, vacuum": "second source", "log emissivity (H beta = 2)":
           "log emissivity (Hβ = 2)", "optical depth, air mass 1": "optical depth, zenith",
           "log radiative damping": "log γ radiative", "log van der Waals damping": "log γ v.d.Waals",
           "spread of components": "spread", "error of log gf": "± log gf"}
_UNITS = {"Angstrom": "Å", "rad/s cm3": "rad/s cm³"}
_SKIPPED = ("species", "flags", "grade", "lower level", "upper level")


def page_html(page: LinePage, medium: str, colours: tuple[str, str], narrow: bool = False) -> str:
    """colours: (link, quiet) of the theme; links are 'line:ROW'; narrow: the siblings stand
    below the data, not beside them."""
    link, quiet = colours
    pairs = _pairs(page)
    half = (len(pairs) + 1) // 2
    cells = (_table(pairs[:half], quiet), _table(pairs[half:], quiet),
             _related(page, medium, link, quiet))
    beside, below = (cells[:2], cells[2]) if narrow else (cells, "")
    data = "".join(f"<td{wide} style='padding-right:12px'>{cell}</td>"
                   for cell, wide in zip(beside, WIDTHS))
    return (f"<table width='100%'><tr>{data}</tr></table>{_levels(page, quiet)}{_remarks(page)}"
            f"{below}{_sources(page, quiet)}")


def _pairs(page: LinePage) -> list[tuple[str, str]]:
    known = []
    for label, value, unit in page.entries:
        if label not in _SKIPPED:
            text = f"{value} {_UNITS.get(unit, unit)}".strip().replace("-", "−") if (
                unit or _is_number(value)) else value
            known.append((_TITLES.get(label, label), text))
    return known


def _is_number(text: str) -> bool:
    return text.lstrip("-").replace(".", "", 1).isdigit()


def _table(pairs, quiet: str) -> str:
    rows = "".join(
        f"<tr><td style='color:{quiet}; padding-right:8px; white-space:nowrap'>{escape(label)}</td>"
        f"<td style='white-space:nowrap'>{escape(text)}</td></tr>" for label, text in pairs)
    return f"<table cellspacing='0'>{rows}</table>"


def _related(page: LinePage, medium: str, link: str, quiet: str) -> str:
    parts = []
    for title, lines in (("multiplet", page.multiplet), ("strongest of the species",
                                                         page.strongest)):
        shown = "  ".join(_link(s, medium, link) for s in lines[:SHOWN])
        more = f" and {len(lines) - SHOWN} more" if len(lines) > SHOWN else ""
        parts.append(f"<div style='color:{quiet}'>{title}</div>"
                     f"<div>{shown or 'none known'}{more}</div>")
    return "".join(parts)


def _link(sibling, medium: str, colour: str) -> str:
    wave = float(to_medium(sibling.wave, medium))
    return (f"<a href='line:{sibling.row}' style='color:{colour}; text-decoration:none'>"
            f"{wave:.3f}</a>&nbsp;({words.number(sibling.strength, 1, True) or '?'})")


def _levels(page: LinePage, quiet: str) -> str:
    known = _values(page)
    ends = [known.get(f"{which} level", "") for which in ("lower", "upper")]
    if not any(ends):
        return ""
    return (f"<div><span style='color:{quiet}'>levels</span> "
            f"{' → '.join(escape(end or '?') for end in ends)}</div>")


def _values(page: LinePage) -> dict[str, str]:
    return {label: value for label, value, _unit in page.entries}


def _remarks(page: LinePage) -> str:
    """Grade and flags in words."""
    known = _values(page)
    said = [words.grade(known.get("grade", ""))]
    said += [f"{name}: {words.LINE_FLAGS.get(name, name)}"
             for name in known.get("flags", "").split(", ") if name]
    return "".join(f"<div>{escape(text)}</div>" for text in said if text)


def _sources(page: LinePage, quiet: str) -> str:
    return "".join(f"<div style='color:{quiet}'>source {escape(key)}: {escape(text)}</div>"
                   for key, text in page.sources)
