"""Write the Ledger, the Roll call or the Orphans of a session as a table."""

from __future__ import annotations

from .parsing import say


def configure(parser) -> None:
    parser.add_argument("session", metavar="SESSION")
    parser.add_argument("--what", choices=("ledger", "rollcall", "orphans"), default="ledger")
    parser.add_argument(
        "-o", "--output", required=True, metavar="FILE",
        help="the suffix says the format: .ecsv .csv .tex .vot .mrt",
    )  # fmt: skip
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")


def run(options) -> int:
    from ..publish.ledger import session_table
    from ..publish.writers import check_suffix, write_table
    from ..session.atomic import check_writable
    from ..session.file import load_session

    check_suffix(options.output)
    check_writable(options.output, options.force)
    table = session_table(load_session(options.session), options.what)
    if not len(table):
        say(f"warning: {options.session}: the {options.what} is empty")
    write_table(table, options.output, options.force)
    return 0
