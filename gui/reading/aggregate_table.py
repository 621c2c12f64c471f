"""The moduli of a polycrystal: one line a modulus, one column a bound or an estimate."""

from __future__ import annotations

from gui.reading.small_table import SmallTable


class AggregateTable(SmallTable):
    """The small table of aggregates."""

    def __init__(self) -> None:
        super().__init__("Aggregate of randomly oriented grains")
