"""View data of what is taken in: foreign tables of constants, cells of CIF files."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

from core.crystal.cell import AXES_CONVENTIONS, axes_text, axes_words, cell_mismatch
from core.editing.table import Claim, simplest_claim, with_table
from core.errors import InputError
from core.files.cif import CifCell
from core.files.foreign.guess import Guess
from core.files.foreign.readings import AS_LISTED
from core.files.matrices import FIELDS, Understood, understand
from core.numbers import significant
from core.state import Specimen
from core.study.trust.symmetry_verdict import SymmetryVerdict
from core.tensor.symmetry import crystal_class
from gui.presenting.ledger import class_choices, constants_view, is_about_class, verdict_view
from gui.presenting.sigmas import sentence
from gui.viewdata import CellFileView, ReadingChoice, TakingInView

CLAIM, AXES = "claim", "axes"
LABELS = {
    "shape": "Shape",
    "symmetry": "Which triangle",
    "kind": "Stiffness or compliance",
    "unit": "Unit",
    "rows": "Order of the rows",
    "notation": "Notation",
    "class": "Class of the list",
    CLAIM: "Crystal class",
    AXES: "Crystal axes",
}
_FREE = ("unit", "rows")
_ASIDE = {
    "kind": {"unit", "rows", "notation", "class"},
    "shape": {"symmetry", "kind", "unit", "rows", "notation", "class"},
    "rows": {"notation", "class"},
    "notation": {"class"},
}
"""Choices that another choice makes void."""
NOTHING_YET = (
    "Paste or type a table: six rows of six, a triangle, 21 numbers in a row, a list such as "
    "C11 = 168.4(3), or rows typeset with LaTeX."
)


def still_valid(choices: Mapping[str, str], changed: str) -> dict[str, str]:
    """Return the choices that hold after one of them has changed."""
    void = _ASIDE.get(changed, set()) - {changed}
    return {field: value for field, value in choices.items() if field not in void}


def read(text: str, choices: Mapping[str, str]) -> Understood:
    """Return how a text is understood, given what was chosen by hand.

    Raises
    ------
    InputError
        See `core.files.matrices.understand`.
    """
    return understand(text, {k: v for k, v in choices.items() if k in FIELDS})


def result(specimen: Specimen, known: Understood, choices: Mapping[str, str]) -> Specimen:
    """Return the specimen with the table in it.

    Raises
    ------
    InputError
        For constants that no solid has, or axes that cannot be laid in its cell.
    """
    claim = _claim(known, choices)
    return with_table(
        specimen, known, claim.class_key, claim.unique_axis,
        choices.get(AXES, specimen.crystal_axes),
    )  # fmt: skip


def result_or_questions(
    specimen: Specimen, text: str, choices: Mapping[str, str]
) -> Specimen | None:
    """Return the specimen with the table in it, None while questions are open.

    Raises
    ------
    InputError
        For choices that cannot be.
    """
    known = read(text, choices)
    return result(specimen, _settled(known), choices) if not known.questions else None


def _claim(known: Understood, choices: Mapping[str, str]) -> Claim:
    chosen = choices.get(CLAIM)
    if chosen is None:
        return simplest_claim(known)
    key, *axis = chosen.split()
    return Claim(key, axis[0] if axis else "y", "Chosen by hand.", True)


def taking_in_view(
    specimen: Specimen,
    text: str,
    choices: Mapping[str, str],
    symmetry: SymmetryVerdict | None = None,
) -> TakingInView:
    """Return how a text is read and what comes of it.

    Parameters
    ----------
    specimen : Specimen
        Into which the table goes.
    text : str
    choices : mapping
        By field of `core.files.matrices.FIELDS`, `CLAIM` or `AXES`, what was chosen by hand.
    symmetry : SymmetryVerdict, optional
        Of this very table, once the search for hidden axes is through.
    """
    if not text.strip():
        return TakingInView((), None, None, (), (), "", NOTHING_YET, False)
    try:
        known = read(text, choices)
    except InputError as error:
        return TakingInView((), None, None, (), (), str(error), "", False)
    claim = _claim(known, choices)
    axes = choices.get(AXES, specimen.crystal_axes)
    readings = (
        *(_reading(guess) for guess in known.readings),
        *_claim_reading(known, claim, CLAIM in choices),
        _axes_reading(specimen, axes, AXES in choices),
    )
    return _with_preview(specimen, known, claim, axes, readings, symmetry)


def _with_preview(
    specimen: Specimen,
    known: Understood,
    claim: Claim,
    axes: str,
    readings: tuple[ReadingChoice, ...],
    symmetry: SymmetryVerdict | None,
) -> TakingInView:
    settled = _settled(known)
    try:
        shown = with_table(specimen, settled, claim.class_key, claim.unique_axis, axes)
    except InputError as error:
        return TakingInView(readings, None, None, (), known.notes, str(error), "", False)
    guesses = sum(reading.mark == "guess" for reading in readings)
    verdict = verdict_view(shown)
    return TakingInView(
        readings,
        constants_view(shown, "stiffness"),
        replace(verdict, facts=()),
        _lines(known, symmetry, verdict.facts),
        known.notes,
        "",
        _status(len(known.questions), guesses),
        not known.questions,
    )


def _status(questions: int, guesses: int) -> str:
    if questions:
        return f"{questions} question{'s are' if questions > 1 else ' is'} open"
    if guesses:
        return f"{guesses} guess{'es' if guesses > 1 else ''}: look whether all is right"
    return "Everything is certain"


def _settled(known: Understood) -> Understood:
    """Return a table with its questions laid aside, for a preview of the likeliest reading."""
    return Understood(known.stiffness, known.std, (), known.notes)


def _lines(
    known: Understood, symmetry: SymmetryVerdict | None, facts: tuple[str, ...]
) -> tuple[str, ...]:
    about = "Looking for hidden axes …" if symmetry is None else sentence(symmetry.sentence)
    spread = "No uncertainties are written."
    if known.std is not None and known.std.any():
        sigmas = known.std[known.std > 0]
        low, high = (significant(float(x), 2) for x in (sigmas.min(), sigmas.max()))
        spread = f"Uncertainties {low} to {high} GPa." if low != high else (
            f"Uncertainties {low} GPa.")  # fmt: skip
    others = (fact for fact in facts if not is_about_class(fact))
    return about, *(sentence(fact) for fact in others), spread


# ------------------------------------------------------------------ the readings
def _reading(guess: Guess) -> ReadingChoice:
    mark = "question" if guess.question else "certain" if guess.certain else "guess"
    return ReadingChoice(
        guess.field,
        LABELS[guess.field],
        guess.value,
        tuple((choice, _choice_words(guess.field, choice)) for choice in guess.choices),
        guess.question or guess.reason,
        mark,  # type: ignore[arg-type]
        guess.field in _FREE,
    )


def _choice_words(field: str, choice: str) -> str:
    """Return a choice as the window says it; classes by their names."""
    if field != "class" or choice == AS_LISTED:
        return choice
    key, *axis = choice.split()
    return crystal_class(key).name + (f", unique {axis[0]}" if axis else "")


def _claim_reading(
    known: Understood, claim: Claim, is_chosen: bool
) -> tuple[ReadingChoice, ...]:
    """Return the class that will be claimed; a list of a class has said it already."""
    listed = known.reading("class")
    if listed is not None and not is_chosen and listed.value == claim.class_key:
        return ()
    choices = tuple(
        (f"{key} {axis}" if axis else key, f"{words}, unique {axis}" if axis else words)
        for key, words in class_choices()
        for axis in (("x", "y", "z") if key == "monoclinic" else ("",))
    )
    cls = crystal_class(claim.class_key, claim.unique_axis)
    value = f"{cls.key} {claim.unique_axis}" if cls.key == "monoclinic" else cls.key
    mark = "certain" if is_chosen or claim.certain else "guess"
    return (
        ReadingChoice(CLAIM, LABELS[CLAIM], value, choices, claim.reason, mark),  # type: ignore[arg-type]
    )


def _axes_reading(specimen: Specimen, axes: str, is_chosen: bool) -> ReadingChoice:
    text = axes_text(axes)
    pairs = dict(AXES_CONVENTIONS) | {text: axes_words(text)}
    reason = (
        "Chosen by hand."
        if is_chosen
        else "A table does not say how its axes follow the cell; these are those in use."
    )
    mark = "certain" if is_chosen else "guess"
    return ReadingChoice(AXES, LABELS[AXES], text, tuple(pairs.items()), reason, mark)  # type: ignore[arg-type]


# ------------------------------------------------------------------ cells
def cell_file_view(specimen: Specimen, found: CifCell, name: str, axes: str) -> CellFileView:
    """Return the cell of a CIF file, to be looked at before it is taken over."""
    cell, names = found.cell, ("a", "b", "c", "α", "β", "γ")
    values = (cell.a, cell.b, cell.c, cell.alpha, cell.beta, cell.gamma)
    lines = tuple(
        (label, f"{_measured(value, spread)}{'°' if number > 2 else ' Å'}")
        for number, (label, value, spread) in enumerate(
            zip(names, values, found.std, strict=True)
        )
    )
    notes = list(found.notes)
    notes.append(cell_mismatch(cell, specimen.crystal_class, specimen.unique_axis))
    if found.class_key is not None and found.class_key != specimen.crystal_class:
        notes.append(
            f"The space group in the file is {crystal_class(found.class_key).name}; the "
            f"constants claim {crystal_class(specimen.crystal_class).name}."
        )
    block = f", block {found.block}" if found.block else ""
    return CellFileView(
        f"{name}{block}",
        lines,
        tuple(note for note in notes if note),
        tuple((dict(AXES_CONVENTIONS) | {axes_text(axes): axes_words(axes)}).items()),
        axes_text(axes),
    )


def _measured(value: float, spread: float) -> str:
    """Return a number with its uncertainty as the file writes it: 4.9134(2)."""
    if not spread > 0:
        return f"{value:.10g}"
    places = next((d for d in range(10) if _is_whole(spread * 10**d)), 10)
    return f"{value:.{places}f}({round(spread * 10**places)})"


def _is_whole(number: float) -> bool:
    return abs(number - round(number)) < 1e-6
