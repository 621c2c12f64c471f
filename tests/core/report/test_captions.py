"""Figures in words, and the small readers of the command line."""

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from core.command.figure_words import expand, outputs
from core.directional.quantities import QUANTITIES
from core.errors import InputError
from core.report.captions import (
    FIGURE_KINDS,
    FigureChoice,
    caption,
    needed_sides,
    one_of,
    parse_plane,
    plain_orientation,
    plane_words,
    state_for,
)
from core.state import BenchState, OrientationChoice, Specimen, as_matrix
from tests import materials

CELL_LESS = Specimen("piece", as_matrix(materials.cubic(190.0, 118.0, 92.0)), 2500.0,
                     "cubic", source="drawn by lot")  # fmt: skip
BENCH = BenchState(CELL_LESS, orientation_b=OrientationChoice("axis [0 0 1] 15"))


@pytest.mark.parametrize("kind", FIGURE_KINDS)
@pytest.mark.parametrize("key", QUANTITIES)
def test_every_caption_names_specimen_source_orientation_and_program(kind, key):
    words = caption(BENCH, FigureChoice(kind, key, "AB", "difference"))
    for part in ("piece (drawn by lot)", "axis [0 0 1] 15", "Tricline", "crystal axes"):
        assert part in words
    shown = QUANTITIES["wave" if kind == "source" else key]
    if kind != "source":
        assert shown.name in words
        assert shown.unit in words


def test_a_caption_says_what_belongs_to_its_kind():
    assert "A solid, B dashed" in caption(BENCH, FigureChoice("section", "young", "AB"))
    assert "plane XZ" in caption(BENCH, FigureChoice("section", "young", "A"))
    cost = caption(BENCH, FigureChoice("hemisphere", "young", "A", "cost"))
    assert "±0.5°" in cost
    assert "equal-area" in cost
    sweep = caption(replace(BENCH, pin=(0.0, 0.6, 0.8)), FigureChoice("sweep", "young", "A"))
    assert "from the direction X, Y, Z = 0, 0.6, 0.8 in part axes" in sweep
    assert "B:" not in sweep
    source = caption(BENCH, FigureChoice("source", "wave", "A", time_us=2.5))
    assert "2.5 µs" in source


def test_two_crystals_have_each_their_own_words():
    other = replace(CELL_LESS, name="second piece", source="")
    words = caption(replace(BENCH, other=other), FigureChoice("surface", "young", "AB"))
    assert "A: piece (drawn by lot)" in words
    assert "B: second piece;" in words


def test_a_figure_takes_the_sides_it_needs():
    assert needed_sides(FigureChoice("hemisphere", "young", "A", "difference")) == "AB"
    assert needed_sides(FigureChoice("hemisphere", "young", "AB", "B")) == "B"
    shown = state_for(BENCH, FigureChoice("surface", "slowness", "AB"))
    assert shown.quantity == "slowness"
    assert shown.display.layout == "AB"
    assert shown.display.shared_scale


def test_waves_without_a_density_are_refused():
    bench = replace(BENCH, specimen=replace(CELL_LESS, density=None))
    with pytest.raises(InputError, match="wants a density"):
        state_for(bench, FigureChoice("source", "young", "A"))
    assert state_for(bench, FigureChoice("surface", "young", "A")).quantity == "young"


def test_a_wrong_word_is_answered_with_the_nearest():
    with pytest.raises(InputError, match="Did you mean 'hemisphere'"):
        one_of("hemisfere", FIGURE_KINDS, "kind of figure")
    with pytest.raises(InputError, match="There are A, B, AB"):
        one_of("both of them", {"A": "", "B": "", "AB": ""}, "side")


@pytest.mark.parametrize(("text", "normal"), [
    ("XY", (0, 0, 1)), ("zx", (0, 1, 0)), ("YZ", (1, 0, 0)), ("0,0,-2", (0, 0, -1)),
    ("1 1 0", (0.5**0.5, 0.5**0.5, 0)),
])  # fmt: skip
def test_planes_are_read(text, normal):
    assert np.abs(np.array(parse_plane(text)) - normal).max() < 1e-15


@pytest.mark.parametrize("text", ["", "XX", "1,1", "0 0 0", "a,b,c", "inf,0,0"])
def test_what_is_no_plane_is_refused(text):
    with pytest.raises(InputError, match="section plane"):
        parse_plane(text)


def test_planes_are_said():
    assert plane_words((0.0, -1.0, 0.0)) == "XZ"
    assert plane_words((0.6, 0.8, 0.0)) == "normal to X, Y, Z = 0.6, 0.8, 0"


def test_patterns_mean_files(tmp_path):
    for name in ("b.json", "a.json", "c.txt"):
        (tmp_path / name).write_text("x")
    found = expand([str(tmp_path / "*.json"), str(tmp_path / "a.json")])
    assert [path.name for path in found] == ["a.json", "b.json"]
    assert expand(["missing.json"]) == [Path("missing.json")]  # opening it says what is wrong
    with pytest.raises(InputError, match="No file matches"):
        expand([str(tmp_path / "*.csv")])


def test_several_files_want_several_names():
    files = [Path("x/a.json"), Path("y/b.json")]
    assert outputs("out/{name}.png", files) == [Path("out/a.png"), Path("out/b.png")]
    assert outputs("one.png", files[:1]) == [Path("one.png")]
    with pytest.raises(InputError, match=r"\{name\}"):
        outputs("one.png", files)


@pytest.mark.parametrize("kind", FIGURE_KINDS)
def test_no_direction_looks_like_a_plane(kind):
    tilted = replace(BENCH, pin=(0.0, 0.6, 0.8), section=(0.6, 0.0, 0.8))
    for bench in (BENCH, tilted):
        assert "(0" not in caption(bench, FigureChoice(kind, "young", "A"))


def test_lines_and_hatching_are_explained_where_there_are_any():
    assert "he faster the wave, the thicker its line" in caption(
        BENCH, FigureChoice("section", "slowness", "A"))
    assert "thicker" not in caption(BENCH, FigureChoice("section", "young", "AB"))
    assert "A solid, B dashed" in caption(BENCH, FigureChoice("sweep", "young", "AB"))
    unstable = BenchState(replace(CELL_LESS, stiffness=as_matrix(
        materials.cubic(100.0, 40.0, -5.0))))  # fmt: skip
    assert "Hatched" in caption(unstable, FigureChoice("hemisphere", "young", "A"))
    assert "Hatched" not in caption(BENCH, FigureChoice("hemisphere", "young", "A"))


def test_dots_are_explained_where_curves_are_dotted():
    # Rays stay in a mirror plane of the cube, and leave a plane that is none.
    leaves = "dotted where the ray leaves the plane"
    turned = replace(BENCH, orientation_a=OrientationChoice("bunge 20 30 40"))
    assert leaves in caption(turned, FigureChoice("section", "wave", "A"))
    assert leaves not in caption(BENCH, FigureChoice("section", "wave", "A"))
    # ν of a cubic crystal with C12 < 0 is negative along the cube's axes.
    spongy = replace(BENCH, specimen=replace(CELL_LESS, stiffness=as_matrix(
        materials.cubic(100.0, -20.0, 60.0))))  # fmt: skip
    assert "otted where negative" in caption(spongy, FigureChoice("section", "poisson_least"))


def test_orientations_are_read_with_four_decimals():
    assert plain_orientation("bunge 244.649041837923 15.123 -0.000000012") == (
        "bunge 244.649 15.123 0")
    assert plain_orientation("Z=(1 -1 0) X=[0 0 1]") == "Z=(1 −1 0) X=[0 0 1]"
