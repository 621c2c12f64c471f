"""The demo materials: each shows what its folder's README says, and survives its own format."""

import dataclasses
import json
from importlib import resources

import numpy as np
import pytest

from core.crystal.cell import cell_mismatch
from core.editing.specimen import fits_class
from core.files.bench import bench_from_dict, bench_to_dict
from core.files.opening import open_file
from core.files.specimen import json_text, read_specimen, specimen_from_dict, specimen_to_dict
from core.state import BenchState
from core.tensor.symmetry import CLASS_KEYS

with resources.as_file(resources.files("demo_materials")) as _folder:
    FOLDER = _folder
FILES = sorted(FOLDER.glob("*.json"))
KELVIN = np.outer(*[np.array([1, 1, 1, np.sqrt(2), np.sqrt(2), np.sqrt(2)])] * 2)


def demo(part):
    (path,) = [path for path in FILES if part in path.name]
    return read_specimen(path)


def eigenstiffness(specimen):
    return np.linalg.eigvalsh(np.array(specimen.stiffness) * KELVIN)


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_demo_survives_its_format(path):
    specimen = read_specimen(path)
    again = json.loads(json.dumps(specimen_to_dict(specimen)))
    assert specimen_from_dict(again, "x") == specimen
    assert json_text(specimen_to_dict(specimen)) == path.read_text(encoding="utf-8")
    state = BenchState(specimen, other=dataclasses.replace(specimen, name="other"))
    assert bench_from_dict(json.loads(json.dumps(bench_to_dict(state))), "x") == state
    assert open_file(path).specimen == specimen


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_demo_says_that_it_is_invented(path):
    specimen = read_specimen(path)
    assert specimen.notes.startswith("Invented")
    assert specimen.name.startswith("Lanternmoor")
    assert path.name in (FOLDER / "README.md").read_text(encoding="utf-8")


@pytest.mark.parametrize("path", FILES, ids=lambda path: path.stem)
def test_every_demo_has_a_density_and_a_cell_of_its_class(path):
    specimen = read_specimen(path)
    assert 500 < specimen.density < 20000
    assert specimen.cell is not None
    assert cell_mismatch(specimen.cell, specimen.crystal_class, specimen.unique_axis) == ""
    stable = eigenstiffness(specimen)[0] > 0
    assert stable == ("unstable" not in path.name)
    assert fits_class(specimen) == ("other_axes" not in path.name)


def test_the_demos_cover_kinds_of_crystals():
    shown = {read_specimen(path).crystal_class for path in FILES}
    assert shown <= set(CLASS_KEYS)
    assert len(shown) >= 6


def test_what_the_demos_are_made_to_show():
    blank = demo("blank")
    assert np.count_nonzero(np.array(blank.stiffness)) == 36
    assert blank.stiffness_std is not None
    assert demo("rod").stiffness[0][3] > 20  # a large C14
    softest = eigenstiffness(demo("seed_lm3"))
    assert softest[0] < 0.1 * softest.mean()  # a very slow shear wave
    cube = np.array(demo("casting").stiffness)
    assert 2 * cube[3, 3] / (cube[0, 0] - cube[0, 1]) > 3  # strongly anisotropic
    frame = np.linalg.inv(np.array(demo("frame").stiffness))
    assert frame[:3, :3].sum(axis=0).min() < 0  # grows along one axis under pressure
    swapped = np.array(demo("ledger_slip").stiffness)
    swapped[0, 0], swapped[0, 1] = swapped[0, 1], swapped[0, 0]
    swapped[1, 1], swapped[1, 0] = swapped[1, 0], swapped[1, 1]
    assert np.linalg.eigvalsh(swapped * KELVIN)[0] > 0  # as its source suspects
