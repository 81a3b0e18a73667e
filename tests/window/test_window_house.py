"""Commands as data, menus, palette, help, themes, notices, layout, start-up checks."""

from __future__ import annotations

import subprocess
import sys

import pytest
from PySide6.QtCore import Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtWidgets import QAbstractButton, QAbstractItemView, QLineEdit

from linewright.window.commands import MENUS, command_table
from linewright.window.needs import complaint
from linewright.window.notices import Notice


def test_commands_are_complete_and_their_keys_differ():
    seen: dict[str, str] = {}
    for command in command_table().values():
        assert command.menu in MENUS and command.title and command.tip
        for keys in command.keys:
            sequence = QKeySequence(keys)
            assert not sequence.isEmpty(), keys
            text = sequence.toString()
            assert text not in seen, f"{text}: {command.id} and {seen.get(text)}"
            seen[text] = command.id


def test_no_command_is_a_bare_letter():
    for command in command_table().values():
        for keys in command.keys:
            assert len(keys) > 1 and not (keys.startswith("Shift+") and len(keys) == 7), keys


def test_menus_palette_and_help_come_from_the_table(solved):
    from linewright.window.help_page import help_html
    from linewright.window.palette import matching

    commands = solved.bench.commands
    listed = [a for menu in solved.menuBar().actions() for a in menu.menu().actions()]
    for action in solved.menus.actions.values():
        assert action in listed
    page = help_html(commands)
    for command in commands.values():
        assert command.tip.replace("'", "&#x27;") in page or command.tip in page
    assert matching(commands.values(), "solve")[0].id == "spectrum.solve"
    assert matching(commands.values(), "no such thing") == []


def test_the_palette_runs_a_command(solved, qtbot):
    solved.bench.view.select(5)
    solved.bench.run("help.palette")
    palette = solved._palette
    qtbot.keyClicks(palette.edit, "set aside cosmic")
    qtbot.keyClick(palette.edit, Qt.Key.Key_Return)
    assert solved.bench.session.claims[4].standing == "set aside"
    assert palette.isHidden()


def test_help_opens_beside_the_work(solved, qtbot):
    solved.bench.run("help.page")
    assert not solved._help.isModal()
    assert "Rake" in solved._help.browser.toPlainText()
    solved._help.close()


def test_themes_change_at_once_and_are_remembered(solved):
    from linewright.window import layout_memory as memory

    solved.bench.run("view.theme_dark")
    assert solved.bench.theme.dark
    assert memory.recall("theme") == "dark"
    assert solved.menus.actions["view.theme_dark"].isChecked()
    solved.bench.run("view.theme_light")
    assert not solved.bench.theme.dark


def test_panels_hide_and_the_layout_is_remembered(solved, qtbot):
    solved.bench.run("view.evidence")
    assert solved.space.evidence.isHidden()
    solved.space.down.setSizes([500, 200])
    sizes = solved.space.down.sizes()
    solved.space.remember()
    solved.bench.run("view.evidence")
    solved.space.down.setSizes([300, 400])
    solved.space.recall()
    assert solved.space.evidence.isHidden()
    assert solved.space.down.sizes() == sizes


def test_notices_stack_by_topic_and_run_their_button(window, qtbot):
    done = []
    window.bench.notify(Notice("first", "warning", topic="a"))
    window.bench.notify(Notice("second", "note", (("Do it", lambda: done.append(1)),), topic="b"))
    window.bench.notify(Notice("first again", "warning", topic="a"))
    assert window.notices.current.text == "first again"
    window.notices.dismiss()
    assert window.notices.current.text == "second"
    button = window.notices._buttons[0]
    qtbot.mouseClick(button, Qt.MouseButton.LeftButton)
    assert done == [1]
    assert window.notices.isHidden()


def test_an_unexpected_error_becomes_a_notice_and_a_log(window):
    from linewright.window.troubles import log_path

    before = log_path().stat().st_size if log_path().exists() else 0
    window.report_unexpected(ZeroDivisionError("an invented fault"))
    notice = window.notices.current
    assert notice.kind == "refused" and "Traceback" not in notice.text
    assert "an invented fault" in log_path().read_text("utf-8")[before:]


def test_everything_that_takes_focus_has_a_name(solved):
    for kind in (QAbstractButton, QLineEdit, QAbstractItemView):
        for widget in solved.space.findChildren(kind):
            popup = widget.window() is not solved
            if popup or widget.focusPolicy() == Qt.FocusPolicy.NoFocus or _inside(widget):
                continue
            name = widget.accessibleName() or getattr(widget, "text", lambda: "")()
            assert name or widget.toolTip(), widget


def _inside(widget) -> bool:
    """Parts of ready-made widgets (spin boxes, headers, tab scroll buttons)."""
    parent = widget.parent()
    kinds = {"QDoubleSpinBox", "QTabBar", "QTableView", "QComboBox", "QComboBoxPrivateContainer"}
    return type(parent).__name__ in kinds or "QComboBox" in type(widget).__name__ or (
        widget.objectName().startswith("qt_") or type(widget).__name__ == "QHeaderView")


def test_missing_libraries_are_named_in_one_line():
    def load(name):
        if "EGL" in name or "xcb-cursor" in name:
            raise OSError(name)

    line = complaint({"DISPLAY": ":0"}, load)
    assert line.count("\n") == 0
    assert "apt-get install -y libegl1 libxcb-cursor0" in line


def test_no_display_is_said_in_one_line():
    line = complaint({}, lambda name: None)
    assert "xvfb-run -a" in line and "QT_QPA_PLATFORM=offscreen" in line
    assert complaint({"QT_QPA_PLATFORM": "offscreen"}, lambda name: None) == ""
    assert complaint({"WAYLAND_DISPLAY": "wayland-0"}, lambda name: None) == ""


@pytest.mark.parametrize("heavy", ["scipy", "astropy", "matplotlib", "pyqtgraph"])
def test_the_empty_window_loads_nothing_heavy(heavy, tmp_path):
    code = (
        "import sys\n"
        "from linewright.window.app import application, new_window\n"
        "app = application([]); w = new_window(); w.show(); app.processEvents()\n"
        f"sys.exit(int({heavy!r} in sys.modules))\n"
    )
    import linewright

    app_dir = str(__import__("pathlib").Path(linewright.__file__).parents[1])
    environment = {"QT_QPA_PLATFORM": "offscreen", "PYTHONPATH": app_dir, "HOME": str(tmp_path),
                   "PATH": "/usr/bin"}
    assert subprocess.run([sys.executable, "-c", code], env=environment, timeout=60,
                          check=False).returncode == 0


def test_escape_closes_the_question_then_the_notice(solved, qtbot):
    solved.bench.notify(Notice("something to read", "note", topic="a"))
    solved.bench.run("view.goto")
    escape = solved.menus.actions["view.dismiss"]
    assert escape.isEnabled()
    escape.trigger()
    assert solved.ask_bar.isHidden() and not solved.notices.isHidden()
    escape.trigger()
    assert solved.notices.isHidden() and not escape.isEnabled()
