"""Commands as data: menus, tool tips, the palette and the help page come from here.

Acts are named, not imported: the welcome page opens without the core.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from importlib import import_module

from .fit_commands import fit_rows
from .formats import FIGURES, TABLES


class _Acts:
    """An act's module, imported when one of its functions is called."""

    def __init__(self, name: str):
        self._name = name

    def __getattr__(self, act: str):
        return lambda *arguments, **named: getattr(
            import_module(f".acts.{self._name}", __package__), act)(*arguments, **named)


anchoring, choosing, claim, exchanging, fitting, opening, reweighing, saving, solving, view = (
    _Acts(name) for name in (
        "anchoring", "choosing", "claiming", "exchanging", "fitting", "opening", "reweighing",
        "saving", "solving", "viewing"))

MENUS = ("File", "Edit", "Spectrum", "Fit", "Claims", "Lines", "View", "Help")


@dataclass(frozen=True)
class Command:
    """keys: as Qt writes them, first is shown; short: for buttons; group: menu section

    checked: None for a plain command, else whether its tick shows
    """

    id: str
    title: str
    keys: tuple[str, ...]
    menu: str
    enabled: Callable
    run: Callable
    tip: str
    short: str = ""
    group: int = 0
    checked: Callable | None = None

    @property
    def full_tip(self) -> str:
        return f"{self.tip} ({self.keys[0]})" if self.keys else self.tip


def always(_bench) -> bool:
    return True


def has_spectrum(bench) -> bool:
    return bench.spectrum is not None


def has_view(bench) -> bool:
    return bench.drawn is not None


def has_session(bench) -> bool:
    return bench.session is not None


def has_features(bench) -> bool:
    return bench.session is not None and len(bench.session.features) > 0


def can_solve(bench) -> bool:
    return has_spectrum(bench) and not bench.tasks.busy("solve")


def has_feature(bench) -> bool:
    return bench.session is not None and claim.has_feature(bench)


def can_reweigh(bench) -> bool:
    import math

    s = bench.session
    return (has_features(bench) and math.isfinite(s.temperature_k)
            and math.isfinite(s.velocity.velocity) and not bench.tasks.busy("solve"))


def has_candidate(bench) -> bool:
    return bench.session is not None and claim.has_candidate(bench)


def is_persons(bench) -> bool:
    return bench.session is not None and claim.is_persons(bench)


def _c(*fields, **more) -> Command:
    """A Command of (id, title, keys, menu, enabled, run, tip); keys are parted by ' | '."""
    name, title, keys, *rest = fields
    return Command(name, title, tuple(keys.split(" | ")) if keys else (), *rest, **more)


def _file() -> list[Command]:
    return [
        _c("file.open", "Open spectrum or session…", "Ctrl+O", "File", always,
           lambda b: b.window.ask_open(), "Open FITS, VOTable, ECSV or text, or a saved session"),
        _c("file.choose", "Choose another spectrum of the file…", "Ctrl+Shift+O", "File",
           lambda b: b.asked_file is not None, choosing.choose,
           "List the HDUs, rows and columns that hold a spectrum, and read one"),
        _c("file.reread", "Read the file another way…", "", "File",
           lambda b: b.asked_file is not None, lambda b: b.window.ask_reading(),
           "Say which columns, unit, HDU, row, frame or medium to read"),
        _c("file.save", "Save session", "Ctrl+S", "File", has_session,
           lambda b: b.window.save(), "Save everything known about this spectrum", group=1),
        _c("file.save_as", "Save session as…", "Ctrl+Shift+S", "File", has_session,
           lambda b: b.window.ask_save(), "Save under another name", group=1),
        _c("file.table", "Export table…", "Ctrl+E", "File", has_features,
           lambda b: b.window.ask_table(), "Write the table shown below; the suffix decides "
           "the format: " + " ".join(TABLES), group=2),
        _c("file.figure", "Export figure…", "Ctrl+Shift+E", "File", has_spectrum,
           lambda b: b.window.ask_figure(), "Draw the range in view, annotated, for a paper: "
           + " ".join(FIGURES), group=2),
        _c("file.again", "Measure again in another spectrum…", "Ctrl+Alt+E", "File", has_features,
           lambda b: b.window.ask_again(), "Measure these features in another spectrum of the "
           "star; a table of both, their differences and errors", group=2),
        _c("file.send", "Offer spectrum to other programs", "", "File", has_spectrum,
           exchanging.send, "Send it by SAMP to every program that takes spectra", group=3),
        _c("file.listen", "Listen to other programs", "", "File", always,
           exchanging.toggle_listening, "Show what other programs send by SAMP; nothing is "
           "opened before you say so", group=3, checked=lambda b: b.listener is not None),
        _c("file.close", "Close spectrum", "Ctrl+W", "File", has_session,
           opening.close_desk, "Close this spectrum; unsaved work is asked about", group=4),
        _c("file.next", "Next open spectrum", "Ctrl+PgDown", "File", lambda b: len(b.desks) > 1,
           lambda b: b.window.turn_desk(1), "Show the next of the open spectra", group=4),
        _c("file.previous", "Previous open spectrum", "Ctrl+PgUp", "File",
           lambda b: len(b.desks) > 1, lambda b: b.window.turn_desk(-1),
           "Show the previous of the open spectra", group=4),
        _c("file.quit", "Quit", "Ctrl+Q", "File", always, lambda b: b.window.close(),
           "Close the window; unsaved work is asked about", group=5),
    ]


def _edit() -> list[Command]:
    return [
        _c("edit.undo", "Undo", "Ctrl+Z", "Edit",
           lambda b: b.desk is not None and b.desk.document.can_undo,
           lambda b: b.desk.document.undo(), "Take the last act back, a solve included"),
        _c("edit.redo", "Redo", "Ctrl+Shift+Z | Ctrl+Y", "Edit",
           lambda b: b.desk is not None and b.desk.document.can_redo,
           lambda b: b.desk.document.redo(), "Do again what was taken back"),
        _c("edit.find", "Filter the table", "Ctrl+F", "Edit", has_session,
           lambda b: b.window.focus_filter(), "Type to narrow the table below", group=1),
        _c("edit.clear", "Clear the filters", "Ctrl+Shift+F", "Edit", has_session,
           lambda b: b.window.clear_filters(), "Show every row of the Ledger again", group=1),
    ]


def _spectrum() -> list[Command]:
    medium = lambda name: lambda b: has_session(b) and b.session.spectrum.medium == name  # noqa
    return [
        _c("spectrum.solve", "Solve", "F5", "Spectrum", can_solve, solving.solve,
           "Measure every feature, find the velocity and say what made each"),
        _c("spectrum.stop", "Stop solving", "Ctrl+.", "Spectrum",
           lambda b: b.tasks.busy("solve"), solving.stop, "Stop; nothing is changed"),
        _c("spectrum.choices", "Solve choices…", "F6", "Spectrum", has_spectrum,
           lambda b: b.window.show_choices(), "Temperature, velocity range, resolution, species"),
        _c("spectrum.velocity", "Type a velocity", "Ctrl+L", "Spectrum", has_session,
           lambda b: b.window.focus_velocity(), "Type km/s; the rake follows", group=1),
        _c("spectrum.slower", "Velocity down one step", "Ctrl+[", "Spectrum", has_session,
           lambda b: view.step_velocity(b, -1.0), "Slide the rake by −1 km/s", group=1),
        _c("spectrum.faster", "Velocity up one step", "Ctrl+]", "Spectrum", has_session,
           lambda b: view.step_velocity(b, 1.0), "Slide the rake by +1 km/s", group=1),
        _c("spectrum.air", "Wavelengths are air", "", "Spectrum", has_spectrum,
           lambda b: opening.set_medium(b, "air"), "Read the file's numbers as air wavelengths",
           group=2, checked=medium("air")),
        _c("spectrum.vacuum", "Wavelengths are vacuum", "", "Spectrum", has_spectrum,
           lambda b: opening.set_medium(b, "vacuum"),
           "Read the file's numbers as vacuum wavelengths", group=2, checked=medium("vacuum")),
    ]


def _claims() -> list[Command]:
    def rank(n):
        return _c(f"claim.accept{n}", f"Accept candidate {n}", f"Ctrl+{n}", "Claims",
                  lambda b: _candidates(b) >= n, lambda b: claim.accept(b, n),
                  f"Claim the candidate ranked {n}")
    return [
        _c("claim.accept", "Accept candidate", "Ctrl+Return | Ctrl+Enter", "Claims",
           has_candidate, claim.accept, "Claim the candidate marked in Evidence: it "
           "becomes firm, said by you", short="Accept"),
        rank(2), rank(3),
        _c("claim.species", "Type a species", "F2", "Claims", has_feature,
           lambda b: b.window.focus_species(), "Claim a species that is not among the candidates"),
        _c("claim.blend", "Mark or unmark a blend", "Ctrl+B", "Claims", has_feature,
           claim.toggle_blend, "Say that the marked candidate contributes as well", short="Blend"),
        _c("claim.note", "Write a note", "Ctrl+M", "Claims", has_feature,
           lambda b: b.window.ask_note(), "A note kept with this feature", short="Note"),
        _c("claim.aside", "Set aside as artefact", "Del", "Claims", has_feature,
           claim.set_aside, "Not a spectral line; the row stays, struck out", short="Set aside",
           group=1),
        _c("claim.cosmic", "Set aside as cosmic ray", "Shift+Del", "Claims", has_feature,
           lambda b: claim.set_aside(b, "cosmic ray"), "A particle hit, not a line", group=1),
        _c("claim.edge", "Set aside as gap edge", "", "Claims", has_feature,
           lambda b: claim.set_aside(b, "gap edge"), "Made by a gap or the end of the spectrum",
           group=1),
        _c("claim.restore", "Restore the machine's claim", "Ctrl+R", "Claims", is_persons,
           claim.restore, "Forget your act on this feature; the note stays", group=1),
        _c("claim.lock", "Keep when solved again", "Ctrl+K", "Claims", has_feature,
           claim.toggle_lock, "Solving again leaves this claim as it stands", group=1,
           checked=lambda b: has_feature(b)
           and b.session.claims[b.selected_row()].locked),
        _c("claim.remove", "Remove feature", "Ctrl+Del", "Claims", has_feature,
           claim.remove, "Take the feature out of the Ledger (undo brings it back)", group=1),
        _c("claim.reweigh", "Re-weigh the other claims", "F7", "Claims", can_reweigh,
           reweighing.reweigh, "Your claims count as known: the machine's other claims are "
           "weighed again; yours and kept ones stay", short="Re-weigh", group=2),
        _c("claim.changes", "Show what re-weighing changes", "Shift+F7", "Claims",
           lambda b: b.desk is not None and b.desk.weighed is not None,
           lambda b: reweighing.show(b), "The list of claims before and after", group=2),
        _c("claim.next", "Next feature", "Alt+Down", "Claims", has_features,
           lambda b: claim.step_feature(b, 1), "Select the next row of the Ledger", group=3),
        _c("claim.previous", "Previous feature", "Alt+Up", "Claims", has_features,
           lambda b: claim.step_feature(b, -1), "Select the previous row of the Ledger", group=3),
        _c("claim.open_next", "Next undecided feature", "F8", "Claims", has_features,
           lambda b: claim.step_undecided(b, 1),
           "The next feature that is not firm and that you have not judged", group=3),
        _c("claim.open_previous", "Previous undecided feature", "Shift+F8", "Claims",
           has_features, lambda b: claim.step_undecided(b, -1),
           "The previous feature that is not firm and that you have not judged", group=3),
    ]


def _candidates(bench) -> int:
    row = bench.selected_row()
    return len(bench.session.claims[row].candidates) if row is not None else 0


def _view() -> list[Command]:
    def panel(name, title, keys):
        return _c(f"view.{name}", title, keys, "View", has_session,
                  lambda b: b.window.toggle_panel(name), f"Show or hide: {title}", group=2,
                  checked=lambda b: b.window is not None and b.window.panel_shown(name))

    def theme(name, title):
        return _c(f"view.theme_{name}", title, "", "View", always,
                  lambda b: b.window.choose_theme(name), f"Colours: {title.lower()}", group=3,
                  checked=lambda b: b.window is not None and b.window.theme_choice == name)
    return [
        _c("view.whole", "Whole spectrum", "Ctrl+0", "View", has_view,
           lambda b: b.window.spectrum_view.zoom_all(), "Show all of it"),
        _c("view.in", "Zoom in", "Ctrl++ | Ctrl+=", "View", has_view,
           lambda b: b.window.spectrum_view.zoom(2.0), "Half the range (or turn the wheel)"),
        _c("view.out", "Zoom out", "Ctrl+-", "View", has_view,
           lambda b: b.window.spectrum_view.zoom(0.5), "Twice the range"),
        _c("view.left", "Towards shorter wavelengths", "Alt+Left", "View", has_view,
           lambda b: b.window.spectrum_view.step(-0.25), "Move by a quarter of the view"),
        _c("view.right", "Towards longer wavelengths", "Alt+Right", "View", has_view,
           lambda b: b.window.spectrum_view.step(0.25), "Move by a quarter of the view"),
        _c("view.goto", "Go to wavelength…", "Ctrl+G", "View", has_view,
           lambda b: b.window.ask_wavelength(), "Type 5183.6, or a range 5160:5200", group=1),
        _c("view.selected", "Go to the selected feature", "Ctrl+J", "View", has_feature,
           view.look_at_selected, "Centre the view on it", group=1),
        _c("view.flux", "Automatic flux scale", "Ctrl+Shift+0", "View", has_view,
           lambda b: b.window.spectrum_view.auto_flux(),
           "Scale the flux to what is in view (Shift and wheel set it by hand)", group=1),
        _c("view.rake_auto", "Rake: most claimed in view", "Ctrl+Shift+R", "View", has_view,
           lambda b: b.view.change(rake=None), "Let the rake choose its species", group=1,
           checked=lambda b: b.view.now.rake is None),
        _c("view.rake_this", "Rake: add or remove this species", "Ctrl+T", "View",
           lambda b: b.candidate() is not None,
           lambda b: b.show_on_rake(b.candidate().species),
           "Put the marked candidate's species on the rake", group=1),
        panel("evidence", "Evidence", "Ctrl+Alt+1"),
        panel("tables", "Tables", "Ctrl+Alt+2"),
        panel("track", "Velocity track", "Ctrl+Alt+3"),
        _c("view.residuals", "Velocity residuals…", "Ctrl+Alt+4", "View", has_features,
           lambda b: b.window.show_residuals(), "Offsets of confident claims against "
           "wavelength and lower-level energy", group=2),
        _c("view.uncertainty", "Uncertainty band", "Ctrl+Alt+U", "View", has_spectrum,
           lambda b: b.window.toggle_uncertainty(), "Show one sigma about the flux", group=2,
           checked=lambda b: b.window is not None and b.window.uncertainty_shown),
        _c("view.dismiss", "Close notice or question", "Esc", "View",
           lambda b: b.window is not None and b.window.can_dismiss(),
           lambda b: b.window.dismiss(), "Close the bar above the work", group=2),
        theme("system", "As the desktop"), theme("light", "Light"), theme("dark", "Dark"),
    ]


def _help() -> list[Command]:
    return [
        _c("help.palette", "Find a command…", "Ctrl+Shift+P", "Help", always,
           lambda b: b.window.show_palette(), "Type a few letters of what you want to do"),
        _c("help.page", "Help", "F1", "Help", always, lambda b: b.window.show_help(),
           "Tasks, keys and words on one page"),
    ]


def command_table() -> dict[str, Command]:
    """All commands by id, in menu order."""
    from .line_commands import line_commands

    rows = [*_file(), *_edit(), *_spectrum(), *fit_rows(_c, fitting), *_claims(),
            *line_commands(), *_view(), *_help()]
    return {row.id: row for row in rows}
