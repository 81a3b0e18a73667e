"""Commands on catalogue lines; part of the command table."""

from __future__ import annotations

from .commands import Command, _Acts, _c, has_feature, has_session

lines = _Acts("lines")


def has_line(bench) -> bool:
    return bench.view.now.line is not None and bench.catalogue is not None


def can_claim(bench) -> bool:
    return has_line(bench) and has_feature(bench)


def line_commands() -> list[Command]:
    def row(name, *fields, **more):
        title, keys, *rest = fields
        return _c(f"line.{name}", title, keys, "Lines", *rest, **more)
    return [
        row("search", "Search the lines", "Ctrl+Shift+L", has_session,
            lambda b: lines.search_lines(b),
            "Type words such as Fe I 5160:5200 grade B; every word must fit"),
        row("here", "Lines about the selected feature", "Ctrl+Shift+H", has_feature,
            lambda b: lines.search_lines(b, "here"),
            "List the catalogue lines that could make it at the present velocity"),
        row("claim", "Claim with the line looked at", "Ctrl+Shift+Return | Ctrl+Shift+Enter",
            can_claim, lambda b: lines.claim_line(b),
            "The selected feature is this catalogue line, said by you",
            short="Claim with it", group=1),
        row("rake", "Put its species on the rake", "Ctrl+Shift+T", has_line,
            lambda b: lines.rake_line(b), "Put the species of the line looked at on the rake, or "
            "take it off", short="Put on rake", group=1),
        row("go", "Go to the line", "Ctrl+Shift+J", has_line, lambda b: lines.go_to_line(b),
            "Centre the view on its place at the present velocity", short="Go there", group=1),
        row("bibtex", "Copy its BibTeX entry", "Ctrl+Shift+B", has_line,
            lambda b: lines.copy_bibtex(b), "Put the BibTeX entries of the line's sources on the "
            "clipboard", short="Copy BibTeX", group=1),
    ]
