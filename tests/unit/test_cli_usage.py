"""The command line's reading of options, its exit statuses and its one-line messages."""

from __future__ import annotations

import argparse
import io
import subprocess
import sys
import types

import pytest

from linewright.cli import parsing
from linewright.cli.bar import progress_bar
from linewright.cli.main import COMMANDS, main


def _lines(capsys):
    return capsys.readouterr().err.strip().splitlines()


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_explains_itself(command, capsys):
    assert main([command, "--help"]) == 0
    assert f"usage: linewright {command}" in capsys.readouterr().out


def test_the_help_names_every_command(capsys):
    assert main(["--help"]) == 0
    out = capsys.readouterr().out
    assert all(f"\n  {command} " in out for command in COMMANDS)
    assert main(["--version"]) == 0


@pytest.mark.parametrize(
    "arguments",
    [
        ["inspect"],
        ["inspect", "a", "b"],
        ["inspect", "a", "--medium", "water"],
        ["inspect", "a", "--row", "0"],
        ["inspect", "a", "--hdu", "-1"],
        ["solve", "a"],
        ["solve", "a", "--session", "s", "--range", "5:4"],
        ["solve", "a", "--session", "s", "--range", "5"],
        ["solve", "a", "--session", "s", "--range", "a:b"],
        ["solve", "a", "--session", "s", "--velocity", "fast"],
        ["solve", "a", "--session", "s", "--resolution", "0"],
        ["solve", "a", "--session", "s", "--abundance", "Ba"],
        ["solve", "a", "--session", "s", "--temperature", "nan"],
        ["solve", "a", "--session", "s", "--seed", "-1"],
        ["solve", "a", "--sess", "s"],
        ["table", "s"],
        ["table", "s", "--what", "menu", "-o", "x.csv"],
        ["figure", "s", "-o", "f.pdf", "--width", "wide"],
        ["figure", "s", "-o", "f.pdf", "--rows", "0"],
        ["lines", "-o", "-"],
        ["edit", "s", "-o", "x"],
        ["--unknown"],
    ],
)
def test_wrong_usage_is_status_2_in_one_line(arguments, capsys):
    assert main(arguments) == 2
    (line,) = _lines(capsys)
    assert line.startswith("linewright") and line.endswith("--help")


def test_negative_numbers_work_as_written():
    words = ["--velocity-range", "-500:500", "--velocity", "-33.5", "--log-pe=-1", "-o", "-"]
    assert parsing.joined_negatives(words) == [
        "--velocity-range=-500:500",
        "--velocity=-33.5",
        "--log-pe=-1",
        "-o",
        "-",
    ]


def test_values():
    assert parsing.span("-500:500") == (-500.0, 500.0)
    assert parsing.or_auto(parsing.number)("auto") is None
    assert parsing.or_auto(parsing.number)("-3e2") == -300.0
    assert parsing.abundances("Ba=+1.2,Eu=-0.8") == (("Ba", 1.2), ("Eu", -0.8))
    for reader, text in [(parsing.number, "inf"), (parsing.not_negative, "-1")]:
        with pytest.raises(argparse.ArgumentTypeError):
            reader(text)


class _Terminal(io.StringIO):
    def isatty(self):
        return True


def test_the_bar_draws_on_terminals_only():
    terminal, pipe = _Terminal(), io.StringIO()
    with progress_bar(terminal) as progress:
        progress.part(0.0, 0.5).report("measuring", 1.0)
        progress.report("done", 1.0)
    assert "100% done" in terminal.getvalue()
    assert terminal.getvalue().endswith("\r\x1b[K"), "the line is left clean"
    with progress_bar(pipe) as progress:
        progress.report("done", 1.0)
    assert pipe.getvalue() == ""


def test_missing_files_are_refused_in_one_line(capsys, tmp_path):
    missing = str(tmp_path / "no.fits")
    for arguments in (
        ["inspect", missing],
        ["solve", missing, "--session", str(tmp_path / "s.json")],
        ["table", missing, "-o", str(tmp_path / "t.csv")],
        ["figure", missing, "-o", str(tmp_path / "f.pdf")],
        ["edit", missing, "--script", missing, "-o", str(tmp_path / "e.json")],
        [missing],
    ):
        assert main(arguments) == 1
        (line,) = _lines(capsys)
        assert line.startswith(f"linewright: {missing}: ") and "; " in line
    assert list(tmp_path.iterdir()) == []


def _window(monkeypatch, complaint="", app=None):
    needs = types.SimpleNamespace(complaint=lambda: complaint)
    monkeypatch.setitem(sys.modules, "linewright.window.needs", needs)
    monkeypatch.setitem(sys.modules, "linewright.window.app", app)


def test_the_bare_form_opens_the_window(monkeypatch, tmp_path):
    opened = []
    _window(monkeypatch, app=types.SimpleNamespace(run=lambda files: opened.append(files) or 0))
    (tmp_path / "a.fits").write_text("")
    assert main([]) == 0 and main([str(tmp_path / "a.fits")]) == 0
    assert opened == [[], [str(tmp_path / "a.fits")]]


def test_without_qt_or_display_status_3_in_one_line(monkeypatch, capsys):
    _window(monkeypatch, complaint="no display: use another")
    assert main([]) == 3
    assert _lines(capsys) == ["linewright: no display: use another"]
    _window(monkeypatch, app=None)  # importing it raises ImportError
    assert main([]) == 3
    (line,) = _lines(capsys)
    assert "install PySide6-Essentials" in line


LOADED = "import sys; from linewright.cli.main import main; main(sys.argv[1:]); print(*sys.modules)"


def _modules(*arguments):
    done = subprocess.run(
        [sys.executable, "-c", LOADED, *arguments], capture_output=True, text=True, check=True
    )
    return {name.split(".")[0] for name in done.stdout.split()}


def test_help_loads_next_to_nothing():
    heavy = {"numpy", "scipy", "astropy", "matplotlib", "PySide6", "pyqtgraph", "fastjsonschema"}
    assert not heavy & _modules("--help")
    assert not heavy & _modules("solve", "--help")


def test_inspect_of_text_loads_neither_qt_nor_the_heavy_libraries(tmp_path):
    path = tmp_path / "a.txt"
    path.write_text(
        "# wavelength in air, Angstrom\n" + "".join(f"{5000 + i} 1.0\n" for i in range(50))
    )
    loaded = _modules("inspect", str(path))
    assert "numpy" in loaded
    assert not {"scipy", "astropy", "matplotlib", "PySide6", "pyqtgraph"} & loaded


def test_interrupting_is_one_line(monkeypatch, capsys):
    def stop(_):
        raise KeyboardInterrupt

    monkeypatch.setattr("linewright.cli.main._run", stop)
    assert main(["inspect", "x"]) == 130
    assert _lines(capsys) == ["linewright: stopped; nothing was written"]


def test_a_full_disk_is_one_line(monkeypatch, capsys):
    def full(_):
        raise OSError(28, "No space left on device", "out.csv")

    monkeypatch.setattr("linewright.cli.main._run", full)
    assert main(["inspect", "x"]) == 1
    (line,) = _lines(capsys)
    assert line.startswith("linewright: out.csv: No space left on device")


def test_a_closed_pipe_ends_quietly(tmp_path):
    path = tmp_path / "a.txt"
    path.write_text("".join(f"{5000 + i} 1.0\n" for i in range(50)))
    run = f"{sys.executable} -m linewright inspect {path} --json | head -c 1 > /dev/null"
    done = subprocess.run(run, shell=True, capture_output=True, text=True, check=False)
    assert done.stderr == ""
