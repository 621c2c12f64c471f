"""The table of directional quantities: everything the program knows of each, in one place.

Menus, sections, hemispheres, tables, files and the command line read it. A new quantity is one
more entry here (and its kernel, where none of the present ones gives it).
"""

from collections.abc import Callable
from dataclasses import dataclass
from difflib import get_close_matches

import numpy as np

from core.arrays import Float32Array, FloatArray
from core.directional import moduli, surfaces, waves
from core.directional.medium import Medium
from core.directional.sphere import Directions, SphereMesh
from core.directional.surfaces import Fields, SurfaceMaker
from core.errors import InputError


@dataclass(frozen=True)
class Quantity:
    """One quantity that depends on direction.

    Attributes
    ----------
    key : str
        Its name in files and on the command line.
    name, short, symbol, unit : str
        For the window, `short`, of symbols, for narrow tables; the unit is empty for a pure
        number. Values are in this unit.
    sheets : int
        1, or 3 from the fastest wave to the slowest.
    signed : bool
        Whether it may be negative.
    wave : bool
        Whether it needs a density.
    definition, source : str
        One sentence and where it comes from, for help and tooltips.
    decimals : int
        Digits after the point that a table shows of an ordinary crystal.
    shape : str
        What is drawn: "radial", |value| along the direction; "slowness", the slowness sheets
        coloured by the value; "wave", the wave surface.
    logarithmic : bool
        Whether its values spread over decades, so that colours should follow their logarithm.
    values : callable
        (Medium, Directions of N) to a (sheets, N) array.
    maker : callable
        Fills the surface that is drawn; see `surfaces`.
    """

    key: str
    name: str
    short: str
    symbol: str
    unit: str
    sheets: int
    signed: bool
    wave: bool
    definition: str
    source: str
    decimals: int
    values: Callable[[Medium, Directions], FloatArray]
    maker: SurfaceMaker
    shape: str = "radial"
    logarithmic: bool = False

    @property
    def colour(self) -> str:
        """The kind of colour scale: "diverging" about zero, or "sequential"."""
        return "diverging" if self.signed else "sequential"

    def surface(self, medium: Medium, mesh: SphereMesh) -> Float32Array:
        """Return the surface over the N vertices of a mesh, (sheets, 7, N)."""
        return surfaces.surface(medium, mesh, self.maker, self.sheets)


def quantity(key: str) -> Quantity:
    """Return the quantity of a key.

    Raises
    ------
    InputError
        If there is none; the hint names the nearest, or all.
    """
    if key in QUANTITIES:
        return QUANTITIES[key]
    near = get_close_matches(key.strip().lower().replace(" ", "_"), QUANTITIES, n=1)
    hint = f"Did you mean '{near[0]}'?" if near else f"There are {', '.join(QUANTITIES)}."
    raise InputError(f"'{key}' is not a quantity.", hint, where="quantity")


def _slowness(medium: Medium, dirs: Directions) -> FloatArray:
    """Return 1/v of the three sheets, (3, N), s/km."""
    return np.asarray(1.0 / waves.speeds(medium, dirs))


def _ray_speed(medium: Medium, dirs: Directions) -> FloatArray:
    """Return |V| of the three sheets, (3, N), km/s."""
    velocity = waves.group_velocities(medium, dirs).velocity
    return np.asarray(np.sqrt((velocity * velocity).sum(axis=1)))


def _single(
    field: Callable[[Medium, Directions], FloatArray],
) -> Callable[[Medium, Directions], FloatArray]:
    """Give a quantity of one sheet, (N,), its axis of sheets, (1, N)."""
    return lambda medium, dirs: field(medium, dirs)[None, :]


def _member(
    pair: Callable[[Medium, Directions], tuple[FloatArray, FloatArray]], index: int
) -> Callable[[Medium, Directions], FloatArray]:
    """Take the least (0) or the greatest (1) of a pair as a quantity of one sheet."""
    return lambda medium, dirs: pair(medium, dirs)[index][None, :]


def _coloured(values: Callable[[Medium, Directions], FloatArray]) -> SurfaceMaker:
    """Draw a quantity of the three sheets as colours on the slowness surface."""

    def fill(fields: Fields, out: Float32Array) -> None:
        colours = values(fields.medium, fields.directions)
        surfaces.fill_coloured_slowness(fields, colours, out)

    return fill


_NYE = "J. F. Nye, Physical Properties of Crystals (Oxford 1957), chapter 8."
_TRANSVERSE = (
    "The form S_ijkl in the plane normal to n, whose eigenvalues are the extremes over m; "
    "Nye 1957, chapter 8, for the moduli."
)
_MUSGRAVE = "M. J. P. Musgrave, Crystal Acoustics (Holden-Day 1970)."
_AULD = "B. A. Auld, Acoustic Fields and Waves in Solids (Wiley 1973), volume 1, chapter 7."

_ENTRIES = (
    Quantity(
        key="young",
        name="Young's modulus",
        short="E",
        symbol="E",
        unit="GPa",
        sheets=1,
        signed=False,
        wave=False,
        definition="Stress over strain along n in a bar cut along n and pulled at its ends: "
        "1/E = S_ijkl n_i n_j n_k n_l.",
        source=_NYE,
        decimals=1,
        values=_single(moduli.young),
        maker=surfaces.fill_young,
    ),
    Quantity(
        key="compressibility",
        name="Linear compressibility",
        short="β",
        symbol="β",
        unit="1/TPa",
        sheets=1,
        signed=True,
        wave=False,
        definition="Shortening along n per unit of pressure all round, β = S_ijkk n_i n_j; "
        "negative where the crystal grows along n under pressure.",
        source=_NYE,
        decimals=2,
        values=_single(moduli.compressibility),
        maker=surfaces.fill_compressibility,
    ),
    Quantity(
        key="shear_least",
        name="Shear modulus, least",
        short="G least",
        symbol="G min",
        unit="GPa",
        sheets=1,
        signed=False,
        wave=False,
        definition="The least shear modulus over all shear directions m in the plane with "
        "normal n: 1/G = 4 S_ijkl n_i m_j n_k m_l.",
        source=_TRANSVERSE,
        decimals=1,
        values=_member(moduli.shear_extremes, 0),
        maker=surfaces.fill_shear_least,
    ),
    Quantity(
        key="shear_greatest",
        name="Shear modulus, greatest",
        short="G greatest",
        symbol="G max",
        unit="GPa",
        sheets=1,
        signed=False,
        wave=False,
        definition="The greatest shear modulus over all shear directions m in the plane with "
        "normal n: 1/G = 4 S_ijkl n_i m_j n_k m_l.",
        source=_TRANSVERSE,
        decimals=1,
        values=_member(moduli.shear_extremes, 1),
        maker=surfaces.fill_shear_greatest,
    ),
    Quantity(
        key="poisson_least",
        name="Poisson's ratio, least",
        short="ν least",
        symbol="ν min",
        unit="",
        sheets=1,
        signed=True,
        wave=False,
        definition="The least ν = −E S_ijkl n_i n_j m_k m_l over all m perpendicular to the "
        "pull n; negative where the crystal widens along m.",
        source=_TRANSVERSE,
        decimals=3,
        values=_member(moduli.poisson_extremes, 0),
        maker=surfaces.fill_poisson_least,
    ),
    Quantity(
        key="poisson_greatest",
        name="Poisson's ratio, greatest",
        short="ν greatest",
        symbol="ν max",
        unit="",
        sheets=1,
        signed=True,
        wave=False,
        definition="The greatest ν = −E S_ijkl n_i n_j m_k m_l over all m perpendicular to "
        "the pull n.",
        source=_TRANSVERSE,
        decimals=3,
        values=_member(moduli.poisson_extremes, 1),
        maker=surfaces.fill_poisson_greatest,
    ),
    Quantity(
        key="slowness",
        name="Slowness",
        short="1/v",
        symbol="1/v",
        unit="s/km",
        sheets=3,
        signed=False,
        wave=True,
        definition="One over the phase speed of the plane wave with normal n, for each of the "
        "three waves.",
        source=_MUSGRAVE,
        decimals=4,
        values=_slowness,
        maker=surfaces.fill_slowness,
        shape="slowness",
    ),
    Quantity(
        key="phase",
        name="Phase speed",
        short="v",
        symbol="v",
        unit="km/s",
        sheets=3,
        signed=False,
        wave=True,
        definition="Speed of the plane wave with normal n: ρ v² are the eigenvalues of "
        "Γ_ik = C_ijkl n_j n_l.",
        source=_AULD,
        decimals=3,
        values=waves.speeds,
        maker=surfaces.fill_phase,
    ),
    Quantity(
        key="wave",
        name="Wave surface (group velocity)",
        short="V group",
        symbol="V",
        unit="km/s",
        sheets=3,
        signed=False,
        wave=True,
        definition="Velocity of the energy of the plane wave with normal n and polarisation p: "
        "V_j = C_ijkl p_i p_k n_l / (ρ v).",
        source=_MUSGRAVE,
        decimals=3,
        values=_ray_speed,
        maker=surfaces.fill_wave,
        shape="wave",
    ),
    Quantity(
        key="power_flow",
        name="Power-flow angle",
        short="ψ flow",
        symbol="ψ",
        unit="°",
        sheets=3,
        signed=False,
        wave=True,
        definition="Angle between the wave normal n and the group velocity V: cos ψ = v/|V|.",
        source=_AULD,
        decimals=2,
        values=waves.power_flow,
        maker=_coloured(waves.power_flow),
        shape="slowness",
    ),
    Quantity(
        key="polarisation",
        name="Polarisation deviation",
        short="p off",
        symbol="δ",
        unit="°",
        sheets=3,
        signed=False,
        wave=True,
        definition="Angle between the polarisation p and the wave normal n, or the plane "
        "normal to n, whichever is nearer.",
        source=_MUSGRAVE,
        decimals=2,
        values=waves.polarisation_deviation,
        maker=_coloured(waves.polarisation_deviation),
        shape="slowness",
    ),
    Quantity(
        key="focusing",
        name="Focusing",
        short="A focusing",
        symbol="A",
        unit="",
        sheets=3,
        signed=False,
        wave=True,
        definition="Solid angle of wave normals over the solid angle of the rays they send "
        "energy into; 1 in an isotropic solid, infinite on a caustic.",
        source="H. J. Maris, J. Acoust. Soc. Am. 50 (1971) 812.",
        decimals=2,
        values=waves.focusing,
        maker=_coloured(waves.focusing),
        shape="slowness",
        logarithmic=True,
    ),
)

QUANTITIES: dict[str, Quantity] = {entry.key: entry for entry in _ENTRIES}
