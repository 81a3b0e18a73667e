"""Continuum anchors moved, added and removed, and the features under them measured again.

Between anchors the continuum changes by the ratio of two monotone cubics, through the anchors
after and before the act: where no anchor changed it stays exactly what it was. Wavelengths
are vacuum Angstrom.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from ..errors import InputRefused
from ..measure.again import remeasured
from ..measure.anchors import Anchors, add_anchor, anchors_of, remove_anchor
from ..measure.options import Measurement
from ..session.model import ContinuumNodes, Session
from ..session.plain import row_to_plain
from ..session.script import apply_edit
from ..spectra.spectrum import Spectrum
from .hand_fit import Wanted, fitted
from .hand_trace import hand_stretch, ready_trace

ANCHOR_EDITS = ("add_anchor", "move_anchor", "remove_anchor", "clear_anchors")
FEWEST, MOST, NODES_EACH = 25, 400, 16
NEAR = 0.5  # Angstrom within which a script's wavelength means an anchor


def anchors_in(session: Session, segment: int) -> Anchors:
    """A person's anchors of a segment, or points on the machine's continuum to begin with.

    Raises InputRefused where the session has no continuum there.
    """
    if not 0 <= segment < len(session.continuum) or len(session.continuum[segment].wave) < 2:
        raise InputRefused("anchors", f"segment {segment} has no continuum yet", "solve it first")
    if segment < len(session.anchors) and len(session.anchors[segment].wave):
        laid = session.anchors[segment]
        return Anchors(laid.wave, laid.value)
    nodes = session.continuum[segment]
    most = int(np.clip(len(nodes.wave) // NODES_EACH + 1, FEWEST, MOST))
    return anchors_of(nodes.wave, nodes.value, most)


def moved(anchors: Anchors, index: int, wave: float, value: float) -> Anchors:
    """The anchor ``index`` elsewhere; never past its neighbours, which it would cross."""
    if not 0 <= index < len(anchors.wave):
        raise InputRefused("anchors", f"there is no anchor {index}", "choose one that is there")
    low = anchors.wave[index - 1] if index else -np.inf
    high = anchors.wave[index + 1] if index + 1 < len(anchors.wave) else np.inf
    if not low < wave < high:
        raise InputRefused(f"anchor at {wave:.3f} A", "would cross its neighbour",
                           "remove the neighbour first")
    w, v = anchors.wave.copy(), anchors.value.copy()
    w[index], v[index] = wave, value
    return Anchors(w, v)


def level_after(nodes: ContinuumNodes, old: Anchors, new: Anchors) -> ContinuumNodes:
    """The continuum once the anchors changed; raises InputRefused where it is not positive
    or an anchor lies outside it."""
    _check(nodes, new)
    fresh = ~np.isin(new.wave, old.wave)
    before = Anchors(*_sorted(np.r_[old.wave, new.wave[fresh]],
                              np.r_[old.value, np.interp(new.wave[fresh], nodes.wave, nodes.value)]))
    wave = np.union1d(nodes.wave, new.wave)
    ratio = _at(new, wave) / _at(before, wave)
    value = np.interp(wave, nodes.wave, nodes.value) * ratio
    if not np.all(value > 0):
        raise InputRefused("continuum", "falls to zero or below", "raise its anchors")
    return ContinuumNodes(wave, value)


def anchored(spectrum: Spectrum, session: Session, segment: int, new: Anchors | None) -> dict:
    """The edit 'set_anchors' as data, features measured again where the continuum changed.

    new: the anchors after the act; None for the machine's continuum. Raises InputRefused for
    anchors outside the spectrum or not above zero.
    """
    return anchored_of(*anchor_errand(spectrum, session, segment, new))


def anchor_errand(spectrum: Spectrum, session: Session, segment: int, new: Anchors | None) -> tuple:
    """What ``anchored_of`` needs, small enough to be sent to another process."""
    old, nodes = anchors_in(session, segment), session.continuum[segment]
    level = _machines(spectrum, session, segment) if new is None else level_after(nodes, old, new)
    change = np.interp(level.wave, nodes.wave, nodes.value) / level.value
    moved_at = level.wave[np.abs(change - 1.0) > 1e-9]
    stretch = None
    if len(moved_at):
        reach = (float(moved_at[0]), float(moved_at[-1]))
        *first, _same, last = hand_stretch(spectrum, session, segment, *reach)
        stretch = reach, (*first, (level, nodes), last)
    lean = replace(session, claims=(), history=(), roll_call=(), orphans=(), continuum=(),
                   anchors=(), features=session.features if stretch is None else stretch[1][2])
    return lean, segment, new, level, stretch


def anchored_of(lean: Session, segment: int, new: Anchors | None, level, stretch) -> dict:
    """As ``anchored``, of what ``anchor_errand`` gives."""
    rows, fits = ([], []) if stretch is None else _measured(lean, *stretch)
    points = [] if new is None else list(zip(new.wave.tolist(), new.value.tolist()))
    return {"edit": "set_anchors", "segment": segment, "anchors": [list(p) for p in points],
            "level": {"wave": level.wave.tolist(), "value": level.value.tolist(),
                      "rows": rows, "fits": fits}}


def _measured(lean: Session, reach, stretch) -> tuple[list[dict], list[dict]]:
    """(rows, fits by hand) of what lies in ``reach``, measured under the new continuum."""
    about = ready_trace(*stretch)
    f, cut = about.features, stretch[0]
    byhand = {n for fit in about.fits for n in fit.features}
    alone = replace(f, segment=np.zeros(len(f), dtype=f.segment.dtype))
    whole = Measurement(alone, (about.nodes,), 0.0, 0.0, 0.0, ())
    found = remeasured(_Cut((cut,)), whole, alone, [0], about.trace.veil)
    inside = (f.wave >= reach[0]) & (f.wave <= reach[1]) & np.isfinite(f.depth)
    rows = [{**row_to_plain(found.take([k])), "segment": about.segment}
            for k in np.flatnonzero(inside) if int(f.number[k]) not in byhand]
    fits = []
    for fit in about.fits:
        if fit.limits[1] > reach[0] and fit.limits[0] < reach[1]:
            wanted = Wanted(fit.features, fit.limits, fit.profile)
            fits.append(fitted(lean, about, wanted).fit)
    return [*rows, *(row for fit in fits for row in fit["rows"])], fits


def keep_anchors(spectrum: Spectrum, old: Session, new: Session) -> Session:
    """``new`` (just solved) under the continuum anchors a person laid in ``old``."""
    for segment, laid in enumerate(old.anchors):
        if len(laid.wave) and segment < len(new.continuum) and len(new.continuum[segment].wave):
            new = apply_edit(new, anchored(spectrum, new, segment, Anchors(laid.wave, laid.value)))
    return new


class _Cut:
    """As much of a Spectrum as ``remeasured`` looks at."""

    def __init__(self, segments):
        self.segments = segments


def _machines(spectrum: Spectrum, session: Session, segment: int) -> ContinuumNodes:
    from ..measure.options import MeasureOptions
    from ..measure.prepare import prepare

    options = MeasureOptions(resolution=session.options.get("resolution"))
    found = prepare(spectrum.segments[segment], options, [])
    return ContinuumNodes(found.nodes.node_wave, found.nodes.node_flux)


def anchor_command(spectrum: Spectrum, session: Session, command: dict) -> dict:
    """A script's anchor edit as the 'set_anchors' it comes to."""
    name = command["edit"]
    segment = int(command.get("segment", 0))
    if name == "clear_anchors":
        return anchored(spectrum, session, segment, None)
    try:
        wave = float(command["wave"])
        value = float(command["value"]) if name != "remove_anchor" else np.nan
    except (KeyError, TypeError, ValueError):
        raise InputRefused(f"edit '{name}'", "'wave' or 'value' is missing or no number",
                           "give vacuum Angstrom and flux") from None
    anchors = anchors_in(session, segment)
    if name == "add_anchor":
        return anchored(spectrum, session, segment, add_anchor(anchors, wave, value))
    index = int(np.argmin(np.abs(anchors.wave - wave)))
    if abs(anchors.wave[index] - wave) > NEAR:
        raise InputRefused(f"anchor at {wave:.3f} A", "there is none within half an Angstrom",
                           f"the nearest stands at {anchors.wave[index]:.3f} A")
    if name == "remove_anchor":
        return anchored(spectrum, session, segment, remove_anchor(anchors, index))
    to = float(command.get("to", wave))
    return anchored(spectrum, session, segment, moved(anchors, index, to, value))


def _check(nodes: ContinuumNodes, new: Anchors) -> None:
    low, high = float(nodes.wave[0]), float(nodes.wave[-1])
    outside = new.wave[(new.wave < low) | (new.wave > high)]
    if len(outside):
        raise InputRefused(f"anchor at {outside[0]:.3f} A", "lies outside the spectrum's samples",
                           f"place it between {low:.3f} and {high:.3f} A")
    if not (np.all(np.isfinite(new.value)) and np.all(new.value > 0)):
        raise InputRefused("anchor", "needs a flux above zero", "place it again")


def _at(anchors: Anchors, wave):
    return anchors.at(np.clip(wave, anchors.wave[0], anchors.wave[-1]))


def _sorted(wave, value):
    order = np.argsort(wave)
    return wave[order], value[order]
