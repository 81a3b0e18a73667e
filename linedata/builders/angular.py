"""Angular momentum: 6-j symbols (Racah's formula) and line-strength fractions."""

from __future__ import annotations

from functools import lru_cache
from math import factorial, sqrt


def _triangle(a: float, b: float, c: float) -> float:
    """Racah's Delta(abc); 0 where the three do not form a triangle."""
    parts = (a + b - c, a - b + c, -a + b + c)
    if min(parts) < -1e-9 or abs(a + b + c - round(a + b + c)) > 1e-9:
        return 0.0
    top = 1.0
    for part in parts:
        top *= factorial(round(part))
    return sqrt(top / factorial(round(a + b + c) + 1))


@lru_cache(maxsize=None)
def six_j(a: float, b: float, c: float, d: float, e: float, f: float) -> float:
    """{a b c; d e f} by Racah's sum."""
    front = _triangle(a, b, c) * _triangle(a, e, f) * _triangle(d, b, f) * _triangle(d, e, c)
    if front == 0.0:
        return 0.0
    lows = [round(x) for x in (a + b + c, a + e + f, d + b + f, d + e + c)]
    highs = [round(x) for x in (a + b + d + e, b + c + e + f, c + a + f + d)]
    total = 0.0
    for t in range(max(lows), min(highs) + 1):
        below = 1.0
        for low in lows:
            below *= factorial(t - low)
        for high in highs:
            below *= factorial(high - t)
        total += (-1) ** t * factorial(t + 1) / below
    return front * total


def multiplet_fraction(spin: float, l1: float, j1: float, l2: float, j2: float) -> float:
    """Share of a multiplet's total line strength in the line J1-J2 (LS coupling)."""
    return (
        (2 * j1 + 1) * (2 * j2 + 1) * six_j(l1, j1, spin, j2, l2, 1.0) ** 2 / (2 * spin + 1)
    )
