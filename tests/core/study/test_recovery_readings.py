"""One reading, and what is odd about a table of them."""

import math

import numpy as np
import pytest

from core.errors import InputError
from core.study.recovery.readings import Flight, Reading, reading_of_flight, remarks

X = (1.0, 0.0, 0.0)


def reading(speed, row=1, sheet=None, **more):
    return Reading(more.pop("direction", X), speed, more.pop("sigma", 5.0), row, sheet, **more)


def test_a_pulse_through_five_millimetres_in_one_microsecond():
    flight = Flight(5.0, 1.0, 0.002)
    assert flight.speed == pytest.approx(5000.0)
    assert flight.sigma == pytest.approx(10.0)


def test_an_echo_goes_there_and_back_and_the_delay_comes_off():
    flight = Flight(5.0, 2.1, 0.004, "echo", delay_ns=100.0, sigma_mm=0.005)
    assert flight.speed == pytest.approx(5000.0)
    assert flight.sigma == pytest.approx(5000.0 * math.hypot(0.004 / 2.0, 0.001))


def test_the_sigma_of_a_flight_is_the_scatter_of_simulated_flights():
    rng = np.random.default_rng(2)
    exact = Flight(6.35, 2.5, 0.01, "through", 40.0, 0.02)
    speeds = 1e3 * (6.35 + 0.02 * rng.standard_normal(40_000)) / (
        2.5 + 0.01 * rng.standard_normal(40_000) - 0.04
    )
    assert exact.sigma == pytest.approx(speeds.std(), rel=0.02)


@pytest.mark.parametrize("values", [
    (0.0, 1.0, 0.01), (5.0, -1.0, 0.01), (5.0, 1.0, 0.0), (5.0, 1.0, -0.01),
    (5.0, 1.0, 0.01, "through", 1000.0), (5.0, 1.0, 0.01, "through", 0.0, -1.0),
])  # fmt: skip
def test_impossible_flights_are_refused(values):
    with pytest.raises(InputError):
        Flight(*values)


@pytest.mark.parametrize("change", [
    {"direction": (0.0, 0.0, 0.0)}, {"sigma": 0.0}, {"sigma": -1.0}, {"sheet": 4},
])  # fmt: skip
def test_impossible_readings_are_refused(change):
    with pytest.raises(InputError):
        reading(5000.0, **change)


def test_a_direction_is_made_a_unit_vector():
    assert np.allclose(reading(5000.0, direction=(3.0, 0.0, 4.0)).direction, (0.6, 0.0, 0.8))


def test_inches_taken_for_millimetres_are_suspected():
    flights = [Flight(6.0, 1.2, 0.001), Flight(0.25, 1.25, 0.001)]
    found = remarks([reading_of_flight(X, f, row) for row, f in enumerate(flights, start=1)])
    assert len(found) == 1
    assert found[0].startswith("Row 2")
    assert "inches" in found[0]


def test_a_whole_table_in_inches_is_suspected_too():
    flights = [Flight(thickness, 1.25, 0.001) for thickness in (0.25, 0.2)]
    table = [reading_of_flight(X, flight, row) for row, flight in enumerate(flights, 1)]
    assert sum("inches" in note for note in remarks(table)) == 2


def test_kilometres_per_second_are_suspected():
    assert "km/s" in remarks([reading(5.2, sigma=0.01), reading(5200.0, 2)])[0]


def test_a_speed_no_solid_has_is_named():
    assert remarks([reading(90_000.0)])[0].startswith("Row 1: 9e+04 m/s is outside")


def test_plausible_speeds_pass_without_remark():
    assert remarks([reading(5200.0, 1, 1), reading(3100.0, 2, 2), reading(2900.0, 3, 3)]) == ()


def test_duplicates_are_noted_also_against_the_direction():
    twice = [reading(5200.0, 4, 1), reading(5200.0, 9, 1, direction=(-1.0, 0.0, 0.0))]
    assert remarks(twice) == ("Rows 4 and 9 are the same reading twice; both are kept.",)


def test_one_wave_with_two_speeds_is_named():
    (note,) = remarks([reading(5200.0, 1, 1), reading(5100.0, 2, 1)])
    assert note == "Rows 1 and 2 give one wave two speeds, 14 σ apart."


def test_sheets_against_the_speeds_are_named():
    (note,) = remarks([reading(3000.0, 1, 1), reading(5200.0, 2, 2)])
    assert note.startswith("Rows 1 and 2 conflict")


def test_repeats_within_their_sigma_are_left_alone():
    assert remarks([reading(5200.0, 1, 1), reading(5206.0, 2, 1)]) == ()


def test_a_long_table_is_looked_at_quickly_and_its_remarks_are_cut_short():
    notes = remarks([reading(5200.0, row, 1) for row in range(1, 5000)])
    assert len(notes) == 31
    assert notes[-1].startswith("…")


def test_a_slip_that_many_rows_share_is_one_sentence():
    table = [reading(speed, row, sigma=0.01) for row, speed in enumerate((5.2, 3.1, 4.0), 1)]
    (note,) = [note for note in remarks(table) if "km/s" in note]
    assert note == (
        "Rows 1, 2, 3: 3.1 to 5.2 m/s would be 3100 to 5200 m/s if multiplied by 1000: "
        "was it given in km/s?"
    )
