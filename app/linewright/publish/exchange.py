"""Spectra and tables to and from other programs, by SAMP's standard message types.

Sends spectrum.load.ssa-generic and table.load.fits/votable (IVOA SAMP 1.3; message types of
its registry). What arrives is only an offer: nothing is opened or fetched before the user
consents to it. Only files of this machine and, after consent, web addresses are read.
"""

from __future__ import annotations

import queue
import tempfile
import urllib.parse
import urllib.request
import warnings
from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from ..errors import InputRefused

SPECTRUM = "spectrum.load.ssa-generic"
TABLES = {".fits": "table.load.fits", ".vot": "table.load.votable"}
RECEIVED = (SPECTRUM, *TABLES.values())
FETCH_CAP = 512 * 1024**2  # bytes of a file behind a web address
TIMEOUT_S = 15.0


@dataclass(frozen=True)
class Offered:
    """What another program offers: its name, the message type, where the file is, its name."""

    sender: str
    mtype: str
    url: str
    name: str

    def in_words(self) -> str:
        kind = "a spectrum" if self.mtype == SPECTRUM else "a table"
        return f"{self.sender} offers {kind}: {self.name or self.url} ({self.url})"


def _samp():
    """astropy's SAMP, or pyvo's where astropy no longer has it."""
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        try:
            from astropy import samp
        except ImportError:
            try:
                from pyvo import samp
            except ImportError:
                raise InputRefused("SAMP", "this Python has no SAMP library",
                                   "install pyvo") from None
    return samp


class Exchange:
    """A connection to the running hub; use as a context manager.

    ``offers`` collects what arrives (Offered), in order. Raises InputRefused where no hub
    runs.
    """

    def __init__(self, name: str = "Linewright", receive: bool = True):
        self.offers: queue.Queue[Offered] = queue.Queue()
        samp = _samp()
        self._client = samp.SAMPIntegratedClient(
            metadata={"samp.name": name, "samp.description.text": "spectral lines identified"},
            addr="127.0.0.1")
        try:
            with warnings.catch_warnings():
                warnings.simplefilter("ignore")
                self._client.connect()
        except (samp.SAMPHubError, OSError, KeyError):
            raise InputRefused("SAMP", "no hub is running on this machine",
                               "start a program with a SAMP hub first") from None
        if receive:
            for mtype in RECEIVED:
                self._client.bind_receive_notification(mtype, self._noted)
                self._client.bind_receive_call(mtype, self._called)

    def __enter__(self) -> Exchange:
        return self

    def __exit__(self, *_) -> None:
        self.close()

    def close(self) -> None:
        """Leave the hub."""
        if self._client.is_connected:
            self._client.disconnect()

    def _noted(self, _key, sender, mtype, params, _extra) -> None:
        self.offers.put(self._offered(sender, mtype, params))

    def _called(self, *arrived) -> None:
        """arrived: key, sender, message id, type, parameters, extra. Answered before it is told
        on: who waits for an offer may leave at once."""
        _, sender, message_id, mtype, params, _ = arrived
        offer = self._offered(sender, mtype, params)
        self._client.ereply(message_id, "samp.ok", result={})
        self.offers.put(offer)

    def _offered(self, sender: str, mtype: str, params: dict) -> Offered:
        url, name = str(params.get("url", "")), str(params.get("name", ""))
        return Offered(self._name_of(sender), str(mtype), url, name)

    def _name_of(self, sender: str) -> str:
        try:
            return str(self._client.get_metadata(sender).get("samp.name", sender))
        except Exception:  # a program that left is still worth its id
            return sender

    def recipients(self, mtype: str = SPECTRUM) -> dict[str, str]:
        """Programs that take this message: id -> name."""
        return {i: self._name_of(i) for i in self._client.get_subscribed_clients(mtype)}

    def _send(self, mtype: str, params: dict, to: str | None) -> int:
        """How many programs were told."""
        takers = self.recipients(mtype)
        chosen = [i for i, name in takers.items() if to is None or to in (i, name)]
        if not chosen:
            raise InputRefused("SAMP", f"no program {'called ' + to if to else ''} takes {mtype}",
                               "open one that does and connect it to the hub")
        return sum(self._told(client, {"samp.mtype": mtype, "samp.params": params})
                   for client in chosen)

    def _told(self, client: str, message: dict) -> bool:
        """Whether the program answered that it has the message: until then we stay, so that it
        can ask who we are."""
        try:
            answer = self._client.call_and_wait(client, message, str(int(TIMEOUT_S)))
        except Exception:  # a program that is gone or busy is no failure of ours
            return False
        return answer.get("samp.status") != "samp.error"

    def send_spectrum(self, path, spectrum, to: str | None = None) -> int:
        """Offer the FITS file ``path`` holding ``spectrum`` to all, or to one by name or id."""
        meta = {"Access.Format": "application/fits", "Target.Name": spectrum.name,
                "DataID.Title": Path(path).name}
        url = Path(path).resolve().as_uri()
        params = {"url": url, "meta": meta, "spectrum-id": url, "name": Path(path).name}
        return self._send(SPECTRUM, params, to)

    def send_table(self, path, to: str | None = None) -> int:
        """Offer a table file, .fits or .vot."""
        path = Path(path)
        mtype = TABLES.get(path.suffix.lower())
        if mtype is None:
            raise InputRefused(path, "is no table SAMP has a message for",
                               f"use {', '.join(TABLES)}")
        url = path.resolve().as_uri()
        return self._send(mtype, {"url": url, "table-id": url, "name": path.name}, to)


def accept(offer: Offered, consent: Callable[[Offered], bool], folder=None) -> Path | None:
    """The offered file's path once the user consents; None when not.

    A local file is used where it is; one behind a web address is copied into ``folder``
    (a new temporary one by default). Raises InputRefused when it cannot be had.
    """
    if not consent(offer):
        return None
    parts = urllib.parse.urlsplit(offer.url)
    if parts.scheme == "file" and parts.netloc in ("", "localhost"):
        return Path(urllib.request.url2pathname(parts.path))
    if parts.scheme not in ("http", "https"):
        raise InputRefused(offer.url, "is no file of this machine and no web address",
                           "save the file and open it")
    return _fetched(offer.url, parts.path, folder)


def _fetched(url: str, path: str, folder) -> Path:
    folder = Path(folder or tempfile.mkdtemp(prefix="linewright-"))
    target = folder / (Path(urllib.request.url2pathname(path)).name or "received")
    try:
        with urllib.request.urlopen(url, timeout=TIMEOUT_S) as source, open(target, "wb") as file:
            total = 0
            while chunk := source.read(1 << 20):
                total += len(chunk)
                if total > FETCH_CAP:
                    raise InputRefused(url, "is larger than 512 MiB", "save it and open a part")
                file.write(chunk)
    except OSError as problem:
        raise InputRefused(url, f"cannot be fetched ({problem})", "save the file and open it"
                           ) from None
    return target
