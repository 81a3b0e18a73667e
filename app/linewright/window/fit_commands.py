"""Commands of work by hand: fits of the selected feature and continuum anchors."""

from __future__ import annotations

PROFILES = (
    ("gaussian", "Gaussian", "Instrument and thermal broadening"),
    ("voigt", "Voigt", "A Gaussian with Lorentzian damping wings"),
    ("rotational", "Rotational", "A rotating star's profile with limb darkening 0.6"),
    ("core-wings", "Core plus wings", "A narrow core on a Lorentzian of its own width"),
    ("double-peaked", "Double-peaked", "Two components of one sign, such as a disc makes"),
    ("p-cygni", "P Cygni", "Emission with absorption on its blue side, fitted together"),
)


def _profiles(_c, fit, can_fit) -> list:
    return [
        _c(f"fit.{name}", f"Profile: {title}", f"Alt+{k}", "Fit", can_fit,
           lambda b, n=name: fit.choose_profile(b, n), tip, group=1,
           checked=lambda b, n=name: can_fit(b) and fit.profile_chosen(b) == n)
        for k, (name, title, tip) in enumerate(PROFILES, start=1)
    ]


def _limits(_c, fit, can_fit) -> list:
    def limit(name, title, keys, side, steps):
        return _c(f"fit.{name}", title, keys, "Fit", can_fit,
                  lambda b: fit.move_limit(b, side, steps),
                  "Move it by a twentieth of their distance (or drag its bracket)", group=2)
    return [
        _c("fit.limits", "Type the fit limits…", "Ctrl+Alt+L", "Fit", can_fit,
           lambda b: b.window.ask_limits(),
           "The samples between them are fitted; drag the brackets or type 5187.2:5188.1",
           group=2),
        limit("low_out", "Lower limit outwards", "Alt+Shift+Left", 0, 1.0),
        limit("low_in", "Lower limit inwards", "Alt+Shift+Right", 0, -1.0),
        limit("high_in", "Upper limit inwards", "Ctrl+Alt+Left", 1, -1.0),
        limit("high_out", "Upper limit outwards", "Ctrl+Alt+Right", 1, 1.0),
    ]


def _anchors(_c) -> list:
    keeper = lambda b: b.window.refresher.anchors  # noqa: E731

    def there(b) -> bool:
        return b.session is not None and keeper(b).usable()

    def chosen(b) -> bool:
        return there(b) and keeper(b).chosen

    return [
        _c("fit.anchors", "Continuum anchors", "Ctrl+Alt+C", "Fit", there,
           lambda b: keeper(b).toggle(), "Show the continuum's anchors, to drag, add and remove",
           group=3, checked=lambda b: there(b) and keeper(b).shown),
        _c("fit.anchor_next", "Next anchor", "Alt+PgDown", "Fit",
           lambda b: there(b) and keeper(b).shown, lambda b: keeper(b).step(1),
           "Choose the next anchor to longer wavelengths", group=3),
        _c("fit.anchor_previous", "Previous anchor", "Alt+PgUp", "Fit",
           lambda b: there(b) and keeper(b).shown, lambda b: keeper(b).step(-1),
           "Choose the next anchor to shorter wavelengths", group=3),
        _c("fit.anchor_up", "Raise the anchor", "Ctrl+Alt+Up", "Fit", chosen,
           lambda b: keeper(b).nudge(1.0), "Raise the continuum there by 0.2 %", group=3),
        _c("fit.anchor_down", "Lower the anchor", "Ctrl+Alt+Down", "Fit", chosen,
           lambda b: keeper(b).nudge(-1.0), "Lower the continuum there by 0.2 %", group=3),
        _c("fit.anchor_add", "Add an anchor…", "Ctrl+Alt+A", "Fit",
           lambda b: there(b) and keeper(b).shown, lambda b: b.window.ask_anchor(),
           "Type its wavelength and flux (or click the continuum)", group=3),
        _c("fit.anchor_remove", "Remove the anchor", "Alt+Del", "Fit", chosen,
           lambda b: keeper(b).remove(), "Take the chosen anchor out", group=3),
        _c("fit.anchor_clear", "Give the continuum back to the machine", "", "Fit",
           lambda b: there(b) and any(len(a.wave) for a in b.session.anchors),
           lambda b: keeper(b).clear(), "Forget the anchors you laid in this segment", group=3),
    ]


def fit_rows(_c, fit) -> list:
    """_c: makes a Command; fit: the acts of ``acts.fitting``."""
    def can_fit(b) -> bool:
        return b.session is not None and fit.can_fit(b)

    def beside(direction):
        return lambda b: can_fit(b) and fit.neighbour(b, direction) is not None

    return [
        _c("fit.split", "Split in two", "Ctrl+D", "Fit", can_fit, lambda b: fit.split(b, 2),
           "Fit the selected feature as two components"),
        _c("fit.split_more", "Split in several…", "Ctrl+Shift+D", "Fit", can_fit,
           lambda b: b.window.ask_parts(), "Type how many components it shall have"),
        _c("fit.merge_next", "Merge with the next feature", "Ctrl+Alt+M", "Fit", beside(1),
           lambda b: fit.merge(b, 1), "Fit both as one feature; the stronger keeps its number"),
        _c("fit.merge_previous", "Merge with the previous feature", "Ctrl+Alt+Shift+M", "Fit",
           beside(-1), lambda b: fit.merge(b, -1),
           "Fit both as one feature; the stronger keeps its number"),
        _c("fit.enclosed", "Fit together what the limits enclose", "Ctrl+Alt+F", "Fit", can_fit,
           fit.fit_enclosed, "One fit of every feature between the brackets, errors and all"),
        *_profiles(_c, fit, can_fit), *_limits(_c, fit, can_fit), *_anchors(_c),
    ]
