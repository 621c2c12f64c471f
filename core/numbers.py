"""Numbers as people write and read them: parsing what was typed, writing what is shown."""

from __future__ import annotations

import math
import re

from core.errors import InputError

MINUS = "\N{MINUS SIGN}"
UNDEFINED = "\N{EN DASH}"
_MINUSES = str.maketrans({MINUS: "-", "\N{EN DASH}": "-", "\N{NON-BREAKING HYPHEN}": "-"})
_EXPONENT = r"([eEdD][+-]?\d+)?"
_NUMBER = re.compile(rf"[+-]?(\d+\.?\d*|\.\d+){_EXPONENT}")
_GROUPED = re.compile(rf"[+-]?[1-9]\d{{0,2}}(,\d{{3}})+(\.\d*)?{_EXPONENT}")
_DECIMAL_COMMA = re.compile(rf"[+-]?\d*,\d+{_EXPONENT}")
_POWER_OF_TEN = re.compile(r"(?<=[\d.])×10([⁻⁰¹²³⁴⁵⁶⁷⁸⁹]+)$")
_LOWERED = str.maketrans("⁻⁰¹²³⁴⁵⁶⁷⁸⁹", "-0123456789")
_RAISED = str.maketrans("-0123456789", "⁻⁰¹²³⁴⁵⁶⁷⁸⁹")

_LEAST_PLAIN, _MOST_PLAIN = -4, 5  # powers of ten written out; beyond them ×10ⁿ


def parse_number(text: str, where: str = "") -> float:
    """Return the number that a field or a table cell holds.

    A Unicode minus, a Fortran exponent (1.5D+02) and a power of ten (1.5×10²) are understood.
    A decimal comma is read only where no thousands reading is possible: "168,4" is a number,
    "1,684" is not.

    Raises
    ------
    InputError
        For anything else, for NaN, and for numbers too large for a computer.
    """
    plain = _POWER_OF_TEN.sub(_as_exponent, text.strip().translate(_MINUSES))
    if not plain:
        raise InputError("The cell is empty; a number was expected.", where=where)
    if "," in plain:
        plain = _without_comma(plain, where)
    if not _NUMBER.fullmatch(plain):
        raise InputError(f"“{shortened(text)}” is not a number.", where=where)
    value = float(re.sub("[dD]", "e", plain))
    if not math.isfinite(value):
        raise InputError(f"“{shortened(text)}” is too large to be a number here.", where=where)
    return value


def _as_exponent(found: re.Match[str]) -> str:
    return f"e{found[1].translate(_LOWERED)}"


def _without_comma(plain: str, where: str) -> str:
    if _GROUPED.fullmatch(plain):
        raise InputError(
            f"“{shortened(plain)}” may mean thousands or a decimal comma.",
            "Write it with a decimal point and without grouping.",
            where,
        )
    if _DECIMAL_COMMA.fullmatch(plain):
        return plain.replace(",", ".")
    raise InputError(f"“{shortened(plain)}” is not a number.", where=where)


def shortened(text: str, length: int = 24) -> str:
    """Return the text on one line and no longer than `length`, for use in a sentence."""
    line = " ".join(text.split())
    return line if len(line) <= length else line[: length - 1] + "…"


def significant(value: float | None, digits: int = 4) -> str:
    """Return a number for the screen with `digits` significant digits and a true minus.

    Magnitudes from a million up and below 0.0001 go to powers of ten; undefined values are
    an en dash.
    """
    if value is None or not math.isfinite(value):
        return UNDEFINED
    if value == 0.0:
        return "0"
    mantissa, power = f"{value:.{digits - 1}e}".split("e")
    exponent = int(power)  # of the rounded value: 999.96 is 1000
    if not _LEAST_PLAIN <= exponent <= _MOST_PLAIN:
        return f"{mantissa}×10".replace("-", MINUS) + str(exponent).translate(_RAISED)
    decimals = max(digits - 1 - exponent, 0)
    return f"{float(f'{mantissa}e{power}'):.{decimals}f}".replace("-", MINUS)


def signed(value: float | None, digits: int = 4) -> str:
    """Return a number like `significant`, with a plus where it is positive."""
    text = significant(value, digits)
    return f"+{text}" if value is not None and math.isfinite(value) and value > 0 else text


def with_deviation(value: float, deviation: float) -> str:
    """Return "51.37 ± 0.32": two digits of the standard uncertainty, the value to that place.

    A value without an uncertainty, or with one too large or small to write out, has four
    significant digits.
    """
    spread = significant(deviation, 2)
    if not deviation > 0 or "×" in spread or not math.isfinite(value):
        return significant(value)
    place = 1 - int(f"{deviation:.1e}".split("e")[1])  # decimals of the second digit
    rounded = round(value, place) + 0.0
    return f"{rounded:.{max(place, 0)}f} ± {spread}".replace("-", MINUS)


def bracketed(value: float, deviation: float) -> str:
    """Return "51.37(32)": like `with_deviation`, the uncertainty in units of the last digit.

    An uncertainty of ten or more is written out: "168(12)", "1230(120)".
    """
    text = with_deviation(value, deviation)
    number, plus_minus, spread = text.partition(" ± ")
    if not plus_minus:
        return text
    digits = spread if float(spread) >= 10 else spread.replace(".", "").lstrip("0")
    return f"{number}({digits})"


def full_precision(value: float | None) -> str:
    """Return the shortest text that reads back to the same float, for files and copying.

    Undefined values are empty.
    """
    return "" if value is None or not math.isfinite(value) else repr(float(value))
