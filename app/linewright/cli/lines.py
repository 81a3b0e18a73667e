"""List catalogue lines of a range, one row a line."""

from __future__ import annotations

import sys

from .parsing import number, positive, say, span


def configure(parser) -> None:
    parser.add_argument(
        "--range", type=span, required=True, metavar="LO:HI", help="in --medium, Angstrom"
    )
    parser.add_argument("--species", action="append", default=[], metavar="LIST")
    parser.add_argument("--medium", choices=("air", "vacuum"), default="air")
    parser.add_argument(
        "--depth-above", type=number, metavar="D", help="predicted central depth (needs K)"
    )
    parser.add_argument("--temperature", type=positive, metavar="K")
    parser.add_argument("--e-low", type=span, metavar="LO:HI", help="lower-level energy, eV")
    parser.add_argument("--loggf-above", type=number, metavar="X")
    parser.add_argument(
        "--text", default="", metavar="WORDS", help="species, term, source or wavelength digits"
    )
    parser.add_argument(
        "-o", "--output", metavar="FILE|-", help="- writes ECSV on standard output"
    )
    parser.add_argument(
        "--page", action="store_true",
        help="print what is known of the strongest line found: data, siblings, sources",
    )  # fmt: skip
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")


def run(options) -> int:
    from ..publish.writers import table_bytes, write_table

    if options.depth_above is not None and options.temperature is None:
        from ..errors import InputRefused

        raise InputRefused("--depth-above", "depths need a temperature", "give --temperature K")
    if options.page:
        return _print_page(options)
    if options.output is None:
        say("lines: the following arguments are required: -o (or --page)")
        return 2
    table = _table(options)
    if not len(table):
        say("warning: no line of the catalogue is in this range")
    if options.output == "-":
        sys.stdout.write(table_bytes(table, ".ecsv").decode("utf-8"))
    else:
        write_table(table, options.output, options.force)
    return 0


def _table(options):
    from ..lines.export import catalogue_table
    from ..lines.loading import load_catalogue

    catalogue = load_catalogue()
    return catalogue_table(
        catalogue.take(_rows(options, catalogue)),
        options.range,
        medium=options.medium,
        depth_above=options.depth_above,
        temperature=options.temperature,
    )


def _rows(options, catalogue):
    """Rows of the catalogue that fit the options."""
    from ..lines.search import LineQuery, search
    from ..lines.species import parse_species_list

    species = tuple(name for text in options.species for name in parse_species_list(text))
    query = LineQuery(
        wave_range=options.range,
        medium=options.medium,
        species=species,
        e_low=options.e_low,
        loggf_above=options.loggf_above,
        text=options.text,
    )
    return search(catalogue, query)


def _print_page(options) -> int:
    """The page of the line with the largest log gf among those found."""
    import numpy as np

    from ..lines.loading import load_catalogue
    from ..lines.page import line_page

    catalogue = load_catalogue()
    rows = _rows(options, catalogue)
    if len(rows) == 0:
        say("warning: no line of the catalogue fits")
        return 0
    best = rows[int(np.argmax(np.nan_to_num(catalogue.loggf[rows], nan=-99.0)))]
    page = line_page(catalogue, int(best))
    print(page.title)
    for label, value, unit in page.entries:
        print(f"  {label}: {value} {unit}".rstrip())
    for heading, siblings in (("multiplet", page.multiplet), ("strongest", page.strongest)):
        waves = ", ".join(f"{s.wave:.3f}" for s in siblings[:12])
        print(f"{heading} (vacuum): {waves or 'none'}")
    for key, text in page.sources:
        print(f"{key}: {text}")
    print(page.bibtex)
    return 0
