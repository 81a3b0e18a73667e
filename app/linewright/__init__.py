"""Linewright: identify the lines of a reduced one-dimensional spectrum.

The library's entrance; every name is fetched when first used, so that ``import
linewright`` loads neither astropy nor scipy:

    from linewright import read_spectrum, load_catalogue, solve
"""

from __future__ import annotations

import importlib

__version__ = "0.1.0"

_HOMES = {
    "read_spectrum": "linewright.spectra.reading",
    "load_catalogue": "linewright.lines.loading",
    "solve": "linewright.job.solve",
    "solve_features": "linewright.job.solve",
    "SolveOptions": "linewright.job.options",
    "again": "linewright.job.again",
    "load_session": "linewright.session.file",
    "save_session": "linewright.session.file",
}

__all__ = ["__version__", *_HOMES]


def __getattr__(name: str):
    if name not in _HOMES:
        raise AttributeError(f"module 'linewright' has no attribute '{name}'")
    value = getattr(importlib.import_module(_HOMES[name]), name)
    globals()[name] = value
    return value


def __dir__() -> list[str]:
    return sorted(__all__)
