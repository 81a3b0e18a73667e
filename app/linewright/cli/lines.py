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
    parser.add_argument(
        "-o", "--output", required=True, metavar="FILE|-", help="- writes ECSV on standard output"
    )
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")


def run(options) -> int:
    from ..publish.writers import table_bytes, write_table

    if options.depth_above is not None and options.temperature is None:
        from ..errors import InputRefused

        raise InputRefused("--depth-above", "depths need a temperature", "give --temperature K")
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
    from ..lines.species import parse_species_list

    species = tuple(name for text in options.species for name in parse_species_list(text))
    return catalogue_table(
        load_catalogue(),
        options.range,
        medium=options.medium,
        species=species,
        depth_above=options.depth_above,
        temperature=options.temperature,
    )
