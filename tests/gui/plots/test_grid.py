"""Round numbers on axes: the definition of 1-2-5 steps, checked as such."""

import math

import pytest
from hypothesis import given
from hypothesis import strategies as st

from gui.plots.grid import (
    angle_ticks,
    nice_step,
    nice_ticks,
    number_text,
    short_text,
    tick_texts,
)


@pytest.mark.parametrize(
    ("low", "high", "count", "expected"),
    [
        (0.0, 10.0, 5, (0, 2, 4, 6, 8, 10)),
        (0.0, 1.0, 5, (0, 0.2, 0.4, 0.6, 0.8, 1.0)),
        (74.2, 148.9, 5, (80, 100, 120, 140)),
        (-0.31, 0.29, 6, (-0.3, -0.2, -0.1, 0.0, 0.1, 0.2)),
        (0.0, 0.3, 3, (0.0, 0.1, 0.2, 0.3)),
        (1003.0, 1004.1, 3, (1003.0, 1003.5, 1004.0)),
    ],
)
def test_known_axes(low, high, count, expected):
    assert nice_ticks(low, high, count) == pytest.approx(expected, abs=1e-12)


def test_ticks_are_clean_numbers():
    assert nice_ticks(0.0, 0.3, 3)[-1] == 0.3
    assert [repr(t) for t in nice_ticks(-0.2, 0.2, 4)] == ["-0.2", "-0.1", "0.0", "0.1", "0.2"]


@given(st.floats(-1e6, 1e6), st.floats(1e-3, 1e6), st.integers(1, 12))
def test_steps_are_one_two_or_five(low, span, count):
    high = low + span
    ticks = nice_ticks(low, high, count)
    assert len(ticks) <= count + 1
    step = nice_step(high - low, count)
    mantissa = step / 10.0 ** math.floor(math.log10(step) + 1e-9)
    assert any(mantissa == pytest.approx(nice) for nice in (1.0, 2.0, 5.0))
    # No smaller round step would do: the next one below gives too many.
    smaller = {1.0: 0.5, 2.0: 0.5, 5.0: 0.4}[round(mantissa)]
    assert (high - low) / (step * smaller) > count * (1 - 1e-6)
    for tick in ticks:
        assert low - 1e-6 * step <= tick <= high + 1e-6 * step
        assert tick / step == pytest.approx(round(tick / step), abs=1e-5)


def test_degenerate_ends():
    assert nice_ticks(3.0, 3.0, 5) == (3.0,)
    assert nice_ticks(math.nan, 1.0, 5) == ()
    assert nice_ticks(0.0, math.inf, 5) == ()
    with pytest.raises(ValueError, match="span"):
        nice_step(0.0, 4)


def test_angles_divide_the_right_angle():
    assert angle_ticks(-90.0, 90.0, 7) == (-90, -60, -30, 0, 30, 60, 90)
    assert angle_ticks(-90.0, 90.0, 4) == (-90, -45, 0, 45, 90)
    assert angle_ticks(-2.0, 2.0, 4) == (-2, -1, 0, 1, 2)
    assert angle_ticks(-0.2, 0.2, 4) == pytest.approx((-0.2, -0.1, 0.0, 0.1, 0.2))


def test_texts_have_one_precision_and_a_true_minus():
    assert tick_texts((-0.5, 0.0, 0.5)) == ("\u22120.5", "0.0", "0.5")
    assert tick_texts((80.0, 100.0, 120.0)) == ("80", "100", "120")
    assert number_text(-14.3) == "\u221214.30"
    assert number_text(112.36) == "112.4"
    assert number_text(1234.5) in ("1234", "1235")
    assert number_text(0.0123456) == "0.01235"
    assert number_text(1.5e9) == "1.5e9"
    assert number_text(math.nan) == "–"
    assert short_text(100.0) == "100"
    assert short_text(0.25) == "0.25"
