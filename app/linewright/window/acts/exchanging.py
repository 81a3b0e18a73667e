"""Spectra to and from other programs on this machine, by SAMP; nothing arrives unasked."""

from __future__ import annotations

from ...errors import LinewrightError
from ..notices import Notice
from ..tasks import Request
from . import opening

LISTEN = "samp listen"


def send(bench) -> None:
    """Offers the shown spectrum to every program that takes spectra."""
    spectrum, engine, name = bench.spectrum, bench.export_engine, bench.desk.name
    bench.tasks.start(Request(
        key="samp send", title=f"Offering {name}",
        work=lambda progress: engine.call("window.export_calls:send_spectrum", spectrum, name),
        done=lambda told: bench.notify(Notice(
            f"{name} was offered to {told} program{'s' if told != 1 else ''}.", "note",
            seconds=8, topic="samp")),
        failed=lambda error: _failed(bench, error), stop=engine.stop))


def listening(bench) -> bool:
    return bench.listener is not None


def toggle_listening(bench) -> None:
    """Begins or ends listening; the hub is looked for beside the window."""
    if listening(bench):
        listener, bench.listener = bench.listener, None
        listener.close()
        bench.notify(Notice("No longer listening to other programs.", "note", seconds=5,
                            topic="samp"))
        return
    bench.tasks.start(Request(
        key=LISTEN, title="Looking for other programs", work=lambda progress: _connected(),
        done=lambda exchange: _listen(bench, exchange),
        failed=lambda error: _failed(bench, error)))


def _connected():
    from ...publish.exchange import Exchange

    return Exchange()


def _listen(bench, exchange) -> None:
    from ..listening import Listener

    bench.listener = Listener(bench.window, exchange, lambda offer: _offered(bench, offer))
    bench.notify(Notice("Listening: what other programs send is offered here, and opened only "
                        "when you say so.", "note", seconds=8, topic="samp"))
    bench.window.menus.refresh()


def _offered(bench, offer) -> None:
    bench.notify(Notice(f"{offer.in_words()}.", "note", (
        ("Open it", lambda: _open(bench, offer)), ("Refuse", lambda: None)), topic=offer.url))


def _open(bench, offer) -> None:
    bench.tasks.start(Request(
        key=f"samp {offer.url}", title=f"Fetching {offer.name or 'a spectrum'}",
        work=lambda progress: _fetched(offer),
        done=lambda path: opening.open_file(bench, path),
        failed=lambda error: _failed(bench, error)))


def _fetched(offer):
    from ...publish.exchange import accept

    return accept(offer, lambda _offer: True)  # the person pressed 'Open it'


def _failed(bench, error: Exception) -> None:
    if isinstance(error, LinewrightError):
        bench.refuse(error)
    else:
        bench.window.report_unexpected(error)
