"""The command ``linewright``: finds the command's module and runs it.

Exit status: 0 success, 1 refused input, 2 wrong usage, 3 no window possible.
"""

from __future__ import annotations

import importlib
import os
import sys
import warnings

COMMANDS = {
    "inspect": "say what was understood of a spectrum",
    "correct": "show and apply the barycentric correction and a wavelength zero point",
    "convert": "write a spectrum as standard FITS or ECSV",
    "send": "offer a spectrum to other programs through a SAMP hub",
    "receive": "take a spectrum another program sends, with consent",
    "solve": "find and identify the lines of a spectrum or a feature table",
    "table": "write the Ledger, the Roll call or the Orphans of a session",
    "figure": "draw a session's spectrum with its lines named",
    "lines": "list catalogue lines of a range",
    "again": "measure a session's features in another spectrum of the star",
    "edit": "apply a script of edits to a session",
}


def main(argv: list[str] | None = None) -> int:
    """Run one command; returns its exit status. Nothing here loads Qt but the window."""
    arguments = list(sys.argv[1:] if argv is None else argv)
    try:
        with warnings.catch_warnings():
            if not sys.warnoptions:
                warnings.simplefilter("ignore")
            return _guarded(arguments)
    except SystemExit as leaving:
        return leaving.code if isinstance(leaving.code, int) else 0


def _guarded(arguments: list[str]) -> int:
    from ..errors import Cancelled, LinewrightError
    from .parsing import say

    try:
        status = _run(arguments)
        sys.stdout.flush()
        return status
    except LinewrightError as refusal:
        say(str(refusal))
        return 1
    except BrokenPipeError:
        # the reader of our output went away; keep the interpreter from complaining at exit
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return 1
    except OSError as problem:
        name = problem.filename or "system"
        say(f"{name}: {problem.strerror or problem}; check the file and its folder")
        return 1
    except (KeyboardInterrupt, Cancelled):
        say("stopped; nothing was written")
        return 130


def _run(arguments: list[str]) -> int:
    from .parsing import Parser, joined_negatives

    if not arguments or arguments[0] not in COMMANDS:
        return _bare(arguments)
    name = arguments[0]
    module = importlib.import_module(f".{name}", __package__)
    parser = Parser(prog=f"linewright {name}", description=module.__doc__)
    module.configure(parser)
    return module.run(parser.parse_args(joined_negatives(arguments[1:])))


def _bare(arguments: list[str]) -> int:
    """``linewright [FILE ...]``, ``--help`` and ``--version``."""
    from .. import __version__
    from .parsing import Parser

    listing = "\n".join(f"  {name:<9}{text}" for name, text in COMMANDS.items())
    parser = Parser(
        prog="linewright",
        usage="linewright [FILE ...] | linewright COMMAND ...",
        description="Identify the lines of a reduced stellar or nebular spectrum.",
        epilog=f"commands:\n{listing}\n\n'linewright COMMAND --help' explains one.",
    )
    parser.add_argument(
        "files", nargs="*", metavar="FILE", help="spectra or sessions to open in the window"
    )
    parser.add_argument("--version", action="version", version=f"linewright {__version__}")
    from . import window

    return window.run(parser.parse_args(arguments).files)
