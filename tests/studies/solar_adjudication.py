"""Every claim on a published solar line that differs from the table, with what speaks for each.

    python tests/studies/solar_adjudication.py

Tables: Moore, Minnaert & Houtgast 1966 (NBS Monograph 61; hand-copied, may hold typing errors) and
Melendez et al. 2014, all lines of any equivalent width inside the Sun's file, telluric windows
included. For each difference: the feature measured, the claim, and the catalogue's lines of the
published species within 0.1 A with their predicted strength relative to the claimed line's.
"""

from __future__ import annotations

import numpy as np
from simulated import rate
from truths import SPECTRA, TELLURIC_WINDOWS, solar_lines, within

from linewright.claims.temperature import electron_pressure
from linewright.job.solve import solve
from linewright.lines.loading import load_catalogue
from linewright.lines.strengths import absorption_strength
from linewright.spectra.medium import C_KM_S, air_to_vacuum, vacuum_to_air
from linewright.spectra.reading import read_spectrum

NEAR, PLACE = 0.06, 0.1


def evidence(session, row: int, wave: float, species, catalogue, strength) -> None:
    claim, f = session.claims[row], session.features
    line = claim.line
    mine = int(np.argmin(np.abs(catalogue.wave - line.wave)))
    print(f"      feature depth {f.depth[row]:.3f}, EW {f.ew[row]:.1f} mA; claimed "
          f"{vacuum_to_air(line.wave):.3f} E_low {line.e_low:.2f} log gf {line.loggf:.2f}, offset "
          f"{line.offset_sigma:+.1f} sigma, P(unlisted) {claim.p_unlisted:.3f}, runner-up "
          f"{claim.runner_up}, blend {[(s, round(x, 2)) for s, _, x in claim.blend]}")
    near = np.nonzero(np.abs(catalogue.wave - air_to_vacuum(wave)) < PLACE)[0]
    for j in near:
        if catalogue.species_of(j) in species:
            print(f"      table's {catalogue.species_of(j)} {vacuum_to_air(catalogue.wave[j]):.3f} "
                  f"E_low {catalogue.e_low[j]:.2f} log gf {catalogue.loggf[j]:.2f}: predicted "
                  f"{strength[j] - strength[mine]:+.2f} dex against the claimed line")


def main() -> None:
    session, catalogue = solve(read_spectrum(SPECTRA / "sun_r47000.txt", medium="air")), load_catalogue()
    t = session.temperature_k
    strength = absorption_strength(catalogue, t, electron_pressure(t))
    air = vacuum_to_air(session.features.wave / (1 + session.velocity.velocity / C_KM_S))
    n = dict.fromkeys(("lines", "found", "right", "sure", "wrong"), 0)
    for wave, ew, species in solar_lines(minimum_ew=0.0):
        n["lines"] += 1
        distance = np.where(session.features.sign > 0, np.abs(air - wave), np.inf)
        row = int(np.argmin(distance))
        if distance[row] > NEAR:
            print(f"   not found: {wave} {sorted(species)} {ew:g} mA, nearest feature {air[row]:.3f}")
            continue
        claim = session.claims[row]
        sure = claim.probability >= 0.95
        right = claim.species in {s.strip("[]") for s in species} | set(species)
        n["found"], n["right"], n["sure"] = n["found"] + 1, n["right"] + right, n["sure"] + sure
        n["wrong"] += sure and not right
        if not right:
            where = " (telluric window)" if within([wave], TELLURIC_WINDOWS)[0] else ""
            print(f"   {'CONFIDENT, ' if sure else ''}differs: {wave} {sorted(species)} {ew:g} mA, "
                  f"called {claim.species} {claim.origin} P {claim.probability:.3f}{where}")
            if claim.line is not None:
                evidence(session, row, wave, species, catalogue, strength)
    print(f"lines {n['lines']}, found {n['found']}, named right {rate(n['right'], n['found'])}, "
          f"confident {n['sure']}, confident and different {rate(n['wrong'], n['sure'])}")


if __name__ == "__main__":
    main()
