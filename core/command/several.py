"""The same work on several files: those that can be used are finished, the others named."""

from __future__ import annotations

from collections.abc import Callable, Sequence
from typing import Any, TypeVar

from core.errors import InputError

Outcome = tuple[Any, Callable[[Any], str]]
"""Results made of dicts, lists and numbers, and what writes them as a page."""

_Item = TypeVar("_Item")
_Result = TypeVar("_Result")


class SomeFailedError(Exception):
    """Some of several files cannot be used; the results of the others are complete.

    Parameters
    ----------
    outcome : Outcome or None
        None where none could be used.
    count : int
        How many there were.
    errors : sequence of InputError
    """

    def __init__(
        self, outcome: Outcome | None, count: int, errors: Sequence[InputError]
    ) -> None:
        super().__init__(f"{len(errors)} of {count} files cannot be used")
        self.outcome = outcome
        self.count = count
        self.errors = tuple(errors)


def for_each(
    items: Sequence[_Item], work: Callable[[_Item], _Result]
) -> tuple[list[_Result], list[InputError]]:
    """Return the results of some work on each of several things, and what went wrong.

    Raises
    ------
    InputError
        Where there is one thing only and it fails.
    """
    if len(items) == 1:
        return [work(items[0])], []
    results: list[_Result] = []
    errors: list[InputError] = []

    def attempt(item: _Item) -> None:
        try:
            results.append(work(item))
        except InputError as error:
            errors.append(error)

    for item in items:
        attempt(item)
    return results, errors


def told(
    results: Sequence[Any], errors: Sequence[InputError], page: Callable[[Any], str]
) -> Outcome:
    """Return the outcome of work on several things: one result alone, else a list.

    Raises
    ------
    SomeFailedError
        Where something went wrong; the results are still a list then.
    """
    if errors:
        outcome = (list(results), page) if results else None
        raise SomeFailedError(outcome, len(results) + len(errors), errors)
    return (list(results) if len(results) > 1 else results[0]), page
