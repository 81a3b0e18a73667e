"""The whole job: a spectrum (or a feature table) in, a Session out.

Reads nothing beyond a feature table's file and shows nothing.
"""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np

from .. import __version__
from ..claims.band_claims import band_warning, with_band_rows
from ..claims.banded import weigh_banded
from ..claims.cores import with_cores
from ..claims.identify import Identification, conclude, identify
from ..claims.molecules import seen_bands
from ..claims.options import ClaimOptions
from ..claims.readings import NOMINAL
from ..claims.upper_limits import with_limits
from ..errors import InputRefused, MediumUnknown
from ..lines.loading import load_catalogue
from ..measure.core import measure_spectrum
from ..measure.features import FeatureTable
from ..measure.limits import upper_limit
from ..measure.options import Measurement, MeasureOptions
from ..progress import Progress
from ..session.model import ContinuumNodes, Session, SpectrumReference
from ..spectra.medium import C_KM_S, from_medium
from ..spectra.spectrum import Spectrum
from .feature_file import read_feature_file
from .observer_frame import frame_doubts
from .options import SolveOptions
from .temperatures import colour_readings
from .template import at_velocity, disagreement, template_velocity
from .view_width import kept_widths

NINETY_FIVE = 1.645  # sigma, one-sided, of a normal distribution
DEFAULT_WAVE_ERR = 0.01  # Angstrom, for tables that state no error (said in a warning)
MEASURED = 0.7  # of a solve's time, as its progress has it (the Sun: 5.7 of 7.7 s)


def solve(
    spectrum: Spectrum, catalogue=None, options: SolveOptions = SolveOptions(), progress=None
) -> Session:
    """Measure and identify a spectrum.

    spectrum: with a known medium, else MediumUnknown is raised with the odds of both
    readings; catalogue: LineCatalogue, the shipped one by default; progress: Progress.
    Raises InputRefused on a spectrum with nothing to measure, Cancelled on cancel.
    """
    progress = progress or Progress()
    catalogue = load_catalogue() if catalogue is None else catalogue
    measurement = measure_spectrum(
        spectrum, _measure_options(spectrum, options), progress.part(0.0, MEASURED)
    )
    if spectrum.medium == "unknown":
        raise _medium_unknown(spectrum, measurement, catalogue, options)
    found = _identified(spectrum, measurement, catalogue, options, progress.part(MEASURED, 1.0))
    bands = _bands(spectrum, measurement, found)
    if bands:
        found = _banded(found, bands)
    found = _limited(found, measurement)
    reference = _reference(spectrum, measurement)
    velocity = found.velocity.velocity
    features, claims = with_cores(
        spectrum, measurement, measurement.features, found.claims, velocity
    )
    features, claims = with_band_rows(features, claims, bands, velocity)
    found = replace(found, claims=claims)
    session = _session(reference, features, found, options, catalogue)
    progress.report("done", 1.0)
    return replace(
        session,
        temperatures=session.temperatures + _colours(spectrum, measurement, session),
        continuum=_continuum(measurement),
        measurement=_measured(measurement) | kept_widths(measurement, spectrum.resolution),
        warnings=_join(
            spectrum.warnings,
            measurement.warnings,
            frame_doubts(spectrum, measurement.features, catalogue),
            found.warnings,
        ),
    )


def _identified(spectrum, measurement, catalogue, options, progress) -> Identification:
    """Identification at the voted velocity, or at the template's where lines blend."""
    wanted = _claim_options(options, spectrum.frame, True)
    features, coverage = measurement.features, measurement.coverage
    found = identify(features, coverage, catalogue, wanted, progress)
    better = template_velocity(spectrum, measurement, catalogue, found, options)
    if better is None:
        return found
    again = identify(features, coverage, catalogue, at_velocity(wanted, better), progress)
    return replace(
        again,
        velocity=better,
        warnings=_join(again.warnings, disagreement(found.velocity, better)),
    )


def _bands(spectrum, measurement, found: Identification):
    """Molecular bands that show at the star's velocity."""
    if not found.claims:
        return ()
    used = [s for s in measurement.segments if s is not None]
    width = float(np.median(np.concatenate([s.width for s in used])))
    low, high = measurement.coverage[0][0], measurement.coverage[-1][1]
    seen = seen_bands(spectrum, found.velocity.velocity, width)
    return tuple(b for b in seen if low < b.low * b.band.head / b.band.low < high)


def _banded(found: Identification, bands) -> Identification:
    """The claims weighed again with the bands known."""
    weighing = weigh_banded(found.weighing, [(b.low, b.high) for b in bands])
    again = conclude(weighing)
    warnings = _join(found.warnings, again.warnings, band_warning(bands))
    return replace(again, velocity=found.velocity, warnings=warnings)


def solve_features(
    table,
    catalogue=None,
    options: SolveOptions = SolveOptions(),
    medium: str = "air",
    progress=None,
) -> Session:
    """Identify a table of measured features.

    table: path of a feature file, or a FeatureTable (vacuum). Without ``options.coverage``
    (own-medium ranges) absence is no evidence and the null is wider.
    """
    progress = progress or Progress()
    catalogue = load_catalogue() if catalogue is None else catalogue
    given = isinstance(table, FeatureTable)
    features = table if given else read_feature_file(table, medium)
    features, warnings = _with_errors(features, options.wave_err)
    complete = len(options.coverage) > 0
    coverage = _coverage(features, options, medium)
    found = identify(
        features, coverage, catalogue, _claim_options(options, "unknown", complete), progress
    )
    if not complete:
        warnings += ("coverage not given: absent lines are no evidence and the null is wider",)
    reference = SpectrumReference(
        path="" if given else str(Path(table).resolve()),
        name="features" if given else Path(table).name,
        sha256="" if given else _sha256(table),
        medium=medium,
        medium_from="given",
        frame="unknown",
        frame_from="a feature table states none",
        layout="feature table",
        flux_unit="",
        samples=0,
        segments=int(features.segment.max(initial=-1)) + 1,
        coverage=coverage if complete else (),
        from_features=True,
    )
    session = _session(reference, features, found, options, catalogue)
    return replace(session, warnings=_join(warnings, found.warnings))


def _limited(found: Identification, measurement: Measurement) -> Identification:
    """Upper limits at the measured noise for the species that are not seen.

    A line is found 95 times in a hundred where it stands 1.645 sigma above the cut.
    """
    sigmas = measurement.threshold + NINETY_FIVE

    def least_width(wave):
        return upper_limit(measurement, wave, sigmas=sigmas)

    rows = with_limits(found.roll_call, found.solution, found.catalogue, least_width)
    return replace(found, roll_call=rows)


def _measure_options(spectrum: Spectrum, options: SolveOptions) -> MeasureOptions:
    return MeasureOptions(
        resolution=_effective_resolution(options.resolution or spectrum.resolution, options.vsini),
        ranges=_to_vacuum(options.ranges, spectrum.medium),
    )


def _effective_resolution(resolution: float | None, vsini: float | None) -> float | None:
    """Resolving power with rotation folded in: a rotation profile is about 1.5 v sin i wide
    (FWHM; Gray 2005, The Observation and Analysis of Stellar Photospheres)."""
    if not vsini:
        return resolution
    instrument = C_KM_S / resolution if resolution else 0.0
    return float(C_KM_S / np.hypot(instrument, 1.5 * vsini))


def _claim_options(options: SolveOptions, frame: str, complete: bool) -> ClaimOptions:
    return ClaimOptions(
        velocity=options.velocity,
        velocity_range=options.velocity_range,
        temperature=options.temperature,
        log_pe=options.log_pe,
        metallicity=options.metallicity,
        abundances=options.abundances,
        species=options.species,
        frame=frame,
        complete=complete,
    )


def _to_vacuum(ranges, medium: str) -> tuple[tuple[float, float], ...]:
    return tuple(
        (float(from_medium(low, medium)), float(from_medium(high, medium))) for low, high in ranges
    )


def _coverage(features, options: SolveOptions, medium: str):
    """Given ranges in vacuum, merged; else the span of the features."""
    if not options.coverage:
        return ((float(features.wave.min()) - 0.5, float(features.wave.max()) + 0.5),)
    merged: list[list[float]] = []
    for low, high in sorted(_to_vacuum(options.coverage, medium)):
        if merged and low <= merged[-1][1]:
            merged[-1][1] = max(merged[-1][1], high)
        else:
            merged.append([low, high])
    inside = np.zeros(len(features), dtype=bool)
    for low, high in merged:
        inside |= (features.wave >= low - 0.1) & (features.wave <= high + 0.1)
    if not np.all(inside):
        raise InputRefused(
            "--coverage",
            f"{int(np.sum(~inside))} of {len(features)} features lie outside it",
            "give every range that was searched, or leave the option out",
        )
    return tuple((low, high) for low, high in merged)


def _with_errors(features: FeatureTable, wave_err: float | None):
    """Features with a position error each, and what had to be assumed."""
    missing = ~np.isfinite(features.wave_err)
    if not np.any(missing):
        return features, ()
    value = DEFAULT_WAVE_ERR if wave_err is None else wave_err
    filled = replace(features, wave_err=np.where(missing, value, features.wave_err))
    if wave_err is not None:
        return filled, ()
    return filled, (
        f"{int(np.sum(missing))} features without wave_err: {value} Angstrom assumed "
        "(say better with --wave-err)",
    )


def _sha256(path) -> str:
    import hashlib

    return hashlib.sha256(Path(path).read_bytes()).hexdigest()


def _reference(spectrum: Spectrum, measurement: Measurement) -> SpectrumReference:
    return SpectrumReference(
        path=spectrum.path,
        name=spectrum.name,
        sha256=spectrum.sha256,
        medium=spectrum.medium,
        medium_from=spectrum.medium_from,
        frame=spectrum.frame,
        frame_from=spectrum.frame_from,
        layout=spectrum.layout,
        flux_unit=spectrum.flux_unit,
        samples=spectrum.samples,
        segments=len(spectrum.segments),
        read_options=dict(spectrum.read_options),
        coverage=measurement.coverage,
    )


def _session(reference, features, found: Identification, options, catalogue) -> Session:
    return Session(
        spectrum=reference,
        features=features,
        claims=found.claims,
        velocity=found.velocity,
        options=options.as_dict(),
        components=found.shown(),
        temperature_k=found.temperature,
        temperatures=found.read_temperatures(),
        log_pe=found.log_pe,
        roll_call=found.roll_call,
        orphans=found.orphans,
        catalogue_id=catalogue.identity,
        version=__version__,
        seed=options.seed,
    )


def _colours(spectrum, measurement, session):
    """Colour temperatures, where the lines speak of a star's continuum."""
    read = session.temperatures
    star = len(read) > 0 and read[0].label != NOMINAL
    return colour_readings(spectrum, measurement) if star else ()


def _continuum(measurement: Measurement) -> tuple[ContinuumNodes, ...]:
    nothing = np.zeros(0)
    return tuple(
        ContinuumNodes(nothing, nothing)
        if s is None
        else ContinuumNodes(np.asarray(s.node_wave), np.asarray(s.node_flux))
        for s in measurement.segments
    )


def _measured(measurement: Measurement) -> dict:
    """Figures of the measurement that the report prints."""
    used = [s for s in measurement.segments if s is not None]
    width = np.concatenate([s.width / s.width_wave for s in used])
    return {
        "threshold": float(measurement.threshold),
        "trials": float(measurement.trials),
        "expected_false": float(measurement.expected_false),
        "noise": float(np.median(np.concatenate([s.noise for s in used]))),
        "line_width_kms": float(np.median(width)) * C_KM_S,
    }


def _join(*groups) -> tuple[str, ...]:
    return tuple(dict.fromkeys(w for group in groups for w in group))


def _medium_unknown(spectrum, measurement, catalogue, options) -> MediumUnknown:
    """The refusal, with the odds of both readings."""
    from .medium_odds import medium_odds

    odds = medium_odds(measurement.features, catalogue, options, spectrum.frame)
    return MediumUnknown(
        spectrum.path or spectrum.name,
        f"the file does not say whether its wavelengths are air or vacuum ({odds.in_words()})",
        "decide with --medium air or --medium vacuum",
    )
