"""How each number of a report is computed: formula and source, in one table."""

from __future__ import annotations

from collections.abc import Iterable

from core.directional.quantities import quantity

Method = tuple[str, str, str]
"""What, formula in words or symbols, source."""

METHODS: dict[str, tuple[Method, ...]] = {
    "verdict": (
        ("Eigenstiffnesses, strains",
         "Eigenvalues and eigenvectors of P C P with P = diag(1, 1, 1, √2, √2, √2), the Kelvin "
         "form. Stable: all six positive.",
         "W. Thomson (Kelvin) 1856; M. M. Mehrabadi, S. C. Cowin, Q. J. Mech. Appl. Math. 43 "
         "(1990) 15"),
        ("Uncertainty of the softest",
         "First order: ∂λ/∂C_IJ from its eigenstrain, with the covariance of the constants.",
         "law of propagation of uncertainty, JCGM 100:2008"),
    ),
    "stability": (
        ("Stability criteria", "Leading minors and their closed forms for each class; "
         "necessary and sufficient.",
         "M. Born, K. Huang 1954; F. Mouhat, F.-X. Coudert, Phys. Rev. B 90 (2014) 224104"),
    ),
    "symmetry": (
        ("Distance to a class", "‖C − P(C)‖/‖C‖ in Kelvin form, P the orthogonal projection "
         "onto the class in the axes given.",
         "M. Moakher, A. N. Norris, J. Elasticity 85 (2006) 215"),
    ),
    "averages": (
        ("Voigt average", "9 K = C11 + C22 + C33 + 2 (C12 + C13 + C23); 15 G = C11 + C22 + C33 "
         "− C12 − C13 − C23 + 3 (C44 + C55 + C66)", "W. Voigt 1928"),
        ("Reuss average", "1/K = S11 + S22 + S33 + 2 (S12 + S13 + S23); 15/G = 4 (S11 + S22 + "
         "S33) − 4 (S12 + S13 + S23) + 3 (S44 + S55 + S66)", "A. Reuss 1929"),
        ("Hill average", "Mean of Voigt and Reuss; E = 9 K G/(3 K + G), ν = E/(2 G) − 1.",
         "R. Hill, Proc. Phys. Soc. A 65 (1952) 349"),
        ("Hashin–Shtrikman bounds", "Tightest over all isotropic comparison bodies nowhere "
         "stiffer, or nowhere softer, than the crystal.",
         "Z. Hashin, S. Shtrikman, J. Mech. Phys. Solids 10 (1962) 343; L. J. Walpole, ibid. "
         "14 (1966) 151"),
        ("Universal index", "5 G_V/G_R + K_V/K_R − 6",
         "S. I. Ranganathan, M. Ostoja-Starzewski, Phys. Rev. Lett. 101 (2008) 055504"),
        ("Log-Euclidean index", "√[ln²(K_V/K_R) + 5 ln²(G_V/G_R)]",
         "C. M. Kube, AIP Advances 6 (2016) 095209"),
        ("Percent anisotropies", "100 (K_V − K_R)/(K_V + K_R), and the same of G",
         "D. H. Chung, W. R. Buessem, J. Appl. Phys. 38 (1967) 2010"),
        ("Debye speed", "(⟨Σ v⁻³⟩/3)^(−1/3), mean over the sphere by Lebedev's rule, refined "
         "until it stands still.", "P. Debye 1912; V. I. Lebedev 1976"),
    ),
    "extremes": (
        ("Extremes", "Every local extreme of a mesh of 1,281 directions followed by Newton's "
         "method to where the quantity is flat; compressibility from its eigenvalues.",
         "closed derivatives of the definitions"),
    ),
    "comparison": (
        ("Rotation", "C′_ijkl = R_ia R_jb R_kc R_ld C_abcd with v_part = R v_crystal",
         "J. F. Nye, Physical Properties of Crystals (1957)"),
        ("Along the part axes", "E_i = 1/S_ii; G = 1/S44, 1/S55, 1/S66; ν_ij = −S_ji/S_ii; "
         "coupling η = S_IJ/S_JJ", "S. G. Lekhnitskii 1963"),
        ("Turned against each other", "Rotation angle of R_Bᵀ R_A",
         "Euler's theorem on rotations"),
    ),
    "cutting_error": (
        ("Cutting error", "Least and greatest within the cone about the direction, its edge "
         "included, to 1e-6 of their spread; slope along the steepest tilt.",
         "search by samples and refinement"),
    ),
}
"""Methods by the section of the report that uses them."""

_ALWAYS = ("young", "compressibility", "shear_least", "poisson_least")
_WAVES = ("phase", "wave", "power_flow")


def methods_of(sections: Iterable[str], shown: Iterable[str], has_waves: bool) -> list[Method]:
    """Return the methods behind some sections and the quantities that figures show."""
    found = [method for key in sections for method in METHODS.get(key, ())
             if has_waves or method[0] != "Debye speed"]
    keys = dict.fromkeys((*_ALWAYS, *(_WAVES if has_waves else ()), *shown))
    return found + [(f"{entry.name}, {entry.symbol}", entry.definition, entry.source)
                    for entry in map(quantity, keys)]
