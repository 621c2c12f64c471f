"""Interleaved medians, so that a busy machine slows all candidates alike."""

import statistics
import time
from collections.abc import Callable
from dataclasses import dataclass


@dataclass(frozen=True)
class Line:
    """One printed line: what was measured, what it is compared with, what it should reach."""

    name: str
    milliseconds: float
    ratio: float | None = None
    ratio_words: str = ""
    gate: str = ""
    met: bool | None = None

    def text(self) -> str:
        ratio = "" if self.ratio is None else f"{self.ratio:7.1f} {self.ratio_words}"
        mark = {True: "met", False: "MISSED", None: ""}[self.met]
        return f"{self.name:58} {self.milliseconds:9.3f} ms  {ratio:36} {self.gate:20} {mark}"


def medians(
    candidates: dict[str, Callable[[], object]], seconds: float = 0.6, most: int = 300
) -> dict[str, float]:
    """Return the median milliseconds of each candidate, run in turns.

    Every timed run follows one of its own kind, as edits follow edits: what another candidate
    leaves in the caches is not charged to it.
    """
    _settle_memory()
    for run in candidates.values():
        run()
    times: dict[str, list[float]] = {name: [] for name in candidates}
    end = time.perf_counter() + seconds
    for turn in range(most):
        for name, run in candidates.items():
            run()
            start = time.perf_counter()
            run()
            times[name].append(1e3 * (time.perf_counter() - start))
        if turn >= 6 and time.perf_counter() > end:
            break
    return {name: statistics.median(values) for name, values in times.items()}


def _settle_memory() -> None:
    """Free one large array: from then on malloc keeps pages, as in a program that has run."""
    bytearray(32_000_000)


def at_most(name: str, milliseconds: float, limit: float) -> Line:
    """Return a line with a limit in milliseconds."""
    return Line(name, milliseconds, gate=f"<= {limit:g} ms", met=milliseconds <= limit)
