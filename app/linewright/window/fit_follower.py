"""The fit that follows the brackets while they are dragged, beside the window."""

from __future__ import annotations

from ..errors import LinewrightError
from ..job.hand_edits import errand
from ..job.hand_fit import Wanted, limits_of, together
from ..session.fit_edits import fit_features
from .hand_calls import call, free_engine
from .panels import words
from .tasks import Request

PREPARED, FITTED = "window.hand_calls:ready_to_fit", "job.hand_fit:fitted"


class FitFollower:
    """Shows the limits of the selection. A drag asks for a fit; while one is under way only
    the newest wish waits, so that the curve is never older than one fit."""

    def __init__(self, bench, view):
        self._bench, self._view = bench, view
        self._made_for: tuple = ()
        self._ready = None  # (lean session, HandTrace) of the selection
        self._wanted: tuple[Wanted, bool] | None = None
        self._held = False  # while a drag is not yet let go and done
        view.hand.limitsTouched.connect(self.touch)
        view.hand.limitsDragged.connect(self.drag)

    def features(self) -> tuple[int, ...]:
        """The selected feature with those it was fitted with; () where nothing can be fitted."""
        bench = self._bench
        if bench.spectrum is None or bench.selected_row() is None:
            return ()
        return together(bench.session, bench.view.now.selected)

    def show(self) -> None:
        """The brackets of the selection, as the session has them."""
        if self._held:
            return
        numbers, limits = self.features(), None
        if numbers:
            try:
                limits = limits_of(self._bench.session, numbers)
            except LinewrightError:
                numbers = ()  # not measured: nothing to drag
        session = self._bench.session
        inner = [session.features.wave[session.index_of(n)] for n in numbers]
        self._view.hand.show_limits(limits, inner)

    def touch(self) -> None:
        """Makes ready what a drag will need, once for each selection."""
        bench, numbers = self._bench, self.features()
        key = (bench.desk, bench.session.features, bench.session.continuum, numbers)
        if not numbers or (len(key) == len(self._made_for)
                           and all(a is b or a == b for a, b in zip(key[2:], self._made_for[2:]))
                           and key[1] is self._made_for[1] and key[0] is self._made_for[0]):
            return
        self._made_for, self._ready = key, None
        try:
            lean, stretch = errand(bench.spectrum, bench.session, Wanted(numbers))
        except LinewrightError as refusal:
            bench.refuse(refusal)
            return
        engine = free_engine(bench)
        bench.tasks.start(Request(
            key="fit ready", title="Fitting", shown=False,
            work=lambda progress: call(engine, PREPARED, lean, stretch),
            done=self._set_ready, failed=self._failed))

    def _set_ready(self, ready) -> None:
        self._ready = ready
        self._next()

    def drag(self, low: float, high: float, final: bool) -> None:
        self.touch()
        numbers = self.features()
        if numbers:
            self._held = True
            self._wanted = Wanted(numbers, (low, high)), final
            self._next()

    def _next(self) -> None:
        bench = self._bench
        if self._wanted is None or self._ready is None or bench.tasks.busy("fit"):
            return
        (wanted, final), self._wanted = self._wanted, None
        lean, about = self._ready
        engine = free_engine(bench)
        bench.tasks.start(Request(
            key="fit", title="Fitting", shown=False,
            work=lambda progress: call(engine, FITTED, lean, about, wanted),
            done=lambda made: self._show(made, final),
            failed=lambda error: self._failed(error, final)))

    def _show(self, made, final: bool) -> None:
        if final:
            self._done(made)
        elif self._held:
            self._view.show_profile(made.wave, made.flux)
            self._view.hand.say(said(made, self._bench.view.now.selected))
        self._next()

    def _done(self, made) -> None:
        bench, known = self._bench, self._made_for
        self._held = False
        self._view.hand.say("")
        same = bench.desk is known[0] and bench.session.features is known[1]
        if not (same and bench.act(fit_features, made.features, made.fit)):
            self.show()

    def _failed(self, error: Exception, final: bool = True) -> None:
        if isinstance(error, LinewrightError):
            if final:
                self._give_up()
                self._bench.refuse(error)
        else:
            self._give_up()
            self._bench.window.report_unexpected(error)
        self._next()

    def _give_up(self) -> None:
        self._held, self._wanted = False, None
        self._bench.window.refresher.show_selected()


def said(made, number: int | None) -> str:
    """Depth and equivalent width of the selected component, for the line under the brackets."""
    rows = made.fit["rows"]
    row = next((r for r in rows if r["number"] == number), rows[0])
    error = row["ew_err"] if row["ew_err"] is not None else float("nan")
    return f"depth {words.depth(row['depth'])}   EW {words.width(row['ew'], error)} mÅ"
