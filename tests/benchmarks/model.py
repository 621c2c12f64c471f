"""The model side: kernels against references in the same run, and the work of one edit."""

import statistics
import time
from collections.abc import Iterator
from dataclasses import replace

import numpy as np

from core.directional import waves
from core.directional.acoustic_axes import acoustic_axes
from core.directional.extremes import extremes
from core.directional.medium import Medium
from core.directional.moduli import young
from core.directional.sphere import SphereMesh, sphere_mesh
from core.directional.surfaces import all_surfaces
from core.state import BenchState, OrientationChoice
from core.study.cost_map import cost_map
from core.tensor.stiffness import Stiffness
from gui.documents import FIRST_DEMO, open_demo
from tests.benchmarks.timing import Line, at_most, medians
from tests.materials import random_physical

DENSITY = 3000.0


def media(count: int, seed: int = 7) -> list[Medium]:
    rng = np.random.default_rng(seed)
    return [Medium(Stiffness.from_voigt(random_physical(rng)), DENSITY) for _ in range(count)]


def fresh(medium: Medium) -> Medium:
    """Return the same medium with nothing remembered, as after an edit."""
    return Medium(Stiffness.from_voigt(medium.stiffness.voigt), medium.density)


def lines() -> Iterator[Line]:
    mesh = sphere_mesh(5)
    medium = media(1)[0]
    yield from kernel_lines(mesh, medium)
    yield from edit_lines(mesh, medium)
    yield from search_lines(mesh)
    yield turning_line()


def kernel_lines(mesh: SphereMesh, medium: Medium) -> Iterator[Line]:
    half = mesh.half
    gamma = np.einsum("ijkl,jn,ln->nik", medium.stiffness.tensor, half.n, half.n)
    taken = medians(
        {
            "speeds": lambda: waves.speeds(medium, half),
            "eigvalsh": lambda: np.linalg.eigvalsh(gamma),
            "modes": lambda: waves.modes(medium, half),
            "eigh": lambda: np.linalg.eigh(gamma),
        }
    )
    ratio = taken["eigvalsh"] / taken["speeds"]
    yield Line(
        "three speeds, 10,242 directions",
        taken["speeds"],
        ratio,
        "x faster than eigvalsh",
        ">= 10 x",
        ratio >= 10,
    )
    ratio = taken["eigh"] / taken["modes"]
    yield Line(
        "speeds and polarisations, 10,242 directions",
        taken["modes"],
        ratio,
        "x faster than eigh",
        ">= 8 x",
        ratio >= 8,
    )
    rows = np.ones(15 * half.n.shape[1])
    taken = medians({"young": lambda: young(medium, half), "dot": lambda: np.dot(rows, rows)})
    ratio = taken["young"] / taken["dot"]
    yield Line(
        "Young's modulus, 10,242 directions",
        taken["young"],
        ratio,
        "x a dot over the same bytes",
        "<= 3 x",
        ratio <= 3,
    )
    taken = medians({"curvature": lambda: waves.focusing(medium, half)})
    yield at_most("focusing of three sheets, 10,242 directions", taken["curvature"], 4.0)


def edit_lines(mesh: SphereMesh, medium: Medium) -> Iterator[Line]:
    source, target = np.ones((24, mesh.half.n.shape[1])), np.empty((24, mesh.half.n.shape[1]))
    taken = medians(
        {
            "edit": lambda: all_surfaces(fresh(medium), mesh),
            "copy": lambda: np.copyto(target, source),
        }
    )
    ratio = taken["edit"] / taken["copy"]
    yield Line(
        "one live edit: all 15 surfaces with normals, 10,242",
        taken["edit"],
        ratio,
        "x a copy of 24 rows",
        "<= 5 ms, <= 100 x",
        taken["edit"] <= 5 and ratio <= 100,
    )
    taken = medians({"cost": lambda: cost_map(fresh(medium), mesh, 0.5, "young")})
    yield at_most("cutting-error map of E, 10,242 directions", taken["cost"], 3.0)
    taken = medians({"cost": lambda: cost_map(fresh(medium), mesh, 0.5, "phase")})
    yield Line("cutting-error map of three speeds, 10,242 directions", taken["cost"])


def search_lines(mesh: SphereMesh) -> Iterator[Line]:
    times = []
    for medium in media(100):
        start = time.perf_counter()
        extremes(medium)
        times.append(1e3 * (time.perf_counter() - start))
    yield at_most(
        "all extremes, median of 100 random triclinic", statistics.median(times), 40.0
    )
    times = []
    for medium in media(40, seed=9):
        start = time.perf_counter()
        acoustic_axes(medium)
        times.append(1e3 * (time.perf_counter() - start))
    yield at_most(
        "acoustic axes, median of 40 random triclinic", statistics.median(times), 25.0
    )


def no_axes(specimen):
    """As while B turns: axes of degeneracy are found at rest, on the worker."""
    return ()


def turning_line() -> Line:
    """What one step of dragging B computes: two panes, section, hemisphere, tables."""
    from gui.presenting import deck, ledger, reading, stage

    state = BenchState(open_demo(FIRST_DEMO).specimen)
    angles = iter(np.linspace(0.1, 60.0, 4000))

    def turn() -> None:
        turned = replace(
            state, orientation_b=OrientationChoice(turn=(float(next(angles)), 0.0, 0.0))
        )
        ledger.orientation_view(turned, "B")
        stage.pane_views(turned, False, no_axes)
        deck.section_view(turned)
        deck.hemisphere_view(turned, False, no_axes)
        reading.reading_view(turned)

    return at_most(
        "turning B: panes at 2,562, sections, hemisphere, tables",
        medians({"turn": turn})["turn"],
        8.0,
    )
