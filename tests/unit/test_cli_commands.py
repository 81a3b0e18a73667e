"""The commands on sessions: what they write, refuse and say."""

from __future__ import annotations

import json
import sys
from dataclasses import replace
from pathlib import Path

import pytest

from linewright.cli.main import main
from linewright.errors import MediumUnknown
from linewright.job.options import SolveOptions
from linewright.session.file import file_sha256, load_session, save_session

sys.path.insert(0, str(Path(__file__).resolve().parents[1] / "sessions"))
import builders  # noqa: E402, I001


@pytest.fixture
def saved(tmp_path):
    """A session saved beside the text spectrum it speaks of."""
    made = builders.session(20, seed=3)
    spectrum = builders.spectrum_of(made, step=0.05)
    from linewright.spectra.medium import to_medium

    segment = spectrum.segments[0]
    data = tmp_path / "spectrum.txt"
    rows = zip(to_medium(segment.wave, "air"), segment.flux, strict=True)
    data.write_text("".join(f"{wave:.5f} {flux:.6f}\n" for wave, flux in rows))
    options = {"columns": {"wave": 1, "flux": 2}, "medium": "air"}
    reference = replace(
        made.spectrum, path=str(data), sha256=file_sha256(data), read_options=options
    )
    path = tmp_path / "a.linewright.json"
    save_session(replace(made, spectrum=reference), path)
    return path


@pytest.fixture
def text(tmp_path):
    path = tmp_path / "plain.txt"
    path.write_text("".join(f"{5000 + 0.1 * i:.2f} 1.0\n" for i in range(400)))
    return path


def _error(capsys):
    (line,) = capsys.readouterr().err.strip().splitlines()
    return line


def test_inspect_prints_the_keys_of_the_contract(text, capsys):
    assert main(["inspect", str(text), "--json"]) == 0
    told = json.loads(capsys.readouterr().out)
    keys = (
        "file layout segments samples range medium medium_from frame frame_from corrections "
        "flux_unit uncertainty masked gaps warnings"
    )
    assert set(keys.split()) <= set(told)
    assert told["medium"] == "unknown" and told["samples"] == 400
    assert main(["inspect", str(text), "--medium", "vacuum"]) == 0
    assert "vacuum" in capsys.readouterr().out


@pytest.mark.parametrize("suffix", [".ecsv", ".csv", ".tex", ".vot", ".mrt"])
@pytest.mark.parametrize("what", ["ledger", "rollcall", "orphans"])
def test_tables(saved, tmp_path, suffix, what):
    out = tmp_path / f"{what}{suffix}"
    assert main(["table", str(saved), "--what", what, "-o", str(out)]) == 0
    assert out.stat().st_size > 0


def test_existing_outputs_need_force(saved, tmp_path, capsys):
    for command, name in (("table", "t.csv"), ("figure", "f.svg")):
        out = tmp_path / name
        out.write_text("mine")
        assert main([command, str(saved), "-o", str(out)]) == 1
        assert "exists already; use --force" in _error(capsys)
        assert out.read_text() == "mine"
        assert main([command, str(saved), "-o", str(out), "--force"]) == 0
        assert out.read_text() != "mine"
        capsys.readouterr()


def test_an_empty_ledger_is_success_with_a_warning(tmp_path, capsys):
    save_session(builders.session(0), tmp_path / "e.json")
    assert main(["table", str(tmp_path / "e.json"), "-o", str(tmp_path / "t.ecsv")]) == 0
    assert "the ledger is empty" in _error(capsys)


@pytest.mark.parametrize("suffix", [".pdf", ".svg", ".png"])
def test_figures(saved, tmp_path, suffix):
    out = tmp_path / f"f{suffix}"
    arguments = ["--range", "5050:5150", "--rows", "2", "--width", "one-column"]
    assert main(["figure", str(saved), "-o", str(out), *arguments]) == 0
    assert out.stat().st_size > 1000


def test_figure_finds_the_spectrum_moved_beside_the_session(saved, tmp_path, capsys):
    new = tmp_path / "new"
    new.mkdir()
    for name in ("spectrum.txt", saved.name):
        (tmp_path / name).rename(new / name)
    out = tmp_path / "f.svg"
    assert main(["figure", str(new / saved.name), "-o", str(out)]) == 0
    (new / "spectrum.txt").write_text("5000 1\n5001 1\n")
    assert main(["figure", str(new / saved.name), "-o", str(out), "--force"]) == 1
    assert "changed since the session was made" in _error(capsys)
    (new / "spectrum.txt").unlink()
    assert main(["figure", str(new / saved.name), "-o", str(out), "--force"]) == 1
    assert "not there any more" in _error(capsys)


def test_figure_outside_the_spectrum(saved, tmp_path, capsys):
    out = str(tmp_path / "f.pdf")
    assert main(["figure", str(saved), "-o", out, "--range", "9000:9100"]) == 1
    assert "lies outside the spectrum" in _error(capsys)


def test_edit_scripts(saved, tmp_path, capsys):
    script, out = tmp_path / "e.jsonl", tmp_path / "b.json"
    script.write_text(
        '{"edit": "set_note", "feature": 1, "note": "a"}\n{"edit": "set_velocity", "km_s": -12.5}\n'
    )
    assert main(["edit", str(saved), "--script", str(script), "-o", str(out)]) == 0
    assert "2 edits applied" in capsys.readouterr().out
    session = load_session(out)
    assert session.claims[session.index_of(1)].note == "a"
    assert session.velocity.velocity == -12.5 and len(session.history) == 2


def test_a_failing_script_writes_nothing(saved, tmp_path, capsys):
    script, out = tmp_path / "e.jsonl", tmp_path / "b.json"
    script.write_text('{"edit": "restore", "feature": 999}\n')
    assert main(["edit", str(saved), "--script", str(script), "-o", str(out)]) == 1
    assert "line 1: feature 999: no such feature" in _error(capsys)
    assert not out.exists()


class _Solver:
    """Stands in for the job: keeps what it was asked."""

    def __init__(self, outcome):
        self.outcome, self.asked = outcome, None

    def __call__(self, subject, catalogue=None, options=None, **more):
        self.asked = (subject, catalogue, options, more)
        if isinstance(self.outcome, Exception):
            raise self.outcome
        return self.outcome


@pytest.fixture
def solver(monkeypatch):
    def put(outcome, name="solve"):
        from linewright.job import solve

        stand_in = _Solver(outcome)
        monkeypatch.setattr(solve, name, lambda s, c, o, progress=None, **m: stand_in(s, c, o, **m))
        return stand_in

    return put


def test_solve_hands_every_option_to_the_job(solver, text, tmp_path, capsys):
    stand_in, out = solver(builders.session(5)), tmp_path / "s.linewright.json"
    arguments = (
        "--medium air --velocity -12.5 --velocity-range -600:100 --resolution 47000 --vsini 3 "
        "--temperature auto --log-pe -1.5 --metallicity -0.5 --abundance Ba=+1.2,Eu=+0.8 "
        "--abundance Mg=-0.2 --range 5000:5010 --range 5020:5030 --seed 7"
    ).split()
    species = ["--species", "Fe I,ti2", "--species", "Ca I"]
    assert main(["solve", str(text), "--session", str(out), *arguments, *species]) == 0
    spectrum, catalogue, options, _ = stand_in.asked
    assert spectrum.medium == "air" and catalogue is None
    assert options == SolveOptions(
        velocity=-12.5,
        velocity_range=(-600.0, 100.0),
        resolution=47000.0,
        vsini=3.0,
        temperature=None,
        log_pe=-1.5,
        metallicity=-0.5,
        abundances=(("Ba", 1.2), ("Eu", 0.8), ("Mg", -0.2)),
        species=("Fe I", "Ti II", "Ca I"),
        ranges=((5000.0, 5010.0), (5020.0, 5030.0)),
        seed=7,
    )
    told = capsys.readouterr()
    assert told.out.startswith("5 features") and "velocity +12.500" in told.out
    assert told.err == "linewright: warning: an invented warning\n"
    assert len(load_session(out).features) == 5


def test_solve_with_no_features_is_success_with_a_warning(solver, text, tmp_path, capsys):
    solver(replace(builders.session(0), warnings=()))
    out = tmp_path / "s.json"
    assert main(["solve", str(text), "--medium", "air", "--session", str(out)]) == 0
    assert "no features found" in _error(capsys) and out.exists()


def test_an_unknown_medium_is_refused_with_the_odds(solver, text, tmp_path, capsys):
    odds = MediumUnknown(text, "medium unknown (air 0.97, vacuum 0.03)", "give --medium")
    solver(odds)
    out = tmp_path / "s.json"
    assert main(["solve", str(text), "--session", str(out)]) == 1
    assert "air 0.97, vacuum 0.03" in _error(capsys) and not out.exists()


def test_solve_refuses_an_existing_session_before_the_work(solver, text, tmp_path, capsys):
    stand_in, out = solver(builders.session(1)), tmp_path / "s.json"
    out.write_text("mine")
    assert main(["solve", str(text), "--medium", "air", "--session", str(out)]) == 1
    assert "exists already" in _error(capsys) and stand_in.asked is None


def test_solve_of_a_feature_table(solver, tmp_path):
    stand_in = solver(builders.session(3), "solve_features")
    table = tmp_path / "f.csv"
    table.write_text("wave\n5000\n")
    out = str(tmp_path / "s.json")
    more = ["--coverage", "4990:5010", "--coverage", "5020:5030", "--wave-err", "0.01"]
    assert main(["solve", str(table), "--features", "--session", out, *more]) == 0
    subject, _, options, given = stand_in.asked
    assert subject == str(table) and given == {"medium": "air"}
    assert options.coverage == ((4990.0, 5010.0), (5020.0, 5030.0))
    assert options.wave_err == 0.01


def test_options_that_would_be_ignored_are_refused(text, tmp_path, capsys):
    out = str(tmp_path / "s.json")
    assert main(["solve", str(text), "--features", "--hdu", "1", "--session", out]) == 1
    assert "--hdu: has a meaning only for a spectrum" in _error(capsys)
    assert main(["solve", str(text), "--wave-err", "0.1", "--session", out]) == 1
    assert "--wave-err: has a meaning only for a feature table" in _error(capsys)


def test_an_unknown_species_is_refused(text, tmp_path, capsys):
    out = str(tmp_path / "s.json")
    assert main(["solve", str(text), "--species", "Xx I", "--session", out]) == 1
    assert "Xx I" in _error(capsys)
