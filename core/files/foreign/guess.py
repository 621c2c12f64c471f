"""What was understood of a foreign table, one thing at a time, with the reason for it."""

from __future__ import annotations

from dataclasses import dataclass, replace

from core.arrays import FloatArray
from core.errors import InputError


@dataclass(frozen=True)
class Guess:
    """One thing that was understood of a table.

    Attributes
    ----------
    field : str
        "shape", "symmetry", "kind", "unit", "rows", "notation" or "class".
    value : str
    reason : str
        A plain sentence.
    certain : bool
        Whether the text says so, or nothing else is possible.
    choices : tuple of str
        What else may be chosen, the value among them.
    question : str
        What must be asked before the table can be used; empty where nothing.
    """

    field: str
    value: str
    reason: str
    certain: bool
    choices: tuple[str, ...]
    question: str = ""

    @property
    def is_guess(self) -> bool:
        """Whether it rests on the numbers alone."""
        return not self.certain


@dataclass(frozen=True, eq=False)
class RawTable:
    """A table before its meaning is known.

    Attributes
    ----------
    values : ndarray, shape (6, 6)
        As written; NaN where a list names nothing.
    sigmas : ndarray, shape (6, 6)
        0 where no uncertainty is written.
    """

    values: FloatArray
    sigmas: FloatArray

    @property
    def has_sigmas(self) -> bool:
        """Whether any uncertainty is written."""
        return bool(self.sigmas.any())


def choose(guess: Guess, chosen: str | None) -> Guess:
    """Return the guess with what the user chose in its place.

    Raises
    ------
    InputError
        When it is none of the choices.
    """
    if chosen is None:
        return guess
    if chosen not in guess.choices:
        raise InputError(f"“{chosen}” is no {guess.field} of a table.",
                         f"Choose {', '.join(guess.choices)}.", guess.field)
    return replace(guess, value=chosen, reason="Chosen by hand.", certain=True, question="")
