"""A file with several spectra: which there are, and another one chosen."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

from ...errors import LinewrightError
from ..notices import Notice
from ..tasks import Request
from . import opening

KEY = "contents"


@dataclass(frozen=True)
class Choice:
    """words: what it is; reading: arguments of ``read_spectrum`` that give it"""

    words: str
    reading: dict


def choices_of(offers) -> list[Choice]:
    """Every offer, and each of its rows where rows can be read alone."""
    found = []
    for offer in offers:
        if offer.hdu is None and offer.words.startswith("--columns "):
            columns, _, name = offer.words.removeprefix("--columns ").partition(": ")
            found.append(Choice(f"column {name.removeprefix('flux=')}, {offer.samples:,} samples",
                                {"columns": columns}))
            continue
        place = {} if offer.hdu is None else {"hdu": offer.hdu}
        size = f"{offer.samples:,} samples"
        together = f"all {offer.rows:,} rows as segments, {size} each" if offer.rows > 1 else size
        found.append(Choice(f"{offer.words}, {together}", place))
        found += [Choice(f"{offer.words}, row {row} only, {size}", {**place, "row": row})
                  for row in range(1, offer.rows + 1) if offer.rows > 1]
    return found


def _contents(path: Path):
    from ...spectra.contents import contents

    return contents(path)


def remark(bench, path: Path) -> None:
    """After opening: says so when the file holds more spectra than the one shown."""
    _look(bench, path, False, lambda offers: _say(bench, path, offers))


def choose(bench) -> None:
    """Asks which of the file's spectra to show."""
    path = bench.asked_file
    _look(bench, path, True, lambda offers: _ask(bench, path, offers))


def _look(bench, path: Path, shown: bool, then) -> None:
    def failed(error: Exception) -> None:
        if not shown:
            return  # the reading itself has said what is wrong
        if isinstance(error, LinewrightError):
            bench.refuse(error)
        else:
            bench.window.report_unexpected(error)
    bench.tasks.start(Request(
        key=KEY, title=f"Looking into {path.name}", shown=shown,
        work=lambda progress: _contents(path), done=then, failed=failed))


def _say(bench, path: Path, offers) -> None:
    places = [o for o in offers if o.hdu is not None]
    if len(places) < 2 or bench.desk is None:
        return
    reference = bench.session.spectrum
    if Path(reference.path or ".") != path:
        return
    read = reference.read_options.get("hdu")
    one = next((o.words for o in places if o.hdu == read), "one")
    bench.notify(Notice(
        f"{path.name} holds {len(places)} spectra; shown is {one.partition(',')[0]}.", "note",
        (("Choose another (Ctrl+Shift+O)", lambda: bench.run("file.choose")),), seconds=20,
        topic=KEY))


def _ask(bench, path: Path, offers) -> None:
    choices = choices_of(offers)
    bench.withdraw(KEY)
    if len(choices) < 2:
        bench.notify(Notice(
            f"{path.name} offers {'one spectrum' if choices else 'no spectrum that is known'}; "
            "'Read the file another way' takes columns, units and more.", "note", seconds=10,
            topic=KEY))
        return
    bench.window.ask_bar.choose(
        f"Spectrum of {path.name}", [c.words for c in choices],
        lambda k: opening.read_with(bench, path, choices[k].reading))
