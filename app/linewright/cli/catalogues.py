"""The lines a solve is to use: the shipped ones, the user's files, or both."""

from __future__ import annotations

SHIPPED = "shipped"


def chosen_catalogue(names: list[str], medium: str):
    """(LineCatalogue or None for the shipped one, notes for the session).

    names: files, or 'shipped'; several are merged. A file that does not say its medium is
    read in ``medium``, the spectrum's, with a note. Raises InputRefused.
    """
    if not names or names == [SHIPPED]:
        return None, ()
    from ..lines.loading import load_catalogue
    from ..lines.user import merge_catalogues

    merged, notes = None, []
    for name in names:
        lines, said = (load_catalogue(), ()) if name == SHIPPED else _user_lines(name, medium)
        merged = lines if merged is None else merge_catalogues(merged, lines)
        notes += said
    return merged, tuple(notes)


def _user_lines(name: str, medium: str):
    from ..errors import InputRefused
    from ..lines.user import read_user_catalogue

    try:
        return read_user_catalogue(name), ()
    except InputRefused:
        # most often the file leaves its medium open; any other fault is found again
        found = read_user_catalogue(name, medium)
        return found, (f"{name}: air or vacuum not stated, taken as {medium} like the spectrum",)
