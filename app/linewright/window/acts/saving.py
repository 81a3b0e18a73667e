"""Saving sessions and exporting tables and figures, beside the window."""

from __future__ import annotations

import os
from pathlib import Path

from ...errors import LinewrightError
from ...resources import samples_dir
from .. import layout_memory as memory
from ..formats import SUFFIX
from ..notices import Notice
from ..tasks import Request

CALLS = "window.export_calls"


def suggested(bench, suffix: str) -> str:
    """A path beside the session or the spectrum."""
    desk = bench.desk
    at = desk.path or Path(desk.document.session.spectrum.path or desk.name)
    stem = at.name
    for ending in (SUFFIX, ".gz", ".fits", ".fit", ".txt", ".csv", ".ecsv", ".dat"):
        stem = stem.removesuffix(ending)
    return str(_folder(at.parent) / f"{stem}{suffix}")


def _folder(beside: Path) -> Path:
    """Beside the spectrum, except where nothing should or can be written."""
    try:
        shipped = beside.is_relative_to(samples_dir())
    except LinewrightError:
        shipped = False
    if beside.is_dir() and os.access(beside, os.W_OK) and not shipped:
        return beside
    kept = Path(str(memory.recall("save folder", "")))
    return kept if kept.is_dir() and kept != Path() else Path.home()


def save(bench, path: Path | None = None, then=lambda: None) -> None:
    """Writes the session whole or not at all; ``then`` runs when it is on disk."""
    desk = bench.desk
    path = Path(path) if path is not None else desk.path
    session, engine = desk.document.session, bench.export_engine
    bench.tasks.start(Request(
        key=f"save {id(desk)}", title=f"Saving {path.name}",
        # the file dialog asked about an existing file, or it is our own
        work=lambda progress: engine.call(
            "session.file:save_session", session, path, force=True),
        done=lambda _none: _saved(bench, desk, session, path, then),
        failed=lambda error: failed(bench, error),
    ))


def _saved(bench, desk, session, path: Path, then) -> None:
    desk.path = path
    if desk.document.session is session:
        desk.document.mark_saved()
    bench.notify(Notice(f"Saved as {path.name}.", "note", seconds=4, topic="saved"))
    bench.tell(bench.session, bench.session)
    then()


def export_table(bench, path: Path, what: str = "ledger") -> None:
    session, engine = bench.session, bench.export_engine
    bench.tasks.start(Request(
        key="table", title=f"Writing {path.name}",
        work=lambda progress: engine.call(f"{CALLS}:write_table_file", session, what, path),
        done=lambda _none: _written(bench, path),
        failed=lambda error: failed(bench, error),
    ))


def export_figure(bench, path: Path) -> None:
    """The figure of what is in view, in the order of the annotated spectrum."""
    session, spectrum, span = bench.session, bench.spectrum, bench.view.now.span
    engine = bench.export_engine
    bench.tasks.start(Request(
        key="figure", title=f"Drawing {path.name}",
        work=lambda progress: engine.call(
            f"{CALLS}:write_figure_file", session, spectrum, path, span),
        done=lambda report: _written(bench, path, _left_out(report)),
        failed=lambda error: failed(bench, error),
    ))


def measure_again(bench, spectrum: Path, path: Path) -> None:
    """The session's features in another spectrum of the star, as a table."""
    session, engine = bench.session, bench.export_engine
    bench.tasks.start(Request(
        key="again", title=f"Measuring again in {spectrum.name}",
        work=lambda progress: engine.call(
            f"{CALLS}:write_again_file", session, spectrum, path, progress=progress),
        done=lambda said: _written(bench, path, f" {said}"),
        failed=lambda error: failed(bench, error),
    ))


def _left_out(report) -> str:
    if not report.left_out:
        return ""
    return f" {report.left_out} labels found no room: show a narrower range to have them all."


def _written(bench, path: Path, more: str = "") -> None:
    bench.notify(Notice(f"Written: {path}.{more}", "note", seconds=8, topic="written"))


def failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.refuse(error)
    elif isinstance(error, OSError):
        bench.refuse(LinewrightError(error.filename or "file", error.strerror or str(error),
                                     "choose another folder"))
    else:
        bench.window.report_unexpected(error)
