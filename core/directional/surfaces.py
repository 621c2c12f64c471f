"""Vertices and analytic normals of every directional surface.

A surface is a float32 array (sheets, 7, N) over the vertices of a `SphereMesh`, planar rows
x, y, z, nx, ny, nz, value. Normals point outward and are not normalised. Where a shape is
undefined all seven rows are NaN; where only a colour on it is, as the focusing along an
acoustic axis, the value alone.

Four shapes are drawn:

- *radial*: the point |value| n. For r(n) n a normal is r n - grad r, the gradient taken on the
  unit sphere; the lobes of a negative value use |value| in it.
- *slowness*: the point n/v; its normal is the group velocity V. Quantities without a shape
  of their own (power flow, polarisation, focusing) are colours on this surface.
- *phase*: radial with v; its normal is 2 v n - V.
- *wave*: the point V; its normal is n.

Only the half of the mesh is evaluated, chunk by chunk. A maker fills the (sheets, 7, count)
part of one chunk; the other half of a surface is its point reflection.
"""

from collections.abc import Callable, Iterable, Sequence
from dataclasses import dataclass
from functools import cached_property

import numpy as np

from core.arrays import Float32Array, FloatArray
from core.directional.medium import Medium
from core.directional.moduli import PER_TPA, ElasticFields
from core.directional.sphere import (
    Directions,
    SphereMesh,
    dot,
    pair_products,
    symmetric_times,
)
from core.directional.waves import Group, group_velocities

ROWS = ("x", "y", "z", "nx", "ny", "nz", "value")
_LARGEST = 1e30  # of a colour: still a float32, and what is made of it between two vertices too


@dataclass(frozen=True, eq=False)
class Fields:
    """What the surfaces of one medium share along some directions, each part computed once.

    Attributes
    ----------
    medium : Medium
    directions : Directions
        In the axes of the medium's stiffness.
    """

    medium: Medium
    directions: Directions

    @property
    def n(self) -> FloatArray:
        """The directions as unit vectors (3, N)."""
        return self.directions.n

    @cached_property
    def elastic(self) -> ElasticFields:
        """The elastic quantities."""
        return ElasticFields(self.medium, self.directions)

    @cached_property
    def pull_strain(self) -> FloatArray:
        """B n, (3, N), 1/GPa: the strain B_ij = S_ijkl n_k n_l of a unit pull, times n."""
        strain = self.medium.strain_operator @ self.directions.products
        return symmetric_times(strain, self.n)

    @cached_property
    def group(self) -> Group:
        """Phase speed and group velocity of the three sheets, km/s."""
        return group_velocities(self.medium, self.directions)


SurfaceMaker = Callable[[Fields, Float32Array], None]


def fill_young(fields: Fields, out: Float32Array) -> None:
    """Fill the surface E(n) n, GPa; normal 4 E (B n) - 3 n."""
    value = fields.elastic.young
    normal = (4 * value) * fields.pull_strain - 3 * fields.n
    _fill_radial(fields, [value], [normal], out)


def fill_compressibility(fields: Fields, out: Float32Array) -> None:
    """Fill the surface |β(n)| n, 1/TPa; normal ±(3 β n - 2 S_ijkk n_j)."""
    value = fields.elastic.linear_compressibility
    gradient = fields.medium.compressibility_matrix @ fields.n
    normal = np.copysign(1.0, value) * (3 * value * fields.n - 2 * gradient)
    _fill_radial(fields, [PER_TPA * value], [normal], out)


def fill_shear_least(fields: Fields, out: Float32Array) -> None:
    """Fill the surface of the least shear modulus over m, GPa."""
    _fill_shear(fields, "shear_least", fields.elastic.shear_extremes[0], out)


def fill_shear_greatest(fields: Fields, out: Float32Array) -> None:
    """Fill the surface of the greatest shear modulus over m, GPa."""
    _fill_shear(fields, "shear_greatest", fields.elastic.shear_extremes[1], out)


def fill_poisson_least(fields: Fields, out: Float32Array) -> None:
    """Fill the surface of the least Poisson's ratio over m; its radius is |ν|."""
    _fill_poisson(fields, "poisson_least", fields.elastic.poisson_extremes[0], out)


def fill_poisson_greatest(fields: Fields, out: Float32Array) -> None:
    """Fill the surface of the greatest Poisson's ratio over m; its radius is |ν|."""
    _fill_poisson(fields, "poisson_greatest", fields.elastic.poisson_extremes[1], out)


def fill_phase(fields: Fields, out: Float32Array) -> None:
    """Fill the three sheets v n, km/s; normal 2 v n - V."""
    speed, velocity = fields.group.speed, fields.group.velocity
    normals = [2 * v * fields.n - ray for v, ray in zip(speed, velocity, strict=True)]
    _fill_radial(fields, speed, normals, out)


def fill_slowness(fields: Fields, out: Float32Array) -> None:
    """Fill the three sheets n/v, s/km; normal V."""
    speed, velocity = fields.group.speed, fields.group.velocity
    for sheet, v, ray in zip(out, speed, velocity, strict=True):
        _fill(sheet, fields.n / v, ray, 1.0 / v)


def fill_wave(fields: Fields, out: Float32Array) -> None:
    """Fill the three sheets of group velocities V, km/s; normal n, value |V|."""
    for sheet, ray in zip(out, fields.group.velocity, strict=True):
        _fill(sheet, ray, fields.n, np.sqrt(dot(ray, ray)))


def fill_coloured_slowness(fields: Fields, values: FloatArray, out: Float32Array) -> None:
    """Fill the three slowness sheets with other values (3, N), in their own unit.

    An infinite value, as the focusing on a caustic, becomes the largest that can be drawn.
    """
    fill_slowness(fields, out)
    for sheet, value in zip(out, values, strict=True):
        sheet[6] = np.where(np.isfinite(sheet[0]), np.minimum(value, _LARGEST), np.nan)


ELASTIC_MAKERS: dict[str, SurfaceMaker] = {
    "young": fill_young,
    "compressibility": fill_compressibility,
    "shear_least": fill_shear_least,
    "shear_greatest": fill_shear_greatest,
    "poisson_least": fill_poisson_least,
    "poisson_greatest": fill_poisson_greatest,
}
WAVE_MAKERS: dict[str, SurfaceMaker] = {
    "slowness": fill_slowness,
    "phase": fill_phase,
    "wave": fill_wave,
}


def surface(medium: Medium, mesh: SphereMesh, maker: SurfaceMaker, sheets: int) -> Float32Array:
    """Return the surface of one maker.

    Parameters
    ----------
    medium : Medium
    mesh : SphereMesh
        N vertices, in the axes of the medium's stiffness.
    maker : callable
    sheets : int
        How many sheets it fills.

    Returns
    -------
    (sheets, 7, N) float32 array
    """
    result = _room(mesh, sheets)
    _draw(medium, mesh, [(maker, result)])
    return result


def all_surfaces(medium: Medium, mesh: SphereMesh) -> dict[str, Float32Array]:
    """Return every surface with a shape of its own, sharing what they have in common.

    Parameters
    ----------
    medium : Medium
        Without a density only the six elastic surfaces are made.
    mesh : SphereMesh

    Returns
    -------
    dict of (sheets, 7, N) float32 arrays
        By the key of the quantity.

    Notes
    -----
    The surfaces are parts of one block. Asked for one by one and freed together, their memory
    goes back to the system after every edit; fetching it again costs as much as the physics.
    """
    makers = ELASTIC_MAKERS if medium.density is None else ELASTIC_MAKERS | WAVE_MAKERS
    sheets = [3 if key in WAVE_MAKERS else 1 for key in makers]
    ends = np.cumsum(sheets)
    block = _room(mesh, int(ends[-1]))
    parts = np.split(block, ends[:-1])
    _draw(medium, mesh, list(zip(makers.values(), parts, strict=True)))
    return dict(zip(makers, parts, strict=True))


def _draw(
    medium: Medium, mesh: SphereMesh, work: Sequence[tuple[SurfaceMaker, Float32Array]]
) -> None:
    """Let makers fill their surfaces chunk by chunk, then reflect the half that was filled."""
    for place, dirs in mesh.chunks:
        fields = Fields(medium, dirs)
        for maker, block in work:
            maker(fields, block[:, :, place])
    half = mesh.half.count
    for _, block in work:
        np.negative(block[:, :6, :half], out=block[:, :6, half:])
        block[:, 6, half:] = block[:, 6, :half]


def _room(mesh: SphereMesh, sheets: int) -> Float32Array:
    """Return an empty surface over all vertices of the mesh."""
    return np.empty((sheets, len(ROWS), mesh.vertices.shape[1]), dtype=np.float32)


def _fill_shear(fields: Fields, which: str, value: FloatArray, out: Float32Array) -> None:
    """Fill a surface of extreme G; normal 8 G (A n - (m . B n) m) - n, A_ik = S_ijkl m_j m_l.

    The extreme over m is stationary in m, so only the explicit change with n remains, and m
    turns with n just enough to stay perpendicular to it.
    """
    n, m = fields.n, fields.elastic.transverse(which)
    form = fields.medium.compliance_christoffel @ pair_products(m)
    tilt = dot(m, fields.pull_strain)
    normal = (8 * value) * (symmetric_times(form, n) - tilt * m) - n
    _fill_radial(fields, [value], [normal], out)


def _fill_poisson(fields: Fields, which: str, value: FloatArray, out: Float32Array) -> None:
    """Fill a surface of extreme ν = -E w, w = S_ijkl n_i n_j m_k m_l.

    The normal is ±(ν n + E grad w + w grad E) with grad w = 2 (B(m) n - w n - (m . B n) m) and
    grad E = -4 E² (B n - n/E), where B(m) is the strain of a unit pull along m.
    """
    n, m = fields.n, fields.elastic.transverse(which)
    young, pull = fields.elastic.young, fields.pull_strain
    strain = fields.medium.strain_operator @ pair_products(m)
    tilt = dot(m, pull)
    # E w = -ν: the terms along n are ν + 2 ν - 4 ν, the one along B n is 4 ν E.
    normal = (
        (2 * young) * (symmetric_times(strain, n) - tilt * m)
        + (4 * value * young) * pull
        - value * n
    )
    _fill_radial(fields, [value], [np.copysign(1.0, value) * normal], out)


def _fill_radial(
    fields: Fields,
    values: Iterable[FloatArray],
    normals: Iterable[FloatArray],
    out: Float32Array,
) -> None:
    """Fill one sheet |value| n for each of the values (N,) and normals (3, N)."""
    for sheet, value, normal in zip(out, values, normals, strict=True):
        _fill(sheet, np.abs(value) * fields.n, normal, value)


def _fill(
    sheet: Float32Array, position: FloatArray, normal: FloatArray, value: FloatArray
) -> None:
    """Write the rows of one sheet (7, N); where the value is undefined, NaN in all of them."""
    sheet[0:3] = position
    sheet[3:6] = normal
    sheet[6] = value
    undefined = ~np.isfinite(sheet[6])
    if undefined.any():
        sheet[:, undefined] = np.nan
