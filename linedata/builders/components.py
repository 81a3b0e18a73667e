"""Components of lines entered as one: hyperfine and isotopic patterns, fine structure of H I."""

from __future__ import annotations

import numpy as np

FAINTEST = 0.01  # share of the whole line


def of_groups(ion: dict[str, np.ndarray], group: np.ndarray, wave: np.ndarray) -> dict:
    """Components of the lines that several rows were collapsed into.

    ion: wave, loggf of the rows; group: label per row; wave: final vacuum wavelength of each
    line in the order of the sorted labels. Returns parent (Angstrom), offset (Angstrom), share.
    """
    labels, index = np.unique(group, return_inverse=True)
    gf = 10.0 ** ion["loggf"]
    total = np.bincount(index, gf)
    mean = np.bincount(index, gf * ion["wave"]) / total
    several = np.bincount(index)[index] > 1
    share = gf / total[index]
    keep = several & (share > FAINTEST)
    return {
        "parent": wave[index][keep], "offset": (ion["wave"] - mean[index])[keep],
        "share": share[keep],
    }


def of_patterns(patterns) -> dict[str, np.ndarray]:
    """Components of lines given as (parent wave, component waves, component strengths)."""
    parent, offset, share = [], [], []
    for wave, waves, strengths in patterns:
        part = strengths / strengths.sum()
        keep = part > FAINTEST
        parent += [wave] * int(keep.sum())
        offset += list((waves - wave)[keep])
        share += list(part[keep])
    return {"parent": np.array(parent), "offset": np.array(offset), "share": np.array(share)}


def pack(parts: list[tuple[str, dict[str, np.ndarray]]]) -> dict[str, np.ndarray]:
    """Stored columns of a table of components; parts: (species, components)."""
    parts = [(name, part) for name, part in parts if len(part["parent"])]
    names = [name for name, _ in parts]
    joined = {
        key: np.concatenate([part[key] for _, part in parts]) for key in ("parent", "offset", "share")
    }
    species = np.repeat(np.arange(len(parts)), [len(part["parent"]) for _, part in parts])
    order = np.lexsort((joined["offset"], species, joined["parent"]))
    return {
        "parent": joined["parent"][order].astype("<f8"),
        "offset": joined["offset"][order].astype("<f4"),
        "share": joined["share"][order].astype("<f2"),
        "species": species[order].astype("<i2"),
        "species_names": np.array(names, dtype="<U16"),
    }
