"""Opening, closing and switching between spectra and sessions."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from ...errors import InputRefused, LinewrightError
from ...job.view_session import unsolved_session
from ...progress import Progress
from ...session.document import Document
from ...session.model import Session
from ...spectra.spectrum import Spectrum
from .. import layout_memory as memory
from ..notices import Notice
from ..tasks import Request
from ..typeset import typeset
from ..workbench import Desk

MEDIUM = "medium"
CHOICES = ("columns", "unit", "hdu", "row", "frame", "medium")


@dataclass(frozen=True)
class Opened:
    """spectrum is None when a session's spectrum could not be read; trouble says why"""

    spectrum: Spectrum | None
    session: Session | None
    path: Path | None
    trouble: str = ""


def open_files(bench, files) -> None:
    for name in files:
        open_file(bench, Path(name))


def open_file(bench, path: Path) -> None:
    """Reads beside the window; a file that is already open is only shown."""
    path = Path(path).absolute()
    bench.asked_file = path
    for desk in bench.desks:
        if path in (desk.path, Path(desk.document.session.spectrum.path or ".")):
            bench.show_desk(desk)
            return
    bench.tasks.start(Request(
        key=f"open {path}", title=f"Opening {path.name}",
        work=lambda progress: read(path, progress),
        done=lambda opened: (_show(bench, opened), _remark(bench, path, opened)),
        failed=lambda error: _failed(bench, error),
    ))


def _remark(bench, path: Path, opened: Opened) -> None:
    from .choosing import remark

    if opened.session is None and "HDU" in opened.spectrum.layout:
        remark(bench, path)


def read_again(bench, text: str) -> None:
    """Reads the file last asked for with choices such as 'columns wave=1,flux=2 unit nm'."""
    path = bench.asked_file
    try:
        choices = reading_choices(text)
    except LinewrightError as refusal:
        bench.refuse(refusal)
        return
    read_with(bench, path, choices)


def read_with(bench, path: Path, choices: dict) -> None:
    """Reads a file with arguments of ``read_spectrum``, in place of its untouched desk."""
    bench.tasks.start(Request(
        key=f"open {path}", title=f"Opening {path.name}",
        work=lambda progress: _read_with(path, choices),
        done=lambda opened: _replace(bench, path, opened),
        failed=lambda error: _failed(bench, error),
    ))


def reading_choices(text: str) -> dict:
    """'columns wave=11,flux=2 unit nm hdu 1 row 3 frame rest medium air' as arguments."""
    words = text.split()
    if len(words) % 2 or any(w not in CHOICES for w in words[::2]):
        raise InputRefused("reading", f"'{text}' is not understood",
                           "write pairs such as: columns wave=1,flux=2 unit nm hdu 1")
    pairs = dict(zip(words[::2], words[1::2], strict=True))
    for name in ("hdu", "row"):
        if name in pairs and not pairs[name].isdigit():
            raise InputRefused(name, f"'{pairs[name]}' is no number", "count HDUs from 0, rows "
                               "from 1")
    return {k: int(v) if k in ("hdu", "row") else v for k, v in pairs.items()}


def _read_with(path: Path, choices: dict) -> Opened:
    from ...spectra.reading import read_spectrum

    return Opened(read_spectrum(path, **choices), None, None)


def _replace(bench, path: Path, opened: Opened) -> None:
    """The new reading takes the place of an untouched desk of the same file."""
    for desk in list(bench.desks):
        if Path(desk.document.session.spectrum.path or ".") == path and desk.saved:
            drop(bench, desk)
    _show(bench, opened)


def read(path: Path, progress: Progress) -> Opened:
    """A spectrum, or a session with the spectrum it speaks of."""
    from ...session.file import is_session, load_session

    progress.report("reading", 0.0)
    if not is_session(path):
        from ...spectra.reading import read_spectrum

        return Opened(read_spectrum(path), None, None)
    session = load_session(path)
    progress.report("reading its spectrum", 0.5)
    try:
        return Opened(spectrum_of(session, path), session, path)
    except Exception as error:
        return Opened(None, session, path, str(error))


def spectrum_of(session: Session, path: Path) -> Spectrum | None:
    """The spectrum of a session, read the same way again; None for a feature table."""
    if session.spectrum.from_features:
        return None
    from ...session.reopen import reopen_spectrum

    return reopen_spectrum(session, [path.parent])


def _show(bench, opened: Opened) -> None:
    session = opened.session or unsolved_session(opened.spectrum)
    desk = Desk(opened.spectrum, Document(session), opened.path)
    desk.velocity = session.velocity.velocity if session.velocity.velocity == (
        session.velocity.velocity) else 0.0
    bench.add_desk(desk)
    memory.add_recent(str(opened.path or session.spectrum.path))
    if opened.trouble:
        bench.notify(Notice(f"The session is shown without its spectrum. {opened.trouble}",
                            "warning", topic="spectrum"))
    elif session.warnings:
        bench.notify(Notice(_said(session, opened.spectrum), "note", seconds=15, topic="reading"))
    ask_medium(bench)
    bench.window.spectrum_view.setFocus()


def _said(session, spectrum) -> str:
    """What the reading assumed and what the solve of a saved session warned of, apart."""
    read = session.warnings if spectrum is None or not len(session.features) else tuple(
        w for w in session.warnings if w in spectrum.warnings)
    solved = [w for w in session.warnings if w not in read]
    parts = (("Assumed in reading", read), ("Warned of when solved", solved))
    return typeset(" ".join(f"{name}: {'; '.join(told)}." for name, told in parts if told))


def ask_medium(bench, then=lambda: None) -> None:
    """The quiet question, when nothing says what the wavelengths are; ``then`` follows."""
    bench.withdraw(MEDIUM)
    if bench.session is None or bench.session.spectrum.medium in ("air", "vacuum"):
        return
    bench.notify(Notice(
        f"{bench.desk.name} does not say whether its wavelengths are air or vacuum. "
        "They differ by about 83 km/s. Which are they?", "warning",
        (("Air", lambda: (set_medium(bench, "air"), then())),
         ("Vacuum", lambda: (set_medium(bench, "vacuum"), then()))), topic=MEDIUM))


def set_medium(bench, medium: str) -> None:
    """Reads the same numbers in another medium; what was solved for the old one goes."""
    desk = bench.desk
    if desk is None or desk.spectrum is None:
        return
    bench.withdraw(MEDIUM)
    bench.tasks.cancel("solve")
    desk.spectrum = desk.spectrum.with_medium(medium, "said by a person")
    session = unsolved_session(desk.spectrum)
    desk.document.replace(session, f"read wavelengths as {medium}")


def spectrum_matches(desk: Desk) -> bool:
    """False when undo or redo went past a change of medium."""
    return desk.spectrum is None or desk.spectrum.medium == desk.document.session.spectrum.medium


def follow_medium(desk: Desk) -> None:
    """After undo: the spectrum as the session means it."""
    reference = desk.document.session.spectrum
    desk.spectrum = desk.spectrum.with_medium(reference.medium, reference.medium_from)


def _failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.notify(Notice(str(error), "refused", (
            ("Read it another way…", lambda: bench.window.ask_reading()),
            ("What is in it?", lambda: bench.run("file.choose"))), topic="refused"))
    else:
        bench.window.report_unexpected(error)


def close_desk(bench) -> None:
    """Closes the shown spectrum; unsaved work asks once, in the notice bar."""
    desk = bench.desk
    if desk.saved:
        drop(bench, desk)
        return
    bench.notify(Notice(
        f"{desk.name} has unsaved work.", "warning",
        (("Save and close", lambda: bench.window.save_then(lambda: drop(bench, desk))),
         ("Close without saving", lambda: drop(bench, desk))), topic="close"))


def drop(bench, desk: Desk) -> None:
    place = bench.desks.index(desk)
    bench.desks.remove(desk)
    if bench.desk is desk:
        bench.tasks.cancel("solve")
        left = bench.desks[min(place, len(bench.desks) - 1)] if bench.desks else None
        bench.show_desk(left)


__all__ = ["close_desk", "open_file", "open_files", "set_medium"]
