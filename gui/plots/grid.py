"""Round numbers for axes and rings, and numbers as text on them. Knows nothing of Qt."""

from __future__ import annotations

import math

MINUS = "\u2212"
_STEPS = (1.0, 2.0, 5.0, 10.0)
_ANGLE_STEPS = (1.0, 2.0, 5.0, 10.0, 15.0, 30.0, 45.0, 90.0)
# A tick this near an end, as a fraction of a step, counts as inside: 0.3 is not 3 × 0.1.
_SLACK = 1e-9
_LARGEST_PLAIN = 1e6
_SMALLEST_STEP_PLAIN = 1e-6


def nice_step(span: float, count: int) -> float:
    """Return the smallest of 1, 2, 5 × 10^k that divides a span into at most `count` steps.

    Raises
    ------
    ValueError
        When the span is not a positive finite number or `count` is below one.
    """
    if not (math.isfinite(span) and span > 0.0) or count < 1:
        raise ValueError(f"no steps for a span of {span} in {count}")
    rough = span / count
    decade = 10.0 ** math.floor(math.log10(rough))
    return next(step * decade for step in _STEPS if step * decade >= rough * (1.0 - _SLACK))


def nice_ticks(low: float, high: float, count: int) -> tuple[float, ...]:
    """Return the round numbers from `low` to `high`: at most `count` + 1 of them, ascending.

    Steps are 1, 2 or 5 × 10^k. An empty interval gives its one number, ends that are not
    finite give nothing.
    """
    if not (math.isfinite(low) and math.isfinite(high)):
        return ()
    if high <= low:
        return (low,)
    step = nice_step(high - low, count)
    first = math.ceil(low / step - _SLACK)
    last = math.floor(high / step + _SLACK)
    # Integer multiples, cleaned of the last binary digits: 0.30000000000000004 is 0.3.
    digits = max(0, 12 - math.floor(math.log10(step)))
    return tuple(
        round(index * step, min(digits, 300)) + 0.0 for index in range(first, last + 1)
    )


def angle_ticks(low: float, high: float, count: int) -> tuple[float, ...]:
    """Return about `count` angles, degrees, by a step that divides a right angle well."""
    span = high - low
    if not (math.isfinite(span) and span > 0.0):
        return nice_ticks(low, high, count)
    step = next((s for s in _ANGLE_STEPS if s >= span / count), _ANGLE_STEPS[-1])
    if span / count < _ANGLE_STEPS[0]:
        return nice_ticks(low, high, count)
    first, last = math.ceil(low / step - _SLACK), math.floor(high / step + _SLACK)
    return tuple(index * step + 0.0 for index in range(first, last + 1))


def tick_texts(ticks: tuple[float, ...]) -> tuple[str, ...]:
    """Return texts for ticks of even step, all with the decimals that the step needs."""
    if len(ticks) < 2:
        return tuple(number_text(tick) for tick in ticks)
    step = ticks[1] - ticks[0]
    largest = max(abs(tick) for tick in ticks)
    if largest >= _LARGEST_PLAIN or step < _SMALLEST_STEP_PLAIN:
        return tuple(number_text(tick) for tick in ticks)
    decimals = max(0, -math.floor(math.log10(step) + _SLACK))
    return tuple(f"{tick:.{decimals}f}".replace("-", MINUS) for tick in ticks)


def number_text(value: float, digits: int = 4) -> str:
    """Return a number with so many significant digits, a true minus, and "–" for NaN."""
    if math.isnan(value):
        return "–"
    text = f"{value:#.{digits}g}".removesuffix(".")
    if "e" not in text:
        return text.replace("-", MINUS)
    mantissa, exponent = text.split("e")
    mantissa = mantissa.rstrip("0").removesuffix(".")
    return f"{mantissa}e{int(exponent)}".replace("-", MINUS)


def short_text(value: float) -> str:
    """Return a number without trailing zeros, for labels of levels and rings."""
    text = number_text(value)
    return text.rstrip("0").removesuffix(".") if "." in text and "e" not in text else text
