"""Where shipped data live: the checkout's copy first, the installed one otherwise."""

from __future__ import annotations

from pathlib import Path

from .errors import InputRefused

_PACKAGE = Path(__file__).resolve().parent
_CHECKOUT = _PACKAGE.parent.parent


def _find(checkout_part: str, installed_part: str) -> Path:
    in_checkout = _CHECKOUT / checkout_part
    if in_checkout.is_dir() and (_CHECKOUT / "pyproject.toml").is_file():
        return in_checkout
    installed = _PACKAGE / installed_part
    if installed.is_dir():
        return installed
    raise InputRefused(
        installed_part, "the shipped data folder is missing", "install Linewright again"
    )


def tables_dir() -> Path:
    """Folder of the shipped line tables."""
    return _find("linedata/tables", "linedata/tables")


def samples_dir() -> Path:
    """Folder of the sample spectra."""
    return _find("sample_spectra", "sample_spectra")
