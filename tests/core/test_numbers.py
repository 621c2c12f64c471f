"""Numbers as typed and as shown: examples worked by hand, and round trips through Python."""

import math

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.errors import InputError
from core.numbers import (
    bracketed,
    full_precision,
    parse_number,
    shortened,
    signed,
    significant,
    with_deviation,
)

FINITE = st.floats(allow_nan=False, allow_infinity=False)


@pytest.mark.parametrize(
    ("text", "value"),
    [
        ("168.4", 168.4),
        ("  -17.91 ", -17.91),
        ("−17.91", -17.91),  # minus sign U+2212
        ("–3", -3.0),  # en dash, as copied from a PDF
        ("\N{NON-BREAKING HYPHEN}3", -3.0),
        ("+4", 4.0),
        (".5", 0.5),
        ("5.", 5.0),
        ("1.5e2", 150.0),
        ("1.5D+02", 150.0),
        ("1.5d-2", 0.015),
        ("168,4", 168.4),
        ("-0,25", -0.25),
        (",5", 0.5),
        ("1684,25", 1684.25),
        ("0,123", 0.123),  # no thousands begin with a zero
        ("1,5e3", 1500.0),
    ],
)
def test_what_people_type_is_read(text, value):
    assert parse_number(text) == value


@pytest.mark.parametrize("text", ["1,684", "-12,345", "1,234,567", "1,234.5", "1,234e2"])
def test_a_comma_that_may_group_thousands_is_refused(text):
    with pytest.raises(InputError, match="thousands or a decimal comma"):
        parse_number(text)


@pytest.mark.parametrize(
    "text",
    ["abc", "12 345", "1.2.3", "1.234,5", "--3", "1e", "0x10", "1_000", "nan", "inf",
     "-Infinity", "1,2,3", "5 GPa", "²"],
)  # fmt: skip
def test_what_is_no_number_is_refused(text):
    with pytest.raises(InputError, match="is not a number"):
        parse_number(text)


def test_the_sentence_names_the_place_and_the_text():
    with pytest.raises(InputError) as caught:
        parse_number("abc", "C14")
    assert str(caught.value) == "C14: “abc” is not a number."
    with pytest.raises(InputError, match="The cell is empty"):
        parse_number("  ")
    with pytest.raises(InputError, match="too large"):
        parse_number("1e400")


def test_a_long_text_is_quoted_in_part_and_on_one_line():
    assert shortened("a\n  b\tc") == "a b c"
    assert shortened("x" * 30) == "x" * 23 + "…"
    assert shortened("x" * 24) == "x" * 24
    with pytest.raises(InputError) as caught:
        parse_number("very\n" * 1000)
    assert len(str(caught.value)) < 60


@pytest.mark.parametrize(
    ("value", "digits", "text"),
    [
        (168.4, 4, "168.4"),
        (168.449, 4, "168.4"),
        (-17.91, 4, "−17.91"),
        (0.0, 4, "0"),
        (-0.0, 4, "0"),
        (1.0, 4, "1.000"),
        (999.96, 4, "1000"),
        (0.99996, 4, "1.000"),
        (0.00012345, 3, "0.000123"),
        (0.000012345, 3, "1.23×10⁻⁵"),
        (-1.5e-16, 2, "−1.5×10⁻¹⁶"),
        (123456.0, 4, "123500"),
        (999999.0, 4, "1.000×10⁶"),
        (1.684e11, 4, "1.684×10¹¹"),
        (5e-324, 2, "4.9×10⁻³²⁴"),
        (None, 4, "–"),
        (math.nan, 4, "–"),
        (-math.inf, 4, "–"),
    ],
)
def test_significant_digits_on_screen(value, digits, text):
    assert significant(value, digits) == text


def test_a_sign_is_shown_on_request():
    assert signed(2.5, 2) == "+2.5"
    assert signed(-2.5, 2) == "−2.5"
    assert signed(0.0) == "0"
    assert signed(None) == signed(math.nan) == "–"


@pytest.mark.parametrize(
    ("value", "deviation", "text"),
    [
        (51.3713, 0.3187, "51.37 ± 0.32"),
        (-8.7, 0.996, "−8.7 ± 1.0"),
        (1234.5, 32.0, "1234 ± 32"),
        (1234.5, 320.0, "1230 ± 320"),
        (-0.001, 0.2, "0.00 ± 0.20"),
        (3.0, 0.0, "3.000"),
        (3.0, math.nan, "3.000"),
        (3.0, 1e-9, "3.000"),
        (math.nan, 0.1, "–"),
    ],
)
def test_digits_follow_the_uncertainty(value, deviation, text):
    assert with_deviation(value, deviation) == text


@settings(deadline=None)
@given(FINITE)
def test_full_precision_reads_back_to_the_same_float(value):
    assert parse_number(full_precision(value)) == value


def test_undefined_values_are_copied_as_nothing():
    assert full_precision(None) == full_precision(math.nan) == full_precision(math.inf) == ""


@settings(deadline=None)
@given(st.one_of(st.floats(1e-4, 999_999.9), st.floats(-999_999.9, -1e-4)), st.integers(1, 12))
def test_what_is_shown_is_right_to_half_a_unit_of_the_last_digit(value, digits):
    shown = significant(value, digits).replace("×10⁶", "e6")  # 999999.9 rounds to a million
    off = abs(parse_number(shown) - value)
    assert off <= 0.5000001 * 10.0 ** (math.floor(math.log10(abs(value))) + 1 - digits)


@settings(deadline=None)
@given(FINITE)
def test_what_is_shown_has_the_digits_asked_for(value):
    text = significant(value, 5)
    mantissa = text.split("×")[0].replace("−", "").replace(".", "").lstrip("0")
    assert value == 0 or len(mantissa) in (5, 6)  # six whole digits where 5 are rounded off
    assert "-" not in text


@pytest.mark.parametrize(
    ("value", "deviation", "text"),
    [
        (51.372, 0.321, "51.37(32)"),
        (-0.0312, 0.0021, "−0.0312(21)"),
        (168.4, 12.3, "168(12)"),
        (1234.0, 120.0, "1230(120)"),
        (3.21, 1.25, "3.2(12)"),
        (5.0, 0.0, "5.000"),
    ],
)
def test_brackets_hold_the_uncertainty_of_the_last_digits(value, deviation, text):
    # The notation of the Guide to the Expression of Uncertainty, 7.2.2.
    assert bracketed(value, deviation) == text


@pytest.mark.parametrize("value", [1.234e-7, -9.99e12, 6.02e23])
def test_what_is_shown_with_a_power_of_ten_reads_back(value):
    assert parse_number(significant(value)) == pytest.approx(value, rel=1e-3)
