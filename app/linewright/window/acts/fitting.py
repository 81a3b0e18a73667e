"""Split, merge, limits and profile of the selected feature, each one step of undo."""

from __future__ import annotations

import numpy as np

from ...errors import LinewrightError
from ...job.hand_edits import errand
from ...job.hand_fit import Wanted, enclosed, limits_of, profile_of_fit
from ...session import fit_edits
from ...spectra.medium import from_medium, to_medium
from ..hand_calls import call, free_engine
from ..notices import Notice
from ..tasks import Request
from .picking import weigh_new

MADE = "job.hand_edits:made_of"
STEP = 0.05  # of the limits' width, for one press of a key


def can_fit(bench) -> bool:
    row = bench.selected_row()
    return bench.spectrum is not None and row is not None and bool(
        np.nan_to_num(bench.session.features.fwhm[row]) > 0)


def _numbers(bench) -> tuple[int, ...]:
    return bench.window.refresher.fits.features()


def neighbour(bench, direction: int) -> int | None:
    """The next feature of the selected one's segment in wavelength."""
    row = bench.selected_row()
    if row is None:
        return None
    f, at = bench.session.features, row + direction
    same = 0 <= at < len(f) and f.segment[at] == f.segment[row]
    return int(f.number[at]) if same else None


def profile_chosen(bench) -> str:
    """The profile of the selected feature's last fit."""
    if bench.selected_row() is None:
        return ""
    return profile_of_fit(bench.session, bench.view.now.selected)


def split(bench, parts: int = 2) -> None:
    number = bench.view.now.selected
    fit = bench.session.fit_of(number)
    profile = None if fit is None or fit.profile in ("double-peaked", "p-cygni") else fit.profile
    limits = fit.limits if fit is not None and len(fit.features) == 1 else None
    _do(bench, Wanted((number,), limits, profile or "gaussian", parts),
        lambda session, made: fit_edits.split_feature(session, number, parts, made.fit))


def split_in(bench, text: str) -> None:
    """'3' splits in three."""
    if not text.strip().isdigit():
        bench.notify(Notice(f"'{text}' is no number of parts; type 2 to 9", "refused", seconds=8,
                            topic="split"))
        return
    split(bench, int(text))


def merge(bench, direction: int) -> None:
    """The selected feature and its neighbour as one."""
    pair = (bench.view.now.selected, neighbour(bench, direction))
    _do(bench, Wanted(pair, None, "gaussian", 1),
        lambda session, made: fit_edits.merge_features(session, pair, made.fit))


def choose_profile(bench, name: str) -> None:
    numbers = _numbers(bench)
    if name in ("double-peaked", "p-cygni") and len(numbers) != 2:
        numbers = (bench.view.now.selected,)
    fit = bench.session.fit_of(numbers[0])
    limits = fit.limits if fit is not None and fit.features == numbers else None
    _fit(bench, Wanted(numbers, limits, name))


def fit_enclosed(bench) -> None:
    """All features inside the limits in one fit."""
    numbers = _numbers(bench)
    limits = limits_of(bench.session, numbers)
    known = profile_chosen(bench)
    profile = "gaussian" if known in ("double-peaked", "p-cygni") else known
    _fit(bench, Wanted(enclosed(bench.session, numbers[0], limits), limits, profile))


def move_limit(bench, side: int, steps: float) -> None:
    """Moves the lower (0) or upper (1) limit by steps of STEP; outwards is positive."""
    numbers = _numbers(bench)
    limits = list(limits_of(bench.session, numbers))
    limits[side] += (1 if side else -1) * steps * STEP * (limits[1] - limits[0])
    _fit(bench, Wanted(numbers, (limits[0], limits[1])))


def limits_text(bench) -> str:
    limits = limits_of(bench.session, _numbers(bench))
    own = to_medium(np.array(limits), bench.session.spectrum.medium)
    return f"{own[0]:.3f}:{own[1]:.3f}"


def set_limits(bench, text: str) -> None:
    """'5187.2:5188.1' in the spectrum's own medium."""
    try:
        own = [float(p) for p in text.replace("–", ":").split(":")]
        limits = fit_edits.checked_limits(
            float(x) for x in from_medium(np.array(own), bench.session.spectrum.medium))
    except (ValueError, LinewrightError):
        bench.notify(Notice(f"'{text}' are no limits; type the lower and the upper one, such as "
                            "5187.2:5188.1", "refused", seconds=8, topic="limits"))
        return
    _fit(bench, Wanted(_numbers(bench), limits))


def _fit(bench, wanted: Wanted) -> None:
    _do(bench, wanted,
        lambda session, made: fit_edits.fit_features(session, made.features, made.fit))


def _do(bench, wanted: Wanted, edit) -> None:
    """Measures beside the window, then does the edit unless the features changed meanwhile."""
    desk, session = bench.desk, bench.session
    try:
        parcel = errand(bench.spectrum, session, wanted)
    except LinewrightError as refusal:
        bench.refuse(refusal)
        return
    engine = free_engine(bench)
    bench.tasks.start(Request(
        key="fit act", title="Fitting", shown=False,
        work=lambda progress: call(engine, MADE, *parcel, wanted),
        done=lambda made: _take(bench, desk, session, lambda s: edit(s, made)),
        failed=lambda error: failed(bench, error)))


def _take(bench, desk, before, edit) -> None:
    if desk is not bench.desk or bench.session.features is not before.features:
        return
    selected = bench.view.now.selected
    if not bench.act(edit):
        return
    features = bench.session.features
    fresh = [n for n in features.number.tolist() if n not in set(before.features.number.tolist())]
    fit = bench.session.fits[-1]
    bench.view.select(selected if selected in fit.features else fit.features[0])
    for number in fresh:
        weigh_new(bench, desk, before, number)


def failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.refuse(error)
    else:
        bench.window.report_unexpected(error)
