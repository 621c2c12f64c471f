"""The one exception for what a user can put right."""


class InputError(Exception):
    """Something the user gave cannot be used, said in one plain sentence.

    Parameters
    ----------
    message : str
        Names what was read and what was expected: "Row 3, column 5: 'abc' is not a number".
    hint : str
        What would be accepted, or what to do next. May be empty.
    where : str
        The field, file or line it concerns. May be empty.

    Notes
    -----
    Wrong use of the program by the program is a bug and raises `TypeError` or `ValueError`.
    """

    def __init__(self, message: str, hint: str = "", where: str = "") -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint
        self.where = where

    def __str__(self) -> str:
        """Return the whole sentence: where, what, and the hint."""
        place = f"{self.where}: " if self.where else ""
        advice = f" {self.hint}" if self.hint else ""
        return f"{place}{self.message}{advice}"
