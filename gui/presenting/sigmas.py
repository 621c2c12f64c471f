"""Uncertainties in words and numbers, as the tables of the reading show them."""

from __future__ import annotations

from dataclasses import dataclass

from core.directional.quantities import quantity
from core.numbers import bracketed, signed, significant, with_deviation
from core.study.uncertainty.draws import COUNT
from gui.presenting.spread import Deviations, PinSpread, Place
from gui.presenting.stage import SHEET_NAMES

DIFFERENCE_BRACKETS = "In brackets: the standard uncertainty of B − A, in its last digits."
NOTHING = 1e-9  # in any unit that is shown: what is less uncertain than this is rounding
_DRAWN = {"young": "E", "phase": "v"}


def sentence(text: str) -> str:
    """Return words as a sentence, with a class's number of constants in plain words."""
    plain = text.replace(", 6 const", " with 6 const").replace(", 7 const", " with 7 const")
    return f"{plain[0].upper()}{plain[1:]}."


def number_text(value: float, sigma: float) -> str:
    """Return "51.37 ± 0.32"; four significant digits where nothing is uncertain."""
    return with_deviation(value, sigma if sigma > NOTHING else 0.0)


def rounded(value: float, sigma: float) -> str:
    """Return "51.37": the digits that the uncertainty leaves, where there is no room for it."""
    return number_text(value, sigma).split(" ")[0]


def plain_or_bracketed(value: float, sigma: float) -> str:
    """Return "51.37(32)"; four significant digits where nothing is uncertain."""
    return bracketed(value, sigma if sigma > NOTHING else 0.0)


@dataclass(frozen=True)
class RowSigmas:
    """Standard uncertainties of the rows at the pin.

    Attributes
    ----------
    first, second, difference : dict
        By place: of the first side shown, of B beside A, of B − A.
    beside : bool
        Whether A and B stand beside each other: then their difference has the room.
    drawn : dict
        By place what draws give instead, where they differ notably.
    """

    first: Deviations
    second: Deviations
    difference: Deviations
    beside: bool
    drawn: Deviations


def sigma_words(unit: str, place: Place, sigmas: RowSigmas) -> tuple[str, ...]:
    """Return the uncertainty of a row in words, and what draws give where they differ."""
    own, other = sigmas.first.get(place, 0.0), sigmas.second.get(place, 0.0)
    if not own > NOTHING:
        return ()
    words = f"± {significant(own, 2)}"
    if other > NOTHING:
        words += f" in A, ± {significant(other, 2)} in B"
    lines = [f"{words} {unit}".rstrip() + ": one standard uncertainty."]
    drawn = sigmas.drawn.get(place)
    if drawn is not None:
        lines.append(f"{COUNT:,} draws of the constants give ± {significant(drawn, 2)}.")
    return tuple(lines)


def difference_text(difference: float, sigma: float) -> str:
    """Return B − A as "+5.77(61)"; of one crystal the errors of both go together."""
    if not sigma > NOTHING:
        return signed(difference, 3)
    text = bracketed(difference, sigma)
    return f"+{text}" if difference > 0 else text


def drawn_otherwise(spread: PinSpread | None, side: str) -> Deviations:
    """Return, by place, what draws give at the pin where they differ by more than 20 %."""
    drawn = None if spread is None else spread.draws.get(side)
    if drawn is None:
        return {}
    found: Deviations = {}
    for key, of in drawn.spreads.items():
        label = quantity(key).short
        groups = ("stiffness",) if key == "young" else [f"{n} wave" for n in SHEET_NAMES]
        for sheet, group in enumerate(groups):
            if of.differs[sheet, 0]:
                found[group, label] = float(of.deviation[sheet, 0])
    return found


def draws_notice(spread: PinSpread | None) -> str:
    """Return where draws at the pin contradict the linear uncertainties; else nothing."""
    if spread is None:
        return ""
    names = []
    for side, drawn in spread.draws.items():
        for key, of in drawn.spreads.items():
            for sheet in range(len(of.mean)):
                if of.differs[sheet, 0]:
                    wave = f"{SHEET_NAMES[sheet]} " if key == "phase" else ""
                    names.append(f"{wave}{_DRAWN[key]} ({side})")
    if not names:
        return ""
    return (
        f"{COUNT:,} draws give another ± than the linear one, by more than 20 %, for "
        f"{', '.join(names)}."
    )
