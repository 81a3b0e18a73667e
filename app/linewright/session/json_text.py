"""Deterministic JSON: sorted keys, shortest exact floats, NaN as null, one column a line.

Infinity is written 1e999, a JSON number beyond the range of doubles, which reads back as
infinity.
"""

from __future__ import annotations

import json

import numpy as np


_STRICT = json.JSONEncoder(allow_nan=False, sort_keys=True, separators=(",", ":"))
_LOOSE = json.JSONEncoder(allow_nan=True, separators=(",", ":"))


def column(values) -> str:
    """A JSON array of a whole column (array, numbers or strings), quickly."""
    items = values.tolist() if isinstance(values, np.ndarray) else list(values)
    if items and isinstance(items[0], float):
        # a column of floats holds no text that the replacements could touch
        return _LOOSE.encode(items).replace("NaN", "null").replace("Infinity", "1e999")
    return compact(items)


def compact(value) -> str:
    """JSON of plain data on one line, keys sorted."""
    try:
        return _STRICT.encode(value)
    except ValueError:
        return _with_infinities(value)


def _with_infinities(value) -> str:
    if isinstance(value, float):
        text = repr(float(value))
        return {"nan": "null", "inf": "1e999", "-inf": "-1e999"}.get(text, text)
    if isinstance(value, dict):
        pairs = (f"{compact(key)}:{_with_infinities(value[key])}" for key in sorted(value))
        return "{" + ",".join(pairs) + "}"
    if isinstance(value, (list, tuple)):
        return "[" + ",".join(map(_with_infinities, value)) + "]"
    return compact(value)


class Columns(dict):
    """A table: column name -> JSON text of the column."""


class Rows(list):
    """A list whose items are written one a line."""


def document(parts: dict) -> str:
    """The whole file: one part a line, tables one column a line, Rows one item a line."""
    lines = [f"{compact(key)}: {_part(parts[key])}" for key in sorted(parts)]
    return "{\n" + ",\n".join(lines) + "\n}\n"


def _part(value) -> str:
    if isinstance(value, Columns):
        return "{\n" + ",\n".join(f" {compact(k)}: {value[k]}" for k in sorted(value)) + "\n}"
    if isinstance(value, Rows):
        return "[\n" + ",\n".join(f" {compact(item)}" for item in value) + "\n]" if value else "[]"
    return compact(value)


def parse(text: str):
    """Plain data of JSON text.

    ValueError for NaN literals, repeated keys, integers beyond 64 bits or broken text.
    """
    return json.loads(text, parse_constant=_refuse, parse_int=_integer, object_pairs_hook=_once)


def _integer(text: str) -> int:
    if len(text) > 18:
        raise ValueError("an integer is too large")
    return int(text)


def _refuse(name: str):
    raise ValueError(f"{name} is not JSON")


def _once(pairs: list) -> dict:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise ValueError("a key is repeated")
    return found
