"""Paired rounds: every act once a round in random order, ratios taken within the round."""

from __future__ import annotations

import gc
import random
import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass

CONTROL_LOW, CONTROL_HIGH = 0.9, 1.1


@dataclass(frozen=True)
class Act:
    """prepare runs untimed before each timed ``run``; ``check`` after it, untimed."""

    name: str
    run: Callable[[], None]
    prepare: Callable[[], None] = lambda: None
    check: Callable[[], None] = lambda: None


@dataclass(frozen=True)
class Timing:
    """Thread times of each act per round, seconds; rounds of all acts are parallel."""

    seconds: dict[str, list[float]]

    def ratio(self, act: str, base: str) -> float:
        """Median of the ratios within each round."""
        pairs = zip(self.seconds[act], self.seconds[base], strict=True)
        return statistics.median(a / b for a, b in pairs)

    def milliseconds(self, act: str) -> float:
        return 1e3 * statistics.median(self.seconds[act])


def measure(acts: list[Act], rounds: int, drain: Callable[[], None]) -> Timing:
    """Time acts in paired rounds, garbage collector off, events drained outside."""
    seconds: dict[str, list[float]] = {act.name: [] for act in acts}
    order = random.Random(0)
    for act in acts:  # first runs fill caches that a user fills once
        _timed(act, drain)
    for _ in range(rounds):
        for act in order.sample(acts, len(acts)):
            seconds[act.name].append(_timed(act, drain))
    return Timing(seconds)


def _timed(act: Act, drain: Callable[[], None]) -> float:
    act.prepare()
    drain()
    gc.collect(0)
    gc.disable()
    try:
        start = time.thread_time()
        act.run()
        took = time.thread_time() - start
    finally:
        gc.enable()
    act.check()
    drain()
    return took


def steady(control: float) -> bool:
    """Whether the A'/A control says that the ratios of this run mean something."""
    return CONTROL_LOW <= control <= CONTROL_HIGH


def show(timing: Timing, words: dict[str, str], base: str) -> None:
    """Prints the control A'/A, and each act of ``words`` as a ratio to A with its time.

    base: what A is, in words
    """
    control = timing.ratio("A'", "A")
    print(f"control A'/A {control:.2f}, {'steady' if steady(control) else 'noisy'}; "
          f"A ({base}) {timing.milliseconds('A'):.0f} ms; {len(timing.seconds['A'])} rounds")
    for name, said in words.items():
        print(f"{said:58} {timing.ratio(name, 'A'):7.2f} A {timing.milliseconds(name):8.1f} ms")
