"""Find, measure and identify the lines of a spectrum, or of a table of features."""

from __future__ import annotations

from .catalogues import chosen_catalogue
from .parsing import (
    abundances,
    count,
    not_negative,
    number,
    or_auto,
    positive,
    say,
    span,
)
from .reading_options import add_reading_options, read


def configure(parser) -> None:
    parser.add_argument("spectrum", metavar="SPECTRUM|FEATURES")
    parser.add_argument(
        "--session", required=True, metavar="OUT.linewright.json", help="session to write"
    )
    parser.add_argument("--force", action="store_true", help="overwrite an existing session")
    add_reading_options(parser)
    parser.add_argument(
        "--range", type=span, action="append", default=[], metavar="LO:HI",
        help="search only here (own medium, Angstrom; may be repeated)",
    )  # fmt: skip
    _add_physics(parser.add_argument_group("physics"))
    _add_features(parser.add_argument_group("feature tables"))


def _add_physics(group) -> None:
    group.add_argument("--velocity", type=or_auto(number), metavar="auto|KM_S")
    group.add_argument("--velocity-range", type=span, default=(-500.0, 500.0), metavar="LO:HI")
    group.add_argument("--resolution", type=positive, metavar="R", help="resolving power")
    group.add_argument("--vsini", type=not_negative, metavar="KM_S")
    group.add_argument("--temperature", type=or_auto(positive), metavar="auto|K")
    group.add_argument(
        "--log-pe", type=or_auto(number), metavar="auto|X",
        help="log10 of the electron pressure in dyn cm-2",
    )  # fmt: skip
    group.add_argument("--metallicity", type=number, default=0.0, metavar="DEX")
    group.add_argument(
        "--abundance", type=abundances, action="append", default=[], metavar="Ba=+1.2,Eu=+0.8",
        help="[X/Fe] in dex",
    )  # fmt: skip
    group.add_argument(
        "--species", action="append", default=[], metavar="LIST", help="only these: 'Fe I,Ti II'"
    )
    group.add_argument(
        "--catalogue", action="append", default=[], metavar="FILE",
        help="use these lines instead; name 'shipped' as well to keep the shipped ones",
    )  # fmt: skip
    group.add_argument("--seed", type=count, default=0, metavar="N")


def _add_features(group) -> None:
    group.add_argument("--features", action="store_true", help="the input is a feature table")
    group.add_argument(
        "--coverage", type=span, action="append", default=[], metavar="LO:HI",
        help="range in which every feature was listed (may be repeated)",
    )  # fmt: skip
    group.add_argument("--wave-err", type=positive, metavar="A", help="for rows without wave_err")


def solve_options(options):
    """The SolveOptions of parsed arguments; raises InputRefused for an unknown species."""
    from ..job.options import SolveOptions
    from ..lines.species import parse_species_list

    species = [name for text in options.species for name in parse_species_list(text)]
    return SolveOptions(
        velocity=options.velocity,
        velocity_range=options.velocity_range,
        resolution=options.resolution,
        vsini=options.vsini,
        temperature=options.temperature,
        log_pe=options.log_pe,
        metallicity=options.metallicity,
        abundances=tuple(pair for pairs in options.abundance for pair in pairs),
        species=tuple(dict.fromkeys(species)),
        ranges=tuple(options.range),
        coverage=tuple(options.coverage),
        wave_err=options.wave_err,
        seed=options.seed,
    )


def run(options) -> int:
    from ..session.atomic import check_writable
    from ..session.file import save_session
    from .bar import progress_bar

    check_writable(options.session, options.force)
    _check_company(options)
    wanted = solve_options(options)
    with progress_bar() as progress:
        work = _from_features if options.features else _from_spectrum
        session = work(options, wanted, progress)
    save_session(session, options.session, options.force)
    _report(session, options)
    return 0


def _check_company(options) -> None:
    """Options that would be ignored are refused instead."""
    from ..errors import InputRefused

    reading = ("hdu", "row", "columns", "unit", "frame", "barycentric", "zero_point")
    names = reading if options.features else ("wave_err",)
    unused = [name for name in names if getattr(options, name) is not None]
    unused += ["coverage"] if options.coverage and not options.features else []
    if unused:
        whose = "a spectrum" if options.features else "a feature table (--features)"
        name = f"--{unused[0].replace('_', '-')}"
        raise InputRefused(name, f"has a meaning only for {whose}", "leave it out")


def _from_spectrum(options, wanted, progress):
    from ..job.solve import solve

    spectrum = read(options)
    catalogue, notes = chosen_catalogue(options.catalogue, spectrum.medium)
    return _noted(solve(spectrum, catalogue, wanted, progress), notes)


def _from_features(options, wanted, progress):
    from ..job.solve import solve_features

    medium = options.medium or "air"
    catalogue, notes = chosen_catalogue(options.catalogue, medium)
    session = solve_features(options.spectrum, catalogue, wanted, medium=medium, progress=progress)
    return _noted(session, notes)


def _noted(session, notes: tuple[str, ...]):
    from dataclasses import replace

    return replace(session, warnings=(*session.warnings, *notes)) if notes else session


def _report(session, options) -> None:
    from ..session.summary import summary

    for warning in session.warnings:
        say(f"warning: {warning}")
    if not len(session.features):
        say(f"warning: {options.spectrum}: no features found, the ledger is empty")
    print(summary(session))
