"""SAMP against a hub on the loopback interface: sending, receiving, consent."""

from __future__ import annotations

import queue
import warnings

import numpy as np
import pytest

from linewright.cli.main import main
from linewright.errors import InputRefused
from linewright.publish.exchange import SPECTRUM, Exchange, Offered, accept
from linewright.publish.spectrum_out import write_spectrum
from linewright.spectra.reading import read_spectrum
from linewright.spectra.spectrum import Segment, Spectrum

samp = pytest.importorskip("astropy.samp", reason="this astropy has no SAMP hub to test against")
pytestmark = pytest.mark.filterwarnings("ignore::Warning")


@pytest.fixture
def hub(tmp_path, monkeypatch):
    """A hub of our own on 127.0.0.1, named by the environment; home is not touched."""
    lock = tmp_path / "hub.lock"
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.setenv("SAMP_HUB", f"std-lockurl:{lock.as_uri()}")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        server = samp.SAMPHubServer(web_profile=False, mode="multiple",
                                    addr="127.0.0.1")
        server.start()
        yield server
        server.stop()


@pytest.fixture
def spectrum(tmp_path):
    wave = 5000.0 + 0.1 * np.arange(300)
    made = Spectrum((Segment(wave, np.ones(300), None, np.zeros(300, bool)),), "air",
                    frame="topocentric", name="HD 1")
    write_spectrum(made, tmp_path / "star.fits")
    return made, tmp_path / "star.fits"


def test_a_spectrum_goes_from_one_program_to_another(hub, spectrum):
    made, path = spectrum
    with Exchange("sender") as sender, Exchange("taker") as taker:
        assert "taker" in sender.recipients(SPECTRUM).values()
        assert sender.send_spectrum(path, made, "taker") == 1
        offer = taker.offers.get(timeout=10)
        assert (offer.sender, offer.mtype, offer.name) == ("sender", SPECTRUM, "star.fits")
        assert read_spectrum(accept(offer, lambda _: True)).name == "HD 1"
        with pytest.raises(queue.Empty):
            sender.offers.get_nowait()


def test_a_table_call_is_answered(hub, spectrum):
    """Another program may call and wait for the answer instead of only telling."""
    with Exchange("taker") as taker:
        client = samp.SAMPIntegratedClient(name="other", addr="127.0.0.1")
        client.connect()
        message = {"samp.mtype": "table.load.fits",
                   "samp.params": {"url": spectrum[1].as_uri(), "name": "t"}}
        (receiver,) = client.get_subscribed_clients("table.load.fits")
        answer = client.call_and_wait(receiver, message, timeout="10")
        client.disconnect()
        assert answer["samp.status"] == "samp.ok"
        assert taker.offers.get(timeout=10).sender == "other"


def test_nothing_is_read_without_consent(tmp_path):
    offer = Offered("other", SPECTRUM, (tmp_path / "absent.fits").as_uri(), "x")
    assert accept(offer, lambda _: False) is None
    strange = Offered("other", SPECTRUM, "ftp://somewhere/x.fits", "x")
    with pytest.raises(InputRefused, match="no file of this machine"):
        accept(strange, lambda _: True)


def test_a_web_address_is_fetched_only_after_consent(tmp_path, spectrum):
    import functools
    import http.server
    import threading

    handler = functools.partial(http.server.SimpleHTTPRequestHandler, directory=str(tmp_path))
    handler.log_message = lambda *_: None
    with http.server.ThreadingHTTPServer(("127.0.0.1", 0), handler) as server:
        threading.Thread(target=server.serve_forever, daemon=True).start()
        url = f"http://127.0.0.1:{server.server_address[1]}/star.fits"
        got = tmp_path / "got"
        got.mkdir()
        offer = Offered("other", SPECTRUM, url, "star.fits")
        assert accept(offer, lambda _: False, got) is None and not list(got.iterdir())
        assert read_spectrum(accept(offer, lambda _: True, got)).samples == 300
        server.shutdown()


def test_send_and_receive_commands(hub, spectrum, tmp_path, capsys):
    import threading

    out, result = tmp_path / "taken.fits", []
    arguments = ["receive", "-o", str(out), "--wait", "20", "--accept-from", "Linewright"]
    thread = threading.Thread(target=lambda: result.append(main(arguments)))
    thread.start()
    with Exchange("watcher", receive=False) as watcher:
        for _ in range(100):
            if watcher.recipients():
                break
            threading.Event().wait(0.1)
    assert main(["send", str(spectrum[1])]) == 0
    thread.join(30)
    assert result == [0] and read_spectrum(out).samples == 300
    assert "offered to 1 program" in capsys.readouterr().out


def test_without_a_hub_the_cure_is_named(tmp_path, monkeypatch):
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.setenv("SAMP_HUB", f"std-lockurl:{(tmp_path / 'none.lock').as_uri()}")
    with pytest.raises(InputRefused, match="no hub is running"):
        Exchange()
