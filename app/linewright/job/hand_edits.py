"""Acts of hand on a session and its spectrum, for Python and for edit scripts.

    from linewright.job.hand_edits import split, merge, refit
    session = split(spectrum, session, 12, parts=2)

Each is one edit of ``session.fit_edits`` with what was measured in it, so that the session's
history can be applied again without the spectrum. Wavelengths are vacuum Angstrom.
"""

from __future__ import annotations

from dataclasses import replace

from ..errors import InputRefused
from ..session import fit_edits
from ..session.edits import row_of
from ..session.model import Session
from ..spectra.spectrum import Spectrum
from .hand_fit import Made, Wanted, check_rows, fitted, limits_of, together
from .hand_trace import hand_stretch, ready_trace

MEASURED = ("fit_features", "split_feature", "merge_features")


def split(spectrum: Spectrum, session: Session, feature: int, parts: int = 2,
          limits=None, profile: str | None = None) -> Session:
    """One feature as ``parts`` components fitted together."""
    made = measured(spectrum, session, Wanted((feature,), limits, profile, parts))
    return fit_edits.split_feature(session, feature, parts, made.fit)


def merge(spectrum: Spectrum, session: Session, features, limits=None,
          profile: str | None = None) -> Session:
    """Several features as one; it keeps the number of the most significant."""
    wanted = Wanted(tuple(features), limits, profile or "gaussian", 1)
    return fit_edits.merge_features(session, features, measured(spectrum, session, wanted).fit)


def refit(spectrum: Spectrum, session: Session, features, limits=None,
          profile: str | None = None) -> Session:
    """Features fitted together within limits, with a profile; None keeps the last used."""
    made = measured(spectrum, session, Wanted(tuple(features), limits, profile))
    return fit_edits.fit_features(session, made.features, made.fit)


def measured(spectrum: Spectrum, session: Session, wanted: Wanted) -> Made:
    """The fit wanted. Raises InputRefused with the cause where it cannot be."""
    return made_of(*errand(spectrum, session, wanted), wanted)


def errand(spectrum: Spectrum, session: Session, wanted: Wanted) -> tuple:
    """(lean session, stretch): what ``made_of`` and ``prepared`` need, small enough to be sent
    to another process. Raises InputRefused for features that are not there."""
    if not wanted.features:
        raise InputRefused("fit", "no feature named", "see the Ledger for the numbers")
    low, high = fit_edits.checked_limits(wanted.limits or limits_of(session, wanted.features))
    check_rows(session, wanted, (low, high))
    segment = int(session.features.segment[row_of(session, wanted.features[0])])
    stretch = hand_stretch(spectrum, session, segment, low, high)
    lean = replace(session, features=stretch[2], fits=stretch[3], claims=(), history=(),
                   roll_call=(), orphans=(), continuum=(), anchors=())
    return lean, stretch


def prepared(lean: Session, stretch):
    """The slow part of ``made_of``: (lean session, HandTrace)."""
    return lean, ready_trace(*stretch)


def made_of(lean: Session, stretch, wanted: Wanted) -> Made:
    """The fit wanted, of what ``errand`` gives."""
    return fitted(*prepared(lean, stretch), wanted)


def script_measurer(spectrum_of):
    """What ``session.script.apply_script`` takes as ``completed``.

    spectrum_of: gives the spectrum when it is first needed. Edits that state what was
    measured pass as they are; the others are measured:
      {"edit": "split_feature", "feature": 12, "parts": 2}
      {"edit": "merge_features", "features": [12, 13]}
      {"edit": "fit_features", "features": [12], "limits": [5187.2, 5188.1], "profile": "voigt"}
      {"edit": "add_anchor", "wave": 5187.2, "value": 1.01}, move_anchor (with "to"),
      remove_anchor, clear_anchors {"segment": 0}
    """
    from .hand_anchors import ANCHOR_EDITS, anchor_command

    def completed(session: Session, command: dict) -> dict:
        name = command.get("edit")
        if name in MEASURED and "fit" not in command:
            return _measured_command(spectrum_of(), session, command)
        if name in ANCHOR_EDITS:
            return anchor_command(spectrum_of(), session, command)
        return command

    return completed


def _measured_command(spectrum, session: Session, command: dict) -> dict:
    allowed = {"edit", "feature", "features", "parts", "limits", "profile"}
    unknown = sorted(set(command) - allowed)
    if unknown:
        raise InputRefused(f"edit '{command['edit']}'", f"'{unknown[0]}' is not an argument",
                           "arguments are feature or features, parts, limits, profile")
    wanted = _wanted(session, command)
    made = measured(spectrum, session, wanted)
    kept = {k: v for k, v in command.items() if k not in ("limits", "profile")}
    if command["edit"] == "split_feature":
        return {**kept, "parts": wanted.parts, "fit": made.fit}
    return {**kept, "features": list(made.features), "fit": made.fit}


def _wanted(session: Session, command: dict) -> Wanted:
    name, limits, profile = command["edit"], command.get("limits"), command.get("profile")
    limits = None if limits is None else fit_edits.checked_limits(limits)
    try:
        if name == "split_feature":
            return Wanted((int(command["feature"]),), limits, profile, int(command.get("parts", 2)))
        features = tuple(int(n) for n in command["features"])
    except (KeyError, TypeError, ValueError):
        needs = "feature" if name == "split_feature" else "features"
        raise InputRefused(f"edit '{name}'", f"'{needs}' is missing or not understood",
                           "give feature numbers of the Ledger") from None
    if name == "merge_features":
        if len(set(features)) < 2:
            raise InputRefused("merge", "one feature alone", "name two or more")
        return Wanted(features, limits, profile or "gaussian", 1)
    if len(features) == 1:
        features = together(session, features[0])
    return Wanted(features, limits, profile)
