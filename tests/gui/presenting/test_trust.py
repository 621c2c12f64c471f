"""What the trust sheet is given: words and numbers of tables whose answer is known."""

from dataclasses import replace

import numpy as np
import pytest

from core.state import BenchState, Specimen, as_matrix
from core.study.uncertainty.draws import MonteCarlo, Spread, StabilityChance
from core.study.uncertainty.propagation import Contribution
from core.task import Ticker
from core.tensor.symmetry import CLASS_KEYS, crystal_class, distance
from gui.presenting import ledger, spread, trust
from tests.gui.presenting.benches import CUBIC, UNSTABLE
from tests.materials import cubic, random_rotation, rotated


def found_for(state):
    specimen = state.specimen
    return trust.find((trust.trust_request(specimen), specimen), Ticker())


TURN = random_rotation(np.random.default_rng(4))
HIDDEN = BenchState(
    Specimen("holder axes", as_matrix(rotated(cubic(230.0, 140.0, 120.0), TURN)), 8000.0)
)


def row_of(view, key):
    return next(row for row in view.classes if row.key == key)


def test_hidden_axes_are_the_sentence_and_the_suggestion():
    view = trust.trust_view(HIDDEN, found_for(HIDDEN))
    assert view.sentence.startswith("Triclinic as entered; cubic once turned ")
    assert view.suggested == "cubic"
    assert [row.key for row in view.classes] == list(CLASS_KEYS)
    row = row_of(view, "cubic")
    assert row.cells[2] != "exact"
    assert row.cells[3] == "exact"
    assert row.can_turn
    assert row.can_exact
    assert not row_of(view, "triclinic").can_turn
    assert "fits" in row.cells[-1]
    assert "claimed" in row_of(view, "triclinic").cells[-1]


def test_making_a_class_exact_far_from_its_axes_is_doubted_with_both_changes():
    row = row_of(trust.trust_view(HIDDEN, found_for(HIDDEN)), "cubic")
    table, claimed = np.array(HIDDEN.specimen.stiffness), crystal_class("cubic")
    change = f"{100 * distance(table, claimed):.2g} %"
    assert row.change == f"Changes the table by {change}."
    assert row.doubt == (
        f"Exact as entered changes the table by {change}; once turned to its axes, "
        "not at all."
    )
    whole = row_of(trust.trust_view(CUBIC, found_for(CUBIC)), "cubic")
    assert (whole.change, whole.doubt) == ("The numbers stay as they are.", "")
    isotropic = row_of(trust.trust_view(CUBIC, found_for(CUBIC)), "isotropic").doubt
    assert isotropic.startswith("Exact as entered changes the table by ")
    assert "turned" not in isotropic  # no axes make it better


def test_a_class_as_entered_has_nothing_to_turn_or_to_mend():
    view = trust.trust_view(CUBIC, found_for(CUBIC))
    assert view.sentence == "Cubic as entered."
    row = row_of(view, "cubic")
    assert row.cells[2:5] == ("exact", "exact", "–")
    assert not row.can_turn
    assert not row.can_exact
    assert row_of(view, "isotropic").can_exact


def test_the_band_says_the_sentence_and_counts_the_notes():
    findings = found_for(HIDDEN)
    facts = ledger.verdict_view(HIDDEN.specimen, findings).facts
    assert findings.symmetry.sentence in facts
    no_density = replace(HIDDEN, specimen=replace(HIDDEN.specimen, density=None))
    facts = ledger.verdict_view(no_density.specimen, found_for(no_density)).facts
    assert facts[0] == "1 note"


def test_while_it_is_searched_the_classes_stand_without_numbers():
    view = trust.trust_view(HIDDEN, None)
    assert view.pending
    assert view.sentence == trust.FINDING
    assert [row.key for row in view.classes] == list(CLASS_KEYS)
    assert {row.cells[2:7] for row in view.classes} == {("…", "…", "", "", "")}
    assert not any(row.can_turn or row.can_exact for row in view.classes)
    assert (view.notes, view.support, view.chance, view.suggested) == ((), "", "", "")


def test_a_claim_and_a_form_that_differ_are_one_fact_of_band_and_sheet():
    claimed = replace(CUBIC, specimen=replace(CUBIC.specimen, crystal_class="triclinic"))
    findings = found_for(claimed)
    facts = ledger.verdict_view(claimed.specimen, findings).facts
    assert "claimed triclinic; has the form of cubic" in facts
    assert sum("triclinic" in fact or "cubic" in fact for fact in facts) == 1
    view = trust.trust_view(claimed, findings)
    assert view.sentence == "Claimed triclinic; has the form of cubic."
    assert not any("triclinic" in fact or "cubic" in fact for fact in view.facts)


def test_a_crystal_that_draws_find_unstable_is_doubtful():
    findings = found_for(uncertain(CUBIC, 0.5))
    assert ledger.verdict_view(CUBIC.specimen, findings).mark == "stable"
    doubted = replace(findings, chance=StabilityChance(0.47, 0.008, 4000, 1.0))
    view = ledger.verdict_view(CUBIC.specimen, doubted)
    assert view.mark == "doubtful"
    assert view.headline == "Stable, but not beyond the uncertainties"
    assert view.facts[0] == "stable in 47 % of the draws"
    assert "100 %" not in trust.chance_text(doubted.chance)
    assert "normal law" not in trust.chance_text(doubted.chance)


def test_criteria_hold_or_fail_with_their_numbers():
    # C11 − C12 = 60, C11 + 2 C12 = 180, C44 = −5 (Born's criteria for cubic crystals).
    view = trust.trust_view(UNSTABLE, found_for(UNSTABLE))
    assert [(row[0], row[2]) for row in view.criteria.rows] == [
        ("● holds", "60.0"), ("● holds", "180"), ("■ fails", "−5.00"),
    ]  # fmt: skip


def test_shares_add_up_to_all_of_the_anisotropy():
    view = trust.trust_view(HIDDEN, found_for(HIDDEN))
    shares = [float(row[1]) for row in view.shares.full]
    assert sum(shares) == pytest.approx(100.0, abs=1e-6)
    whole = trust.trust_view(CUBIC, found_for(CUBIC)).shares
    assert [row[:2] for row in whole.rows] == [("cubic part", "100 %")]


# ------------------------------------------------------------------ uncertainties
def uncertain(state, sigma):
    table = as_matrix(sigma * (np.array(state.specimen.stiffness) != 0))
    return replace(state, specimen=replace(state.specimen, stiffness_std=table))


def test_the_data_support_the_constants_of_the_class():
    view = trust.trust_view(uncertain(CUBIC, 0.5), found_for(uncertain(CUBIC, 0.5)))
    assert "support 3 constants: cubic" in view.support
    assert "supported" in row_of(view, "cubic").cells[-1]
    assert view.chance == "Stable in all of 4,000 draws from the uncertainties."


def test_the_pin_says_what_to_measure_better():
    state = replace(uncertain(CUBIC, 0.5), pin=(0.0, 0.0, 1.0))
    found = spread.spread_at_pin(spread.pin_request(state), Ticker())
    view = trust.trust_view(state, found_for(state), found)
    rows = {row[0]: row for row in view.pin.rows}
    # Along [001]: ρv² is C11 for the longitudinal wave and C44 for both shear waves.
    assert rows["fastest v, km/s"][3] == "C11 100 %"
    assert rows["slowest v, km/s"][3] == "C44 100 %"
    # δv = δC11 / (2 ρ v) with v = √(230e9/8000) m/s.
    v = np.sqrt(230e9 / 8000)
    assert rows["fastest v, km/s"][1] == f"{0.5e9 / (2 * 8000 * v) / 1e3:.2g}"


def test_without_uncertainties_the_pin_says_where_to_enter_them():
    assert "± face" in trust.trust_view(CUBIC, found_for(CUBIC)).pin.notice


def test_draws_over_all_directions_are_compared():
    state = uncertain(CUBIC, 0.5)
    asked = trust.trust_request(state.specimen)
    drawn = trust.draw_everywhere((asked, state.specimen), Ticker())
    assert trust.draws_text(drawn).startswith("1,000 draws agree")
    soft = replace(CUBIC.specimen, stiffness=as_matrix(cubic(100.0, 96.0, 50.0)))
    large = uncertain(replace(CUBIC, specimen=soft), 4.0)
    asked = trust.trust_request(large.specimen)
    drawn = trust.draw_everywhere((asked, large.specimen), Ticker())
    assert "more than 20 %" in trust.draws_text(drawn)
    assert "unstable and left out" in trust.draws_text(drawn)
    assert trust.draw_everywhere((asked, CUBIC.specimen), Ticker()) is None


def test_words_for_chances_and_shares():
    some = StabilityChance(0.973, 0.0026, 4000, 0.981)
    text = trust.chance_text(some)
    assert "97.30 ± 0.26 %" in text
    assert "98.1 % by the normal law" in text
    assert "none of" in trust.chance_text(StabilityChance(0.0, 0.001, 4000, 0.0))
    shares = (Contribution("C44", 0.612), Contribution("C11", 0.2), Contribution("C12", 0.01))
    assert trust.shares_text(shares) == "C44 61 %, C11 20 %"
    mean = np.ones((1, 2))
    drawn = MonteCarlo({"young": Spread(mean, 0.2 * mean, linear=0.1 * mean)}, 1000, 990)
    assert "in 100 % of all directions for E" in trust.draws_text(drawn)


def test_fewer_constants_that_noise_does_not_rule_out_are_said():
    # C44 = 46 ± 1 and (C11 − C12)/2 = 45 ± 0.7: cubic by the numbers, maybe isotropic.
    near = replace(CUBIC.specimen, stiffness=as_matrix(cubic(230.0, 140.0, 46.0)))
    state = uncertain(replace(CUBIC, specimen=near), 1.0)
    view = trust.trust_view(state, found_for(state))
    assert "support 2 constants: isotropic" in view.support
    apart = uncertain(CUBIC, 0.5)
    assert "not ruled out" not in trust.trust_view(apart, found_for(apart)).support
