"""Apply a script of edits (one JSON object a line) to a session.

Each line is {"edit": NAME, ...}; features go by their permanent numbers, wavelengths are
vacuum Angstrom. All edits are applied, or none.

  {"edit": "accept_candidate", "feature": 12, "rank": 2}
  {"edit": "set_species", "feature": 12, "species": "Fe I"}
  {"edit": "mark_blend", "feature": 12, "contributors": [["Ti II", 5188.687, 0.3]]}
  {"edit": "set_aside", "feature": 12, "reason": "cosmic ray"}
  {"edit": "set_standing", "feature": 12, "standing": "tentative"}
  {"edit": "set_note", "feature": 12, "note": "see the atlas"}
  {"edit": "lock", "feature": 12, "locked": true}
  {"edit": "restore", "feature": 12}
  {"edit": "add_feature", "row": {"wave": 5188.7, "sign": 1, "depth": 0.2}}
  {"edit": "replace_feature", "feature": 12, "row": {"wave": 5188.7, "sign": 1}}
  {"edit": "remove_feature", "feature": 12}
  {"edit": "set_velocity", "km_s": -33.2}

These are measured on the session's spectrum, which must be where it was (or in --spectra):

  {"edit": "split_feature", "feature": 12, "parts": 2}
  {"edit": "merge_features", "features": [12, 13]}
  {"edit": "fit_features", "features": [12], "limits": [5187.2, 5188.1], "profile": "voigt"}
  {"edit": "add_anchor", "wave": 5187.2, "value": 1.01, "segment": 0}
  {"edit": "move_anchor", "wave": 5187.2, "to": 5187.9, "value": 1.02}
  {"edit": "remove_anchor", "wave": 5187.9}
  {"edit": "clear_anchors"}

Profiles: gaussian, voigt, rotational, core-wings, double-peaked, p-cygni.
"""

from __future__ import annotations


def configure(parser) -> None:
    parser.add_argument("session", metavar="SESSION")
    parser.add_argument("--script", required=True, metavar="EDITS.jsonl")
    parser.add_argument("-o", "--output", required=True, metavar="OUT", help="session to write")
    parser.add_argument(
        "--reweigh", action="store_true",
        help="then weigh the machine's claims again: a person's firm word is data",
    )  # fmt: skip
    parser.add_argument(
        "--spectra", action="append", default=[], metavar="FOLDER",
        help="look here too for the session's spectrum (may be repeated)",
    )  # fmt: skip
    parser.add_argument("--force", action="store_true", help="overwrite an existing file")


def _measurer(session, options):
    """Opens the spectrum when an edit first needs it; beside the session is looked as well."""
    from functools import cache
    from pathlib import Path

    from ..job.hand_edits import script_measurer
    from ..session.reopen import reopen_spectrum

    folders = (*options.spectra, Path(options.session).absolute().parent)
    return script_measurer(cache(lambda: reopen_spectrum(session, folders)))


def run(options) -> int:
    from ..session.atomic import check_writable
    from ..session.file import load_session, save_session
    from ..session.script import apply_script, read_script

    check_writable(options.output, options.force)
    session = load_session(options.session)
    commands = read_script(options.script)
    edited = apply_script(session, commands, options.script, _measurer(session, options))
    changes = ()
    if options.reweigh:
        from ..job.reweigh import reweigh

        edited, changes = reweigh(edited)
    save_session(edited, options.output, options.force)
    print(f"{len(commands)} edits applied: {options.output}")
    for change in changes:
        before, after = (" ".join(x).strip() for x in (change.before, change.after))
        print(f"  feature {change.feature}: {before} -> {after}")
    return 0
