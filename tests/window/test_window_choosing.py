"""Files of several spectra, flags in words, and spectra to and from other programs."""

from __future__ import annotations

import ast
import inspect
import warnings

import numpy as np
import pytest
from PySide6.QtCore import Qt

from linewright.spectra.contents import Offer
from linewright.window.acts import choosing, opening


@pytest.fixture
def several(tmp_path):
    """A FITS file of three tables and one image of two rows."""
    from astropy.io import fits

    wave = 5000.0 + 0.05 * np.arange(400)
    tables = [fits.BinTableHDU.from_columns([
        fits.Column("wave", "D", array=wave + 100 * k, unit="Angstrom"),
        fits.Column("flux", "D", array=np.ones(400))], name=f"PART{k}") for k in (1, 2, 3)]
    for table in tables:
        table.header["VACUUM"] = True
    path = tmp_path / "several.fits"
    fits.HDUList([fits.PrimaryHDU(), *tables]).writeto(path)
    return path


def opened(window, path, qtbot) -> None:
    opening.open_files(window.bench, [path])
    qtbot.waitUntil(lambda: window.bench.session is not None
                    and not window.tasks.busy("contents"), timeout=10000)


def test_a_file_of_several_spectra_says_so_and_another_is_chosen(window, several, qtbot):
    bench = window.bench
    opened(window, several, qtbot)
    texts = [n.text for n in window.notices._waiting]
    assert any("several.fits holds 3 spectra; shown is HDU 1" in t for t in texts), texts
    bench.run("file.choose")
    bar = window.ask_bar
    qtbot.waitUntil(lambda: not bar.isHidden(), timeout=5000)
    assert bar.list.count() == 3
    qtbot.keyClicks(bar.edit, "part3")
    assert bar.list.count() == 1
    qtbot.keyClick(bar.edit, Qt.Key.Key_Return)
    qtbot.waitUntil(lambda: bench.session.spectrum.read_options.get("hdu") == 3, timeout=5000)
    assert bar.isHidden() and len(bench.desks) == 1, "the untouched reading was replaced"
    assert bench.spectrum.own_range()[0] == pytest.approx(5300.0, abs=1e-6)


def test_the_choice_is_made_with_arrows_and_left_with_escape(window, qtbot):
    taken, bar = [], window.ask_bar
    bar.choose("Which?", ["one a", "two b", "three a"], taken.append)
    qtbot.keyClick(bar.edit, Qt.Key.Key_Down)
    qtbot.keyClick(bar.edit, Qt.Key.Key_Down)
    qtbot.keyClick(bar.edit, Qt.Key.Key_Down)
    qtbot.keyClick(bar.edit, Qt.Key.Key_Up)
    qtbot.keyClick(bar.edit, Qt.Key.Key_Return)
    assert taken == [1]
    bar.choose("Which?", ["one a", "two b", "three a"], taken.append)
    qtbot.keyClicks(bar.edit, "a th")
    qtbot.keyClick(bar.edit, Qt.Key.Key_Return)
    assert taken == [1, 2]
    bar.choose("Which?", ["one"], taken.append)
    qtbot.keyClicks(bar.edit, "zzz")
    qtbot.keyClick(bar.edit, Qt.Key.Key_Return)
    assert taken == [1, 2] and not bar.isHidden(), "nothing fits, nothing is taken"
    qtbot.keyClick(bar.edit, Qt.Key.Key_Escape)
    assert bar.isHidden()
    bar.ask("Note", "", "", taken.append)
    assert bar.list.isHidden()
    qtbot.keyClicks(bar.edit, "words")
    qtbot.keyClick(bar.edit, Qt.Key.Key_Return)
    assert taken[-1] == "words"


def test_every_row_is_a_choice_and_columns_too():
    offers = (Offer(1, 1, 100, "HDU 1, image"), Offer(2, 3, 50, "HDU 2, table"),
              Offer(None, 1, 9, "--columns wave=1,flux=3: flux=raw"))
    readings = [c.reading for c in choosing.choices_of(offers)]
    assert readings == [{"hdu": 1}, {"hdu": 2}, {"hdu": 2, "row": 1}, {"hdu": 2, "row": 2},
                        {"hdu": 2, "row": 3}, {"columns": "wave=1,flux=3"}]


def test_a_file_of_one_spectrum_has_no_choice(window, tmp_path, qtbot):
    path = tmp_path / "one.txt"
    np.savetxt(path, np.column_stack([5000 + 0.1 * np.arange(50), np.ones(50)]), fmt="%.4f")
    opened(window, path, qtbot)
    window.bench.run("file.choose")
    qtbot.waitUntil(lambda: window.notices.current is not None
                    and "one spectrum" in window.notices.current.text, timeout=5000)
    assert window.ask_bar.isHidden()


@pytest.fixture
def hub(tmp_path, monkeypatch):
    """A hub of our own on 127.0.0.1; the user's home is not touched."""
    samp = pytest.importorskip("astropy.samp", reason="this astropy has no SAMP hub")
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.setenv("SAMP_HUB", f"std-lockurl:{(tmp_path / 'hub.lock').as_uri()}")
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        server = samp.SAMPHubServer(web_profile=False, mode="multiple", addr="127.0.0.1")
        server.start()
        yield server
        server.stop()


@pytest.mark.filterwarnings("ignore::Warning")
def test_what_another_program_sends_is_opened_only_when_said(window, several, hub, qtbot):
    from linewright.publish.exchange import Exchange
    from linewright.spectra.reading import read_spectrum

    bench = window.bench
    bench.run("file.listen")
    qtbot.waitUntil(lambda: bench.listener is not None, timeout=10000)
    assert window.menus.actions["file.listen"].isChecked()
    with Exchange("other", receive=False) as other:
        other.send_spectrum(several, read_spectrum(several))
    qtbot.waitUntil(lambda: window.notices.current is not None
                    and "other offers a spectrum" in window.notices.current.text, timeout=10000)
    assert bench.session is None
    qtbot.mouseClick(window.notices._buttons[0], Qt.MouseButton.LeftButton)
    qtbot.waitUntil(lambda: bench.session is not None, timeout=10000)
    assert bench.desk.name == "several.fits"
    bench.run("file.listen")
    assert bench.listener is None and not window.menus.actions["file.listen"].isChecked()


@pytest.mark.filterwarnings("ignore::Warning")
def test_the_shown_spectrum_is_offered_to_others(window, several, hub, qtbot):
    from linewright.publish.exchange import Exchange, accept
    from linewright.spectra.reading import read_spectrum

    opened(window, several, qtbot)
    with Exchange("taker") as taker:
        window.bench.run("file.send")
        qtbot.waitUntil(lambda: window.notices.current is not None
                        and "offered to 1 program" in window.notices.current.text, timeout=20000)
        offer = taker.offers.get(timeout=5)
    assert read_spectrum(accept(offer, lambda _: True)).samples == 400


def test_without_a_hub_it_is_said_in_one_line(window, monkeypatch, tmp_path, qtbot):
    monkeypatch.setenv("HOME", str(tmp_path))
    monkeypatch.setenv("SAMP_HUB", f"std-lockurl:{(tmp_path / 'none.lock').as_uri()}")
    window.bench.run("file.listen")
    qtbot.waitUntil(lambda: window.notices.current is not None, timeout=10000)
    assert "no hub is running" in window.notices.current.text
    assert window.bench.listener is None


def test_listening_costs_the_window_nothing(window, qtbot):
    import queue

    from linewright.window.listening import Listener

    class Empty(queue.Queue):
        looks = 0

        def get(self, block=True, timeout=None):
            assert not block, "the window would wait"
            Empty.looks += 1
            return super().get(block)

    class Silent:
        offers, closed = Empty(), 0

        def close(self):
            Silent.closed += 1
    listener = Listener(window, Silent(), lambda offer: None)
    for _ in range(100):
        listener._look()
    assert Empty.looks == 100
    listener.close()
    listener.close()
    assert Silent.closed == 1


def _tree(module):
    return ast.walk(ast.parse(inspect.getsource(module)))


def _appended(module) -> set[str]:
    """Texts that a module appends to a list called ``words``."""
    return {node.args[0].value for node in _tree(module)
            if isinstance(node, ast.Call) and isinstance(node.func, ast.Attribute)
            and node.func.attr == "append" and getattr(node.func.value, "id", "") == "words"}


def _marks(module) -> set[str]:
    """Keys of the table ``marks``."""
    return {key.value for node in _tree(module) if isinstance(node, ast.Assign)
            and getattr(node.targets[0], "id", "") == "marks" for key in node.value.keys}


def test_every_flag_has_words(solved):
    """The words that the measuring and the claiming set, by name."""
    from linewright.claims import consistency
    from linewright.claims.artefacts import SPIKE
    from linewright.claims.band_claims import BAND
    from linewright.claims.cores import CORE, CORE_REVERSAL
    from linewright.measure import table
    from linewright.measure.shapes import _SHAPES
    from linewright.window.panels import words

    claimed, measured = _appended(consistency), _marks(table)
    assert {"broad", "off-velocity"} <= claimed and {"wing", "edge"} <= measured
    by_hand = {"hand", "cosmic-ray", "gap-edge", "artefact"}
    shapes = {s for s in _SHAPES if s != "gaussian"}
    known = claimed | measured | by_hand | shapes | {SPIKE, BAND, CORE, CORE_REVERSAL}
    assert known <= set(words.FLAGS)
    assert words.flags("broad wing").count("\n") == 1
    assert words.flag("my-own") == "my-own: said by a person"


def test_flags_are_shown_and_explained(solved, qtbot):
    from dataclasses import replace

    bench = solved.bench
    claims = list(bench.session.claims)
    claims[4] = replace(claims[4], flags="broad")
    session = replace(bench.session, claims=tuple(claims), features=replace(
        bench.session.features, flags=("wing",) * len(claims)))
    bench.desk.document.replace(session, "test")
    bench.view.select(5)
    assert solved.space.evidence.flags.text().startswith("broad: wider than lines")
    assert "also wing" in solved.space.evidence.flags.text()
    assert "wing of a stronger line" in solved.space.evidence.flags.toolTip()
    model = solved.ledger.model
    titles = [c.title for c in model.columns]
    index = model.index(4, titles.index("flags"))
    assert index.data() == "broad wing", "what stands out first"
    assert "wing of a stronger line" in index.data(Qt.ItemDataRole.ToolTipRole)


def test_a_drift_is_told_after_the_solve(solved):
    from dataclasses import replace

    from linewright.window.acts.solving import summary, with_warnings

    drift = "the stellar velocity drifts by +1.00 +- 0.10 km/s per 1000 Angstrom: check it"
    session = replace(solved.bench.session, warnings=("read as air", "another", drift))
    spectrum = replace(solved.bench.spectrum, warnings=("read as air",))
    told = with_warnings(solved.bench, summary(session), session, spectrum)
    assert "drifts" in told.text and "1 more" in told.text and told.kind == "warning"
    assert told.buttons[0][0] == "Velocity residuals"
    same = replace(session, warnings=("read as air",))
    assert with_warnings(solved.bench, summary(same), same, spectrum).kind == "note"
