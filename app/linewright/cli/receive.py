"""Wait for a spectrum or table another program sends through a SAMP hub; ask, then keep it.

Nothing is opened or fetched without consent: a yes at the terminal, or --accept-from NAME.
"""

from __future__ import annotations

from .parsing import positive


def configure(parser) -> None:
    parser.add_argument("-o", "--output", required=True, metavar="FILE", help="copy it here")
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")
    parser.add_argument("--accept-from", action="append", default=[], metavar="NAME",
                        help="consent beforehand to what this program sends")
    parser.add_argument("--wait", type=positive, default=60.0, metavar="SECONDS")


def run(options) -> int:
    import queue

    from ..errors import InputRefused
    from ..publish.exchange import Exchange, accept
    from ..session.atomic import check_writable, write_atomically

    check_writable(options.output, options.force)
    with Exchange() as exchange:
        try:
            offer = exchange.offers.get(timeout=options.wait)
        except queue.Empty:
            raise InputRefused("SAMP", f"nothing arrived in {options.wait:g} s",
                               "send it again, or wait longer with --wait") from None
    path = accept(offer, lambda o: o.sender in options.accept_from or _asked(o))
    if path is None:
        print("not accepted; nothing was read")
        return 0
    try:
        data = path.read_bytes()
    except OSError as problem:
        raise InputRefused(path, f"cannot be read ({problem.strerror})", "send it again") from None
    write_atomically(options.output, data, options.force)
    print(f"{options.output}: {offer.in_words()}")
    return 0


def _asked(offer) -> bool:
    import sys

    if not sys.stdin.isatty():
        return False
    return input(f"{offer.in_words()}. Accept? [y/N] ").strip().lower() in ("y", "yes")
