"""Views to draw in tests: invented crystals, computed here without any code of `core`."""

from dataclasses import replace

import numpy as np

from gui.viewdata import Curve, HemisphereView, ScaleView, SectionView, SourceView, SweepView
from tests.materials import random_rotation, rotated, trigonal

_PLACE = np.array([[0, 5, 4], [5, 1, 3], [4, 3, 2]])
_ENGINEERING = np.where(np.arange(6) < 3, 1.0, 2.0)
ANGLES = np.linspace(0.0, 2.0 * np.pi, 721)

TABLE_A = trigonal(87.0, 7.0, 12.0, -17.9, 106.0, 58.0)
TABLE_B = rotated(TABLE_A, random_rotation(np.random.default_rng(5)))
DENSITY = 2.65  # g/cm³


def ring(angles=ANGLES):
    """Return directions of the XZ plane, X to the right, shape (3, N)."""
    return np.stack([np.cos(angles), np.zeros_like(angles), np.sin(angles)])


def tensor(table):
    """Return the fourth-rank stiffness of a Voigt table."""
    return table[_PLACE[:, :, None, None], _PLACE[None, None]]


def young(table, n):
    """Return Young's modulus along n, shape (3, ...): 1/E = S_ijkl n_i n_j n_k n_l."""
    compliance = np.linalg.inv(table) / np.outer(_ENGINEERING, _ENGINEERING)
    strain = np.einsum("ijkl,k...,l...->ij...", tensor(compliance), n, n)
    return 1.0 / np.einsum("ij...,i...,j...->...", strain, n, n)


def phase_speeds(table, n):
    """Return the phase speeds along n, km/s, fastest first, from Γ = C_ijkl n_j n_l."""
    christoffel = np.einsum("ijkl,j...,l...->...ik", tensor(table), n, n)
    return np.sqrt(np.moveaxis(np.linalg.eigvalsh(christoffel), -1, 0)[::-1] / DENSITY)


def polar(values, angles=ANGLES):
    """Return curve points of radius |value|."""
    return np.abs(values) * np.stack([np.cos(angles), np.sin(angles)])


def young_section(pin=0.6):
    """Return a section of one sheet, with bands, rim directions and a legend."""
    curves = []
    for side, table in (("A", TABLE_A), ("B", TABLE_B)):
        values = young(table, ring())
        band = np.stack([polar(0.97 * values), polar(1.03 * values)])
        curves.append(Curve(polar(values), side, 0, band=band))
    return SectionView(
        title="Section · Young's modulus",
        curves=tuple(curves),
        radius=150.0,
        rings=((50.0, "50"), (100.0, "100"), (150.0, "150")),
        axis_labels=("X", "Z"),
        unit="GPa",
        pin_angle=pin,
        legend=(("A", "Harrow blank HB-7"), ("B", "Harrow blank HB-7, (YXl) 35.25°")),
        directions=_rim_directions(),
        plane="XZ",
        planes=(("XY", "part XY"), ("XZ", "part XZ"), ("YZ", "part YZ")),
    )


def speeds_section(pin=2.2):
    """Return a section of three sheets for each side: six curves of 721 points."""
    sheets = ("fastest", "middle", "slowest")
    curves = tuple(
        Curve(polar(values), side, sheet, label=sheets[sheet])
        for side, table in (("A", TABLE_A), ("B", TABLE_B))
        for sheet, values in enumerate(phase_speeds(table, ring()))
    )
    return replace(
        young_section(pin), title="Section · phase speed", curves=curves, radius=8.0,
        rings=((2.0, "2"), (4.0, "4"), (6.0, "6"), (8.0, "8")), unit="km/s",
    )  # fmt: skip


def signed_section():
    """Return a section whose value is negative in two lobes and undefined in a third place."""
    values = 0.12 + 0.3 * np.cos(2.0 * ANGLES - 0.5)
    values = np.where(np.abs(ANGLES - 1.9) < 0.15, np.nan, values)
    curve = Curve(polar(values), "A", 0, negative=np.nan_to_num(values) < 0.0)
    return replace(
        young_section(), title="Section · Poisson's ratio, least", curves=(curve,), unit="",
        radius=0.5, rings=((0.25, "0.25"), (0.5, "0.50")),
        negative_note="dotted where negative",
    )  # fmt: skip


def disc(size=181, projection="equal_area"):
    """Return the directions of a picture's pixels, (3, size, size), NaN outside the disc."""
    edge = (2.0 * np.arange(size) + 1.0) / size - 1.0
    x, y = np.meshgrid(edge, -edge)
    square = np.where(x * x + y * y <= 1.0, x * x + y * y, np.nan)
    if projection == "equal_area":
        factor, z = np.sqrt(2.0 - square), 1.0 - square
    else:
        factor, z = 2.0 / (1.0 + square), (1.0 - square) / (1.0 + square)
    return np.stack([x * factor, y * factor, z])


def hemisphere_of(picture, diverging=False, projection="equal_area", **changes):
    """Return a hemisphere of any picture of values."""
    low, high = float(np.nanmin(picture)), float(np.nanmax(picture))
    view = HemisphereView(
        title="Hemisphere · Young's modulus",
        picture=picture,
        scale=ScaleView(
            low, high, f"{low:.4g}", f"{high:.4g}", "Young's modulus E, GPa", diverging
        ),
        contours=(),
        marks=(),
        projection=projection,
        shown="difference" if diverging else "A",
        choices=(("A", "A"), ("B", "B"), ("difference", "B − A"), ("cost", "Cutting error")),
    )
    return replace(view, **changes)


def young_hemisphere(projection="equal_area"):
    """Return the hemisphere of A with contours and marks."""
    picture = young(TABLE_A, disc(projection=projection))
    levels = (80.0, 90.0, 100.0, 110.0, 120.0)
    return hemisphere_of(
        picture, projection=projection, marks=_disc_marks(),
        contours=tuple((level, line) for level in levels for line in contour(picture, level)),
    )  # fmt: skip


def difference_hemisphere():
    """Return B − A, signed."""
    directions = disc()
    return hemisphere_of(
        young(TABLE_B, directions) - young(TABLE_A, directions), diverging=True
    )


def contour(picture, level):
    """Return the lines of a level through a picture, by pyqtgraph's marching squares."""
    from pyqtgraph import functions

    size = picture.shape[0]
    lines = functions.isocurve(np.nan_to_num(picture, nan=-1e3), level, connected=True)
    found = []
    for line in lines:
        row, column = np.array(line).T
        x, y = (2.0 * column + 1.0) / size - 1.0, 1.0 - (2.0 * row + 1.0) / size
        inside = np.hypot(x, y) < 0.985
        if len(x) > 12:
            found.append(np.where(inside, np.stack([x, y]), np.nan))
    return found


def young_sweep():
    """Return Young's modulus of A and B against the angle from the pin."""
    angles = np.linspace(-90.0, 90.0, 361)
    turned = np.radians(angles) + 0.6
    return SweepView(
        title="Sweep · Young's modulus",
        angles=angles,
        curves=(("A", 0, young(TABLE_A, ring(turned))), ("B", 0, young(TABLE_B, ring(turned)))),
        axis="part Y",
        choices=(("X", "part X"), ("Y", "part Y"), ("Z", "part Z")),
        chosen="Y",
        value_label="Young's modulus E, GPa",
    )


def speeds_sweep():
    """Return the three phase speeds of A and B against the angle from the pin."""
    view = young_sweep()
    turned = np.radians(view.angles) + 0.6
    curves = tuple((side, sheet, values)
                   for side, table in (("A", TABLE_A), ("B", TABLE_B))
                   for sheet, values in enumerate(phase_speeds(table, ring(turned)))
                   )  # fmt: skip
    return replace(
        view, title="Sweep · phase speed", curves=curves, value_label="phase speed v, km/s"
    )


def _rim_directions():
    angles = np.radians([12.0, 38.0, 41.0, 63.0, 118.0, 151.0, 218.0, 243.0, 298.0, 331.0])
    labels = ("[1 0 4̄]", "[1 0 1]", "[5 0 4]", "[1 0 2]", "[1̄ 0 2]", "[2̄ 0 1]", "[1̄ 0 1̄]",
              "[1̄ 0 2̄]", "[1 0 2̄]", "[2 0 1̄]")  # fmt: skip
    return tuple(zip(angles.tolist(), labels, strict=True))


def _disc_marks():
    return (
        (0.35, 0.42, "pin", "pin"),
        (0.0, 0.0, "[0 0 1]", "direction"),
        (0.62, 0.0, "[1 0 2]", "direction"),
        (0.64, 0.03, "[11 0 20]", "direction"),
        (-0.31, 0.537, "[1̄ 2 1]", "direction"),
        (-0.62, -0.3, "least", "least"),
        (0.2, -0.7, "greatest", "greatest"),
    )


def wave_source(time_us=4.0):
    """Return wavefronts of A: group velocities by central differences of the phase speed."""
    n, step = ring(), 1e-4
    curves = []
    for sheet in range(3):
        slopes = [
            (phase_speeds(TABLE_A, unit(n + step * axis))[sheet]
             - phase_speeds(TABLE_A, unit(n - step * axis))[sheet]) / (2.0 * step)
            for axis in np.eye(3)[:, :, None]
        ]  # fmt: skip
        # v is taken along the unit vector, so its slopes are tangential: V = v n + grad v.
        velocity = phase_speeds(TABLE_A, n)[sheet] * n + np.stack(slopes)
        points = time_us * velocity[[0, 2]]
        curves.append(("A", sheet, points, np.abs(velocity[1]) > 0.35))
    rings = tuple((radius, f"{radius:.0f}") for radius in (10.0, 20.0, 30.0))
    return SourceView("Point source", tuple(curves), time_us, rings, ("X", "Z"))


def unit(n):
    """Return vectors along the first axis, made of length 1."""
    return n / np.linalg.norm(n, axis=0)
