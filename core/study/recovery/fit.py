"""What a fit hands over."""

from dataclasses import dataclass, field

from core.arrays import FloatArray
from core.study.recovery.evidence import Combination
from core.study.recovery.readings import Reading
from core.tensor.symmetry import CrystalClass


@dataclass(frozen=True, eq=False)
class FitOptions:
    """How to fit.

    Attributes
    ----------
    density_sigma : float
        Standard uncertainty of the density, kg/m³.
    direction_sigma_deg : float
        Standard uncertainty of every direction about each of two axes across it, degrees.
    robust : bool
        Let readings far off count less (Huber's loss).
    prior : (6, 6) array or None
        Constants expected, GPa: a further start, and what is kept where the readings do not
        speak. Without it that is the isotropic crystal of the same speeds.
    seed : int
        Of the random starts.
    """

    density_sigma: float = 0.0
    direction_sigma_deg: float = 0.0
    robust: bool = False
    prior: FloatArray | None = None
    seed: int = 0


@dataclass(frozen=True, eq=False)
class Fit:
    """Constants from measured speeds, and how far they can be trusted.

    M readings, P independent constants. Crystal axes throughout.

    Attributes
    ----------
    readings : tuple of Reading
        What was fitted.
    density : float
        kg/m³.
    cls : CrystalClass
    names : tuple of str
        Names of the P independent constants, "C11".
    stiffness : (6, 6) array
        GPa.
    std : (6, 6) array
        Standard uncertainties, GPa; infinite where a constant has a part in what is not seen.
    covariance : (21, 21) array
        GPa², along the upper triangle by rows; of what is seen only.
    constants : (P,) array
        The independent constants, GPa.
    parameter_covariance, correlation : (P, P) arrays
        Of the independent constants, of what is seen only.
    information : (P, P) array
        Jᵀ J of the weighted Jacobian, 1/GPa²: what the readings add up to.
    rank : int
        How many combinations of constants are seen; P when all are.
    singular_values : (P,) array
        1/GPa, descending: each is one over the standard uncertainty of a combination of unit
        Kelvin norm.
    undetermined : tuple of Combination
        What is not seen.
    chi2 : float
    dof : int
        Readings less rank; 0 where nothing is left to check the fit with.
    predicted, sigma : (M,) arrays
        m/s; `sigma` is that of the reading with the uncertainty of its direction.
    residuals : (M,) array
        (predicted - measured)/σ.
    studentised, leverage, influence : (M,) arrays
        See `core.study.recovery.evidence.Diagnostics`.
    shifts : (M, P) array
        Change of each constant if the reading were left out, GPa.
    sheets : (M,) tuple of int
        1 fastest: as given, or as found.
    outliers : tuple of int
        Rows of readings that fit neither the crystal nor the other readings.
    stable : bool
    stability_probability : float or None
        That the crystal is stable, given the uncertainties; None when not all is seen.
    starts : int
        How many starts were needed.
    notes : tuple of str
        Sentences for people.
    """

    readings: tuple[Reading, ...]
    density: float
    cls: CrystalClass
    names: tuple[str, ...]
    stiffness: FloatArray
    std: FloatArray
    covariance: FloatArray
    constants: FloatArray
    parameter_covariance: FloatArray
    correlation: FloatArray
    information: FloatArray
    rank: int
    singular_values: FloatArray
    undetermined: tuple[Combination, ...]
    chi2: float
    dof: int
    predicted: FloatArray
    sigma: FloatArray
    residuals: FloatArray
    studentised: FloatArray
    leverage: FloatArray
    influence: FloatArray
    shifts: FloatArray
    sheets: tuple[int, ...]
    outliers: tuple[int, ...]
    stable: bool
    stability_probability: float | None
    starts: int
    notes: tuple[str, ...] = field(default=())

    @property
    def is_determined(self) -> bool:
        """Whether every constant is seen."""
        return self.rank == len(self.names)
