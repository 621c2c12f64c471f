"""Uncertainties shown: against tables drawn anew, propagated by brute force."""

from dataclasses import replace

import numpy as np
import pytest

from core.state import OrientationChoice, as_matrix
from core.task import Ticker
from gui.presenting import deck, ledger, reading, spread
from tests.gui.presenting.benches import (
    CUBIC,
    DENSITY,
    NEGATIVE,
    PIN,
    STATE,
    looked_at,
    speeds,
    table_of,
    young,
)
from tests.materials import cubic

N = np.array(PIN)[:, None]
SIGMA = 0.4


def uncertain(state, sigma=SIGMA):
    """Return the state with the same uncertainty of all constants of its crystal."""
    specimen = state.specimen
    kinds = np.array(specimen.stiffness) != 0
    return replace(
        state, specimen=replace(specimen, stiffness_std=as_matrix(sigma * kinds))
    )


UNCERTAIN = uncertain(STATE)
# C11 − C12 = 4 ± 5.7, and a crystal only where it is positive: E scatters over half a bell.
NEAR_INSTABILITY = uncertain(
    replace(
        CUBIC,
        specimen=replace(CUBIC.specimen, stiffness=as_matrix(cubic(100.0, 96.0, 50.0))),
        pin=(0.0, 0.0, 1.0),
    ),
    4.0,
)


def by_differences(function, state, side="A"):
    """Return √Σ (σ ∂f/∂C_IJ)² over the 21 constants in crystal axes, by differences."""
    table, h = np.array(state.specimen.stiffness), 1e-4
    total = 0.0
    for i in range(6):
        for j in range(i, 6):
            step = np.zeros((6, 6))
            step[i, j] = step[j, i] = h
            ahead, behind = (
                function(replace(state, specimen=replace(
                    state.specimen, stiffness=as_matrix(table + sign * step))))
                for sign in (1, -1)
            )  # fmt: skip
            total += (SIGMA * (ahead - behind) / (2 * h)) ** 2
    return np.sqrt(total)


def young_at_pin(state, side="A"):
    return young(table_of(state, side), N)[0]


def v_fast(state, side="A"):
    return speeds(table_of(state, side), DENSITY, N)[0, 0]


def all_at_pin(state):
    return spread.spread_at_pin(spread.pin_request(state), Ticker())


# ------------------------------------------------------------------ at the pin
def test_young_and_the_speeds_at_the_pin_have_their_uncertainty_at_once():
    found = spread.quick_deviations(UNCERTAIN)
    assert set(found) == {"A", "B"}
    for side in "AB":
        place = ("stiffness", "E")
        expected = by_differences(lambda s, side=side: young_at_pin(s, side), UNCERTAIN)
        assert found[side][place] == pytest.approx(expected, rel=1e-5)
        v = by_differences(lambda s, side=side: v_fast(s, side), UNCERTAIN)
        assert found[side]["fastest wave", "v"] == pytest.approx(v, rel=1e-5)
        # 1/v errs by δv/v², and the impedance by ρ δv.
        speed = v_fast(UNCERTAIN, side)
        assert found[side]["fastest wave", "1/v"] == pytest.approx(v / speed**2, rel=1e-5)
        assert found[side]["fastest wave", "Z"] == pytest.approx(2.65 * v, rel=1e-5)


def test_nothing_is_uncertain_where_nothing_is_known():
    assert spread.quick_deviations(STATE) == {}
    assert spread.pin_request(STATE) is None
    assert spread.table_request(STATE, STATE.specimen) is None
    row = reading.reading_view(looked_at(STATE, layout="A")).rows[0]
    assert "±" not in row.a


def test_of_one_crystal_cut_two_ways_the_errors_of_the_difference_go_together():
    found = all_at_pin(UNCERTAIN)
    expected = by_differences(
        lambda s: young_at_pin(s, "B") - young_at_pin(s, "A"), UNCERTAIN
    )
    place = ("stiffness", "E")
    assert found.differences[place] == pytest.approx(expected, rel=1e-5)
    same = replace(UNCERTAIN, orientation_b=UNCERTAIN.orientation_a)
    assert all_at_pin(same).differences[place] < 1e-9


def test_two_crystals_err_apart():
    other = replace(UNCERTAIN, other=replace(UNCERTAIN.specimen, name="another"))
    found = all_at_pin(other)
    place = ("stiffness", "E")
    a, b = found.pin["A"][place], found.pin["B"][place]
    assert found.differences[place] == pytest.approx(np.hypot(a, b), rel=1e-9)


def test_every_row_at_the_pin_is_given_its_uncertainty():
    view = reading.reading_view(looked_at(UNCERTAIN, layout="A"), all_at_pin(UNCERTAIN))
    assert [row.label for row in view.rows if "±" not in row.a] == []
    # E ± σ: the value to the place of the second digit of σ.
    number, sigma = view.rows[0].a.split(" ± ")
    places = len(sigma.partition(".")[2])
    assert number == f"{young_at_pin(UNCERTAIN):.{places}f}"
    assert float(sigma) == pytest.approx(by_differences(young_at_pin, UNCERTAIN), rel=0.05)


def test_beside_each_other_the_difference_has_the_brackets():
    view = reading.reading_view(UNCERTAIN, all_at_pin(UNCERTAIN))
    row = view.rows[0]
    assert row.difference.endswith(")")
    assert "±" not in row.a
    assert "in A" in row.tooltip
    assert "in B" in row.tooltip
    assert "B − A" in view.notice


def test_measure_better_names_the_constant_that_alone_is_uncertain():
    sigma = np.zeros((6, 6))
    sigma[3, 3] = 1.0
    state = looked_at(CUBIC, layout="A")
    state = replace(state, specimen=replace(state.specimen, stiffness_std=as_matrix(sigma)))
    found = all_at_pin(state)
    (shares,) = found.shares["A", "shear_least"]
    assert [(share.name, round(share.share, 6)) for share in shares] == [("C44", 1.0)]


def test_draws_at_the_pin_agree_with_a_small_uncertainty_and_not_with_a_large_one():
    small = all_at_pin(uncertain(CUBIC, 0.2)).draws["A"].spreads["young"]
    assert not small.differs.any()
    large = all_at_pin(NEAR_INSTABILITY).draws["A"].spreads["young"]
    assert large.differs.any()
    view = reading.reading_view(NEAR_INSTABILITY, all_at_pin(NEAR_INSTABILITY))
    assert "1,000 draws" in view.notice
    assert "E (A)" in view.notice


# ------------------------------------------------------------------ sections
def test_the_band_is_one_standard_uncertainty_to_both_sides():
    state = looked_at(UNCERTAIN, layout="A", quantity="young", section=(0.0, 1.0, 0.0))
    (curve,) = deck.section_view(state).curves
    place = 100
    direction = curve.points[:, place] / np.linalg.norm(curve.points[:, place])
    n = np.array([direction[0], 0.0, direction[1]])[:, None]  # X to the right, Z up
    expected = by_differences(lambda s: young(table_of(s, "A"), n)[0], state)
    inner, outer = (np.linalg.norm(edge[:, place]) for edge in curve.band)
    middle = np.linalg.norm(curve.points[:, place])
    assert outer - middle == pytest.approx(expected, rel=1e-5)
    assert middle - inner == pytest.approx(expected, rel=1e-5)
    # Opposite directions are one: the band is as wide there.
    other = (place + 360) % 720
    assert np.linalg.norm(curve.band[1][:, other]) == pytest.approx(outer, rel=1e-12)


def test_a_band_ends_at_zero_and_the_rim_reaches_round_it():
    state = looked_at(uncertain(NEGATIVE, 3.0), quantity="compressibility")
    view = deck.section_view(state)
    (curve,) = view.curves
    inner, outer = np.hypot(*curve.band[0]), np.hypot(*curve.band[1])
    assert inner.min() >= 0.0
    assert view.radius == pytest.approx(outer.max())


@pytest.mark.parametrize(
    ("quantity", "live", "at_rest"),
    [("young", True, True), ("power_flow", False, True), ("wave", False, False)],
)
def test_slow_bands_wait_and_rays_have_none(quantity, live, at_rest):
    state = looked_at(UNCERTAIN, quantity=quantity)
    for is_live, expected in ((True, live), (False, at_rest)):
        curves = deck.section_view(state, is_live).curves
        assert {curve.band is not None for curve in curves} == {expected}
    assert all(curve.band is None for curve in deck.section_view(STATE).curves)


# ------------------------------------------------------------------ tables and bars
def test_averages_have_the_digits_their_uncertainty_leaves():
    state = uncertain(CUBIC, 0.5)
    found = spread.spread_of_tables(spread.table_request(state, state.specimen), Ticker())
    # K = (C11 + 2 C12)/3 with independent σ = 0.5: 0.5 √5/3.
    assert found.aggregate["Voigt"][0] == pytest.approx(0.5 * np.sqrt(5) / 3, rel=1e-5)
    view = reading.aggregate_view(state.specimen, found)
    assert view.rows[0][:2] == ("Voigt", "170.00")  # (230 + 280)/3
    assert "± 0.37" in view.tooltips[0]
    zener = next(row for row in view.rows if row[0] == "Zener ratio")
    assert zener[1].endswith(")")
    assert reading.aggregate_view(state.specimen).rows[0][1] == "170.0"


def test_the_part_shows_brackets_for_one_side():
    state = looked_at(uncertain(CUBIC, 0.5), layout="A")
    found = spread.spread_of_tables(spread.table_request(state, state.specimen), Ticker())
    rows = dict(row[:2] for row in reading.part_view(state, found).rows)
    assert rows["G in YZ, GPa"] == "120.00(50)"  # C44 itself


def test_eigenstiffness_bars_have_their_uncertainty():
    specimen = uncertain(CUBIC, 0.5).specimen
    bars = ledger.spectrum_view(specimen).bars
    # C11 − C12 = 90 errs by 0.5 √2, 2 C44 = 240 by 1, C11 + 2 C12 = 510 by 0.5 √5.
    assert [bar.text for bar in bars] == ["90.00(71)"] * 2 + ["240.0(10)"] * 3 + ["510.0(11)"]
    assert "90.00 ± 0.71 GPa" in bars[0].tooltip


def test_a_full_covariance_is_said_and_read():
    covariance = np.zeros((21, 21))
    covariance[0, 0] = 0.25
    specimen = replace(CUBIC.specimen, covariance=as_matrix(covariance))
    view = ledger.constants_view(specimen, "uncertainty")
    assert view.cells[0][0].text == "0.50"
    assert "correlated" in view.note
    assert view.editable
    assert ledger.constants_view(CUBIC.specimen, "uncertainty").note == ""


def test_turned_parts_read_the_turned_uncertainty():
    state = replace(looked_at(uncertain(CUBIC, 0.5), layout="A"), pin=(1.0, 0.0, 0.0))
    along = spread.quick_deviations(state)["A"]["stiffness", "E"]
    turned = replace(
        state, orientation_a=OrientationChoice("axis [0 0 1] 90"), pin=(0.0, 1.0, 0.0)
    )
    found = spread.quick_deviations(turned)["A"]["stiffness", "E"]
    assert found == pytest.approx(along, rel=1e-9)
