"""The bench: one state, one history, one signal, only on real change."""

from dataclasses import replace

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.state import BenchState, Specimen
from gui.bench import Bench
from tests.materials import cubic

STATE = BenchState(
    Specimen("blank", tuple(tuple(row) for row in cubic(130.0, 90.0, 60.0).tolist()))
)


@pytest.fixture
def bench(qapp):
    return Bench(STATE)


def heard(bench):
    calls = []
    bench.changed.connect(lambda state, names: calls.append((state, names)))
    return calls


def test_edit_announces_the_fields_that_differ(bench):
    calls = heard(bench)
    bench.edit("Move the pin", replace(STATE, pin=(1.0, 0.0, 0.0)))
    assert calls == [(replace(STATE, pin=(1.0, 0.0, 0.0)), {"pin"})]
    assert bench.history.undoText() == "Move the pin"


def test_edit_to_the_same_state_is_no_step(bench):
    calls = heard(bench)
    bench.edit("Nothing", replace(STATE))
    assert calls == []
    assert not bench.history.canUndo()


def test_fifty_edits_undo_to_the_start_and_redo_to_the_end(bench):
    for k in range(50):
        bench.edit(f"step {k}", replace(bench.state, cutting_error_deg=1.0 + k))
    end = bench.state
    assert bench.history.count() == 50
    while bench.history.canUndo():
        bench.history.undo()
    assert bench.state == STATE
    while bench.history.canRedo():
        bench.history.redo()
    assert bench.state == end


def test_a_drag_is_one_step(bench):
    for x in (0.1, 0.2, 0.3):
        bench.edit("Turn", replace(bench.state, cutting_error_deg=x), merge="drag 1")
    bench.edit("Turn", replace(bench.state, cutting_error_deg=0.4), merge="drag 2")
    assert bench.history.count() == 2
    bench.history.undo()
    assert bench.state.cutting_error_deg == 0.3
    bench.history.undo()
    assert bench.state == STATE


def test_a_drag_back_home_leaves_no_step(bench):
    bench.edit("Turn", replace(STATE, cutting_error_deg=2.0), merge="drag")
    bench.edit("Turn", STATE, merge="drag")
    assert bench.state == STATE
    assert not bench.history.canUndo()


def test_steps_without_a_merge_key_stay_apart(bench):
    bench.edit("One", replace(STATE, cutting_error_deg=2.0))
    bench.edit("Two", replace(STATE, cutting_error_deg=3.0))
    assert bench.history.count() == 2


def test_load_forgets_the_history(bench):
    bench.edit("One", replace(STATE, cutting_error_deg=2.0))
    bench.load(STATE)
    assert bench.state == STATE
    assert not bench.history.canUndo()
    assert bench.history.isClean()


@given(st.lists(st.tuples(st.floats(0.1, 20.0), st.sampled_from(["", "a", "b"])), max_size=12))
@settings(max_examples=30, deadline=None)
def test_undoing_everything_always_leads_back(steps):
    bench = Bench(STATE)
    for value, merge in steps:
        bench.edit("step", replace(bench.state, cutting_error_deg=value), merge)
    while bench.history.canUndo():
        bench.history.undo()
    assert bench.state == STATE


def test_a_saved_step_is_not_extended(bench):
    bench.edit("Turn", replace(STATE, cutting_error_deg=2.0), merge="drag")
    bench.history.setClean()
    bench.edit("Turn", replace(STATE, cutting_error_deg=3.0), merge="drag")
    assert not bench.history.isClean()
    bench.history.undo()
    assert bench.state.cutting_error_deg == 2.0
    assert bench.history.isClean()


def test_an_undone_step_is_not_extended(bench):
    bench.edit("One", replace(STATE, cutting_error_deg=2.0), merge="drag")
    bench.edit("Two", replace(STATE, cutting_error_deg=3.0))
    bench.history.undo()
    bench.edit("One", replace(STATE, cutting_error_deg=4.0), merge="drag")
    bench.history.undo()
    assert bench.state.cutting_error_deg == 2.0


def test_a_long_drag_keeps_no_step_in_memory(bench):
    import gc

    from gui.bench import _Snapshot

    for k in range(500):
        bench.edit("Turn", replace(STATE, cutting_error_deg=1.0 + k / 100), merge="long drag")
    gc.collect()
    kept = [o for o in gc.get_objects() if isinstance(o, _Snapshot) and o.merge == "long drag"]
    assert len(kept) == 1
