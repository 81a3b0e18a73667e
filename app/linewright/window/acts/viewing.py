"""Acts on what is looked at: view, rake, velocity. None of them is undone."""

from __future__ import annotations

import numpy as np

from ...session import edits
from ...spectra.medium import C_KM_S, to_medium
from ..notices import Notice
from .claiming import known_name


def look_at(bench, wave: float, width: float | None = None) -> None:
    """Centres the view on an own-medium wavelength, keeping its width when it is narrow."""
    if bench.drawn is None:
        return
    low, high = bench.view.now.span or bench.drawn.own_range()
    whole = bench.drawn.own_range()
    if width is None:
        narrow = (whole[1] - whole[0]) / 20.0
        width = high - low if high - low <= narrow else min(narrow, wave * 0.006)
    bench.view.change(span=(wave - width / 2, wave + width / 2))


HERE = 2.5  # widths about the selected feature
NEAR = 2e-5  # of the wavelength: a claimed feature this near a line's place is the line's


def about_selected(bench) -> tuple[float, float] | None:
    """A few widths about the selected feature, at least a few of its errors; own medium."""
    row = bench.selected_row()
    if row is None:
        return None
    f = bench.session.features
    half = max(HERE * np.nan_to_num(f.fwhm[row]), HERE * np.nan_to_num(f.wave_err[row]), 0.1)
    ends = np.array([f.wave[row] - half, f.wave[row] + half])
    return tuple(float(w) for w in to_medium(ends, bench.session.spectrum.medium))


def look_at_line(bench, row: int) -> None:
    """A catalogue line at the velocity of the rake; its feature is selected when claimed.

    A selected feature that stands there already stays selected: it may be claimed with it.
    """
    bench.view.change(line=row)
    if bench.drawn is None:
        return
    expected = float(bench.catalogue.wave[row]) * (1.0 + bench.view.now.velocity / C_KM_S)
    own = float(to_medium(expected, bench.medium))
    low, high = bench.drawn.own_range()
    if not low <= own <= high:
        bench.notify(Notice(f"{own:.3f} Å lies outside this spectrum", "note", seconds=5,
                            topic="outside"))
        return
    look_at(bench, own)
    about = about_selected(bench)
    if about is not None and about[0] <= own <= about[1]:
        return
    name = bench.catalogue.species_of(row)
    claims, f = bench.session.claims, bench.session.features
    near = [i for i in np.nonzero(np.abs(f.wave - expected) < expected * NEAR)[0]
            if claims[i].species == name]
    if near:
        bench.view.select(int(f.number[near[0]]))


def look_at_selected(bench) -> None:
    row = bench.selected_row()
    if row is not None:
        wave = bench.session.features.wave[row]
        look_at(bench, float(to_medium(wave, bench.session.spectrum.medium)))


def go_to(bench, text: str) -> None:
    """'5183.6' centres the view there, '5160:5200' shows that range."""
    try:
        parts = [float(p) for p in text.replace("–", ":").replace(",", ".").split(":")]
    except ValueError:
        parts = []
    if len(parts) == 1:
        look_at(bench, parts[0])
    elif len(parts) == 2 and parts[0] != parts[1]:
        bench.view.change(span=(min(parts), max(parts)))
    else:
        bench.notify(Notice(f"'{text}' is no wavelength; type 5183.6 or a range 5160:5200",
                            "refused", seconds=8, topic="go to"))


def show_on_rake(bench, species: str) -> None:
    """Adds a species to the rake on top of what it shows; a shown one leaves again."""
    shown = bench.view.now.rake
    if shown is None:
        shown = bench.window.rake.species if bench.window else ()
        bench.view.change(rake=(species, *[s for s in shown if s != species])[:7])
    elif species in shown:
        bench.view.change(rake=tuple(s for s in shown if s != species) or None)
    else:
        bench.view.change(rake=(species, *shown)[:7])


def name_rake(bench, text: str) -> None:
    """The species in a comma-separated text; empty returns to the automatic choice."""
    from ...errors import LinewrightError

    try:
        names = [known_name(bench, part) for part in text.split(",") if part.strip()]
    except LinewrightError as refusal:
        bench.refuse(refusal)
        return
    bench.view.change(rake=tuple(dict.fromkeys(names)) or None)


def slide(bench, km_s: float, final: bool) -> None:
    """The rake follows at once; letting go makes it the session's velocity (undoable)."""
    bench.view.change(velocity=float(km_s))
    if final and bench.session is not None and km_s != bench.session.velocity.velocity:
        bench.act(edits.set_velocity, float(km_s))


def step_velocity(bench, steps: float) -> None:
    slide(bench, round(bench.view.now.velocity + steps, 6), True)
