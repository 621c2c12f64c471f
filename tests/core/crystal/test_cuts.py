"""Rotated-cut notation of IEEE Std 176: edges against scipy, and every complaint."""

import math

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st
from scipy.spatial.transform import Rotation

from core.crystal.cuts import Cut, cut_edges, cut_for, cut_rotation, parse_cut
from core.errors import InputError

PLATES = ("XY", "XZ", "YX", "YZ", "ZX", "ZY")
angles = st.floats(-180, 180)


@pytest.mark.parametrize("plate", PLATES)
@pytest.mark.parametrize("edges", ["", "l", "w", "t", "wl", "lw", "tl", "wlt", "lwl", "tt"])
def test_edges_are_intrinsic_turns(plate, edges):
    """Each turn is about an edge already turned: scipy's intrinsic (capital) sequence."""
    given_angles = (21.93, -33.93, 71.2)[: len(edges)]
    edge_axis = {"t": plate[0], "l": plate[1], "w": next(iter(set("XYZ") - set(plate)))}
    motion = np.eye(3)
    for edge, degrees in zip(edges, given_angles, strict=True):
        motion = (
            motion @ Rotation.from_euler(edge_axis[edge], degrees, degrees=True).as_matrix()
        )
    found = cut_edges(Cut(plate[0], plate[1], edges, given_angles))
    for edge, axis in edge_axis.items():
        np.testing.assert_allclose(found[edge], motion[:, "XYZ".index(axis)], atol=1e-14)
    R = cut_rotation(Cut(plate[0], plate[1], edges, given_angles))
    np.testing.assert_allclose(R[2], found["t"], atol=1e-15)
    np.testing.assert_allclose(R[0], found["l"], atol=1e-15)
    np.testing.assert_allclose(np.abs(R[1]), np.abs(found["w"]), atol=1e-14)
    assert np.linalg.det(R) == pytest.approx(1)


@pytest.mark.parametrize(
    ("text", "canonical"),
    [
        ("(YXl) 35.25", "(YXl) 35.25"),
        ("(YXl)35.25°", "(YXl) 35.25"),
        ("(yxL) −35.25°", "(YXl) -35.25"),
        ("( YX l ) -35° 15′", "(YXl) -35.25"),
        ("(YXl)-35°15'36\"", "(YXl) -35.26"),
        ("(YXwl) 21.93/33.93", "(YXwl) 21.93/33.93"),
        ("(YXwl) 21.93°, 33.93°", "(YXwl) 21.93/33.93"),
        ("(YXwl)21.93 -33.93", "(YXwl) 21.93/-33.93"),
        ("(YXwlt) 1/2/3", "(YXwlt) 1/2/3"),
        ("(ZX)", "(ZX)"),
        ("(YXl) 7°", "(YXl) 7"),
    ],
)
def test_reading(text, canonical):
    cut = parse_cut(text)
    assert cut.text == canonical
    assert parse_cut(cut.text) == cut


@pytest.mark.parametrize(
    ("text", "reason"),
    [
        ("YXl 35", "is not a cut"),
        ("(YXl 35", "is not a cut"),
        ("(Y) 35", "two crystal axes"),
        ("()", "two crystal axes"),
        ("(QXl) 35", "'Q' in '(QXl) 35' is no crystal axis"),
        ("(YYl) 35", "along the same axis Y"),
        ("(YXq) 35", "'q' in '(YXq) 35' is no edge"),
        ("(YXlwtl) 1/2/3/4", "4 turns"),
        ("(YXwl) 21.93", "2 turns (wl) but gives 1 angle."),
        ("(YXl) 1/2", "1 turn (l) but gives 2 angles."),
        ("(YX) 30", "0 turns (none) but gives 1 angle."),
        ("(YXl)", "1 turn (l) but gives 0 angles."),
        ("(YXl) high", "'high' is not a number"),
        ("(YXl) 1e999", "is not a number"),
    ],
)
def test_every_complaint_is_a_sentence(text, reason):
    with pytest.raises(InputError) as caught:
        parse_cut(text)
    assert reason in str(caught.value)


@given(
    plate=st.sampled_from(PLATES),
    edges=st.sampled_from(["", "l", "w", "t", "wl", "tw", "lt"]),
    first=angles,
    second=angles,
)
@settings(deadline=None, max_examples=80)
def test_a_cut_of_few_turns_is_found_again_with_no_more(plate, edges, first, second):
    cut = Cut(plate[0], plate[1], edges, (first, second)[: len(edges)])
    R = cut_rotation(cut)
    found = cut_for(R)
    np.testing.assert_allclose(cut_rotation(found), R, rtol=0, atol=1e-12)
    assert len(found.edges) <= len(edges)


def test_well_known_cuts_are_named_as_they_are_known():
    for text in (
        "(YXl) 35.25",
        "(YXwl) 21.93/33.93",
        "(ZXt) 45",
        "(ZX)",
        "(XY)",
        "(YXl) -35.25",
    ):
        assert cut_for(cut_rotation(parse_cut(text))).text == text


@pytest.mark.parametrize("seed", range(20))
def test_any_rotation_is_some_cut(seed):
    R = Rotation.random(random_state=seed).as_matrix()
    found = cut_for(R)
    np.testing.assert_allclose(cut_rotation(parse_cut(found.text)), R, rtol=0, atol=1e-13)
    assert math.fsum(map(abs, found.angles)) < 540
