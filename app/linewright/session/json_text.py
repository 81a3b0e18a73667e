"""Deterministic JSON: sorted keys, shortest exact floats, NaN as null, one column a line.

Infinity is written 1e999, a JSON number beyond the range of doubles, which reads back as
infinity.
"""

from __future__ import annotations

import json

import numpy as np


def column(values) -> str:
    """A JSON array of a whole column (array, numbers or strings), quickly."""
    items = values.tolist() if isinstance(values, np.ndarray) else list(values)
    if items and isinstance(items[0], float):
        return "[" + ",".join(map(_float, items)) + "]"
    return compact(items)


def _float(value: float) -> str:
    text = repr(value)
    return {"nan": "null", "inf": "1e999", "-inf": "-1e999"}.get(text, text)


def compact(value) -> str:
    """JSON of plain data on one line, keys sorted."""
    if isinstance(value, float):
        return _float(float(value))
    if isinstance(value, dict):
        items = (f"{_text(key)}:{compact(value[key])}" for key in sorted(value))
        return "{" + ",".join(items) + "}"
    if isinstance(value, (list, tuple)):
        return "[" + ",".join(map(compact, value)) + "]"
    return _text(value)


def _text(value) -> str:
    return json.dumps(value, ensure_ascii=True, allow_nan=False)


class Columns(dict):
    """A table: column name -> JSON text of the column."""


class Rows(list):
    """A list whose items are written one a line."""


def document(parts: dict) -> str:
    """The whole file: one part a line, tables one column a line, Rows one item a line."""
    lines = [f"{_text(key)}: {_part(parts[key])}" for key in sorted(parts)]
    return "{\n" + ",\n".join(lines) + "\n}\n"


def _part(value) -> str:
    if isinstance(value, Columns):
        return "{\n" + ",\n".join(f" {_text(k)}: {value[k]}" for k in sorted(value)) + "\n}"
    if isinstance(value, Rows):
        return "[\n" + ",\n".join(f" {compact(item)}" for item in value) + "\n]" if value else "[]"
    return compact(value)


def parse(text: str):
    """Plain data of JSON text; ValueError for NaN literals, repeated keys or broken text."""
    return json.loads(text, parse_constant=_refuse, object_pairs_hook=_once)


def _refuse(name: str):
    raise ValueError(f"{name} is not JSON")


def _once(pairs: list) -> dict:
    found = dict(pairs)
    if len(found) != len(pairs):
        raise ValueError("a key is repeated")
    return found
