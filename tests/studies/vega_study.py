"""Vega at low resolution: every feature with its claim, and shifted copies.

    python tests/studies/vega_study.py

Needs a package that carries alpha_lyr_stis_011.fits (sedpy; Bohlin 2007). The range is
3000-10200 A: STIS to its red end.
"""

from __future__ import annotations

import sys
from dataclasses import replace
from pathlib import Path

ROOT = Path(__file__).resolve().parents[2]
sys.path[:0] = [str(ROOT / "app"), str(ROOT / "tests")]

from linewright.job.options import SolveOptions  # noqa: E402
from linewright.job.solve import solve  # noqa: E402
from linewright.spectra.medium import C_KM_S, vacuum_to_air  # noqa: E402
from linewright.spectra.reading import read_spectrum  # noqa: E402

RANGE = (3000.0, 10200.0)


def vega(shift: float):
    """The session of the spectrum moved by ``shift`` km/s."""
    import sedpy

    star = read_spectrum(next(Path(sedpy.__file__).parent.rglob("alpha_lyr_stis_011.fits")))
    moved = tuple(replace(s, wave=s.wave * (1 + shift / C_KM_S)) for s in star.segments)
    return solve(replace(star, segments=moved), options=SolveOptions(ranges=(RANGE,)))


def show(session) -> None:
    f = session.features
    for i, claim in enumerate(session.claims):
        named = f"{claim.species} {claim.probability:.3f}" if claim.species else ""
        print(f"{float(vacuum_to_air(f.wave[i])):8.1f} A  depth {f.depth[i]:+.3f}  {f.ew[i]:7.0f} mA"
              f"  {claim.standing:9s} {named}")  # fmt: skip


def main() -> None:
    unmoved = vega(0.0)
    show(unmoved)
    v = unmoved.velocity
    print(f"velocity {v.velocity:+.1f} +- {v.error:.1f} km/s, T {unmoved.temperature_k:.0f} K")
    for shift in (250.0, -180.0):
        moved = vega(shift)
        firm = sum(c.standing == "firm" and c.species == "H I" for c in moved.claims)
        print(f"moved by {shift:+.0f}: found {moved.velocity.velocity - v.velocity:+.1f} km/s"
              f" from there, {firm} H I lines firm")  # fmt: skip


if __name__ == "__main__":
    main()
