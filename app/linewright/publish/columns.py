"""Names, units and descriptions of the published columns, in their order."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True)
class Column:
    """One published column: ``kind`` is 'int', 'float' or 'text'; ``print_format`` for rounded formats."""

    name: str
    kind: str
    description: str
    unit: str = ""
    print_format: str = ""


def _c(name, kind, description, unit="", print_format="") -> Column:
    return Column(name, kind, description, unit, print_format)


A, MA, KMS = "Angstrom", "mAngstrom", "km/s"

LEDGER = (
    _c("feature", "int", "permanent number of the feature"),
    _c("segment", "int", "index of the spectrum's segment, from 0"),
    _c("component", "int", "0 for a lone feature, 1.. inside a fitted blend"),
    _c("kind", "text", "absorption or emission"),
    _c(
        "wave",
        "float",
        "measured wavelength in the spectrum's medium and frame",
        A,
        ".4f",
    ),
    _c("wave_err", "float", "one-sigma error of wave", A, ".4f"),
    _c("significance", "float", "matched-filter signal-to-noise", "", ".1f"),
    _c(
        "depth",
        "float",
        "(continuum - flux)/continuum, negative in emission",
        "",
        ".4f",
    ),
    _c("depth_err", "float", "one-sigma error of depth", "", ".4f"),
    _c("fwhm", "float", "full width at half depth", A, ".4f"),
    _c("fwhm_err", "float", "one-sigma error of fwhm", A, ".4f"),
    _c("ew", "float", "equivalent width, negative in emission", MA, ".2f"),
    _c("ew_err", "float", "one-sigma error of ew", MA, ".2f"),
    _c("species", "text", "species of the claim"),
    _c(
        "wave_lab",
        "float",
        "laboratory wavelength of the claimed line, same medium as wave",
        A,
        ".4f",
    ),
    _c("wave_lab_err", "float", "one-sigma error of wave_lab", A, ".4f"),
    _c("e_low", "float", "energy of the lower level", "eV", ".4f"),
    _c(
        "loggf",
        "float",
        "log10 of statistical weight times oscillator strength",
        "",
        ".3f",
    ),
    _c(
        "velocity",
        "float",
        "c (lambda_vac/lambda_vac,lab - 1), receding positive",
        KMS,
        ".3f",
    ),
    _c(
        "velocity_err",
        "float",
        "one-sigma error of velocity, both wavelength errors",
        KMS,
        ".3f",
    ),
    _c(
        "probability",
        "float",
        "that the species is the main contributor, by the machine",
        "",
        ".4f",
    ),
    _c(
        "p_line",
        "float",
        "that the line is the main contributor, by the machine",
        "",
        ".4f",
    ),
    _c("p_unlisted", "float", "that no catalogue line is, by the machine", "", ".4f"),
    _c("standing", "text", "firm, likely, tentative, unclaimed or set aside"),
    _c("by", "text", "who set the standing: machine or person"),
    _c("origin", "text", "where the line arises"),
    _c("blend", "text", "other contributors: species wavelength share; ..."),
    _c("runner_up", "text", "the best other species"),
    _c("flags", "text", "short words on measurement and claim"),
    _c("note", "text", "a person's note"),
    _c("source", "text", "bibliographic key of the line"),
    _c("fwhm_intrinsic", "float", "sqrt(fwhm^2 - fwhm_instrument^2), as Gaussians add; masked where "
       "fwhm does not exceed fwhm_instrument by 3 sigma", A, ".4f"),
    _c("fwhm_intrinsic_err", "float", "one-sigma error of fwhm_intrinsic, both widths' errors; of "
       "other profiles with the difference to a Lorentzian's width", A, ".4f"),
    _c("fwhm_instrument", "float", "instrument's full width at half depth there, from what the "
       "metadata's instrument_width_from says", A, ".4f"),
    _c("peak_separation", "float", "distance of the two emission peaks of the line the row is part "
       "of", KMS, ".2f"),
    _c("peak_separation_err", "float", "one-sigma error of peak_separation", KMS, ".2f"),
    _c("peak_ratio", "float", "V/R: height over the continuum of the blue peak over that of the red",
       "", ".3f"),
    _c("peak_ratio_err", "float", "one-sigma error of peak_ratio", "", ".3f"),
)

ROLL_CALL = (
    _c("species", "text", "species"),
    _c("expected", "int", "lines predicted above the detection limit"),
    _c("seen", "int", "of these, lines with a feature"),
    _c("missing", "int", "of these, lines without"),
    _c("p_chance", "float", "probability of the coincidences by chance", "", ".2e"),
    _c("offset_dex", "float", "strength offset from the prediction", "dex", ".3f"),
    _c("offset_err", "float", "one-sigma error of offset_dex", "dex", ".3f"),
    _c("verdict", "text", "present, possible, absent or not testable"),
    _c("limit_dex", "float", "the offset lies below this: no line of the species is seen", "dex", ".2f"),
    _c("limit_wave", "float", "line that says so, at rest, medium of the spectrum", A, ".3f"),
    _c("limit_ew", "float", "equivalent width it would at least need to show", MA, ".1f"),
)

ORPHANS = (
    _c("feature", "int", "permanent number of the feature"),
    _c("segment", "int", "index of the spectrum's segment, from 0"),
    _c("kind", "text", "absorption or emission"),
    _c(
        "wave",
        "float",
        "measured wavelength in the spectrum's medium and frame",
        A,
        ".4f",
    ),
    _c("wave_err", "float", "one-sigma error of wave", A, ".4f"),
    _c(
        "wave_rest",
        "float",
        "wave at the session's velocity taken out, same medium",
        A,
        ".4f",
    ),
    _c("significance", "float", "matched-filter signal-to-noise", "", ".1f"),
    _c(
        "depth",
        "float",
        "(continuum - flux)/continuum, negative in emission",
        "",
        ".4f",
    ),
    _c("fwhm", "float", "full width at half depth", A, ".4f"),
    _c("ew", "float", "equivalent width, negative in emission", MA, ".2f"),
    _c(
        "p_unlisted",
        "float",
        "that no catalogue line is the main contributor",
        "",
        ".4f",
    ),
    _c("nearest", "text", "the nearest line of the catalogue"),
    _c("why", "text", "why that is not the explanation"),
)


def _twice(name: str, what: str, unit: str, digits: str) -> tuple[Column, ...]:
    """First, second, difference and its error of one measured number."""
    return (
        _c(name, "float", f"{what} in the first spectrum", unit, digits),
        _c(f"{name}_err", "float", f"one-sigma error of {name}", unit, digits),
        _c(f"{name}_again", "float", f"{what} in the second spectrum, its velocity taken out",
           unit, digits),
        _c(f"{name}_again_err", "float", f"one-sigma error of {name}_again", unit, digits),
        _c(f"{name}_diff", "float", f"{name}_again less {name}", unit, digits),
        _c(f"{name}_diff_err", "float", f"one-sigma error of {name}_diff", unit, digits),
    )


AGAIN = (
    _c("feature", "int", "permanent number of the feature"),
    _c("segment", "int", "index of the first spectrum's segment, from 0"),
    _c("kind", "text", "absorption or emission"),
    _c("species", "text", "species of the claim"),
    _c("standing", "text", "firm, likely, tentative, unclaimed or set aside"),
    *_twice("wave", "wavelength, first spectrum's medium and frame", A, ".4f"),
    *_twice("depth", "depth", "", ".4f"),
    *_twice("fwhm", "full width at half depth", A, ".4f"),
    *_twice("ew", "equivalent width", MA, ".2f"),
    _c("significance_again", "float", "matched-filter signal-to-noise in the second", "", ".1f"),
    _c("flags", "text", "short words on the first measurement and the claim"),
    _c("flags_again", "text", "short words on the second measurement"),
)
