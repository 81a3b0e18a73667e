"""Continuum anchors that a person moves, and the features measured again under them."""

from __future__ import annotations

from dataclasses import dataclass, replace

import numpy as np

from ..errors import InputRefused
from .again import remeasured
from .continuum import smooth_run


@dataclass(frozen=True, eq=False)
class Anchors:
    """Points of a continuum, joined by a monotone cubic: wave (vacuum Angstrom, ascending)
    and value (flux units), each (k,)."""

    wave: np.ndarray
    value: np.ndarray

    def at(self, wave):
        """Continuum at vacuum wavelengths."""
        if len(self.wave) == 1:
            return np.full(np.shape(wave), self.value[0])
        return smooth_run(np.asarray(wave, dtype=float), self.wave, self.value)


def anchors_of(wave, value, most: int = 40) -> Anchors:
    """At most ``most`` anchors that stand for a continuum given at many nodes, each (n,)."""
    keep = np.unique(np.linspace(0, len(wave) - 1, min(most, len(wave))).round().astype(int))
    return Anchors(np.asarray(wave, dtype=float)[keep], np.asarray(value, dtype=float)[keep])


def add_anchor(anchors: Anchors, wave: float, value: float) -> Anchors:
    """One more anchor. Raises InputRefused on a value not above zero or a place taken."""
    _checked(wave, value)
    if np.any(np.abs(anchors.wave - wave) < 1e-6):
        raise InputRefused(f"anchor at {wave:.3f} A", "another stands there", "move that one")
    order = np.argsort(np.r_[anchors.wave, wave])
    return Anchors(np.r_[anchors.wave, wave][order], np.r_[anchors.value, value][order])


def move_anchor(anchors: Anchors, index: int, wave: float, value: float) -> Anchors:
    """The anchor ``index`` at another place."""
    _known(anchors, index)
    return add_anchor(_without(anchors, index), wave, value)


def remove_anchor(anchors: Anchors, index: int) -> Anchors:
    """All but the anchor ``index``; the last two stay."""
    _known(anchors, index)
    if len(anchors.wave) <= 2:
        raise InputRefused("continuum", "two anchors are the least", "move them instead")
    return _without(anchors, index)


def refit(spectrum, measurement, anchors):
    """The Measurement with the continua of ``anchors`` (one Anchors or None a segment).

    Features keep their numbers; they are fitted again where a continuum changed.
    """
    segments = tuple(
        s if s is None or a is None else _under(s, a)
        for s, a in zip(measurement.segments, anchors, strict=True)
    )
    moved = replace(measurement, segments=segments)
    changed = [i for i, a in enumerate(anchors) if a is not None and segments[i] is not None]
    return replace(moved, features=remeasured(spectrum, moved, measurement.features, changed))


def _under(nodes, anchors: Anchors):
    wave = np.unique(np.r_[nodes.node_wave, anchors.wave])
    inside = (wave >= nodes.node_wave[0]) & (wave <= nodes.node_wave[-1])
    wave = wave[inside]
    value = anchors.at(wave)
    if not np.all(value > 0):
        raise InputRefused("continuum", "falls to zero or below", "raise its anchors")
    noise = nodes.noise * nodes.continuum_at(nodes.noise_wave) / anchors.at(nodes.noise_wave)
    return replace(nodes, node_wave=wave, node_flux=value,
                   node_err=nodes.continuum_err_at(wave), noise=noise)


def _without(anchors: Anchors, index: int) -> Anchors:
    return Anchors(np.delete(anchors.wave, index), np.delete(anchors.value, index))


def _known(anchors: Anchors, index: int) -> None:
    if not 0 <= index < len(anchors.wave):
        raise InputRefused("continuum", f"has no anchor {index}", "choose one that is there")


def _checked(wave: float, value: float) -> None:
    if not (np.isfinite(wave) and np.isfinite(value) and wave > 0 and value > 0):
        raise InputRefused("anchor", "needs a wavelength and a flux above zero", "place it again")
