"""The words of the verb `recover`: its arguments and its help."""

from __future__ import annotations

import argparse

RECOVER_HELP = """\
The independent constants of a crystal from measured wave speeds, by weighted least squares:
the 6x6 with standard uncertainties, which combinations of constants the speeds do not see, rows
that fit neither the crystal nor the other rows, and the directions whose blanks would tell most
next. Speeds that do not see everything are no error: the rank is reported, and what is not seen
is named and kept as it was at the start of the fit.

SPEEDS is a CSV file with a header, one measured speed a row:
  direction       "[1 1 0]", "(1 0 2)" or components along the crystal axes; or nx, ny, nz
  sheet           1 for the fastest wave along the direction, 2, 3; empty where not known
  polarisation    may be empty: a direction, longitudinal, or shear
  kind            phase, which is the default, or group (the direction is then that of the ray)
  speed_m_s, sigma_m_s         the speed and its standard uncertainty (0.1 % where empty)
  or thickness_mm, transit_us, sigma_us, path (through or echo), delay_ns, sigma_mm

Lines with # are comments. What the command line leaves out is read there:
  # density_kg_m3: 2649 ± 1
  # crystal_class: trigonal_6
  # unique_axis: y                           of monoclinic crystals
  # cell: 4.91 4.91 5.40 90 90 120           indices refer to it
  # crystal_axes: x||a, z||c*

Classes: triclinic, monoclinic, orthorhombic, tetragonal_7, tetragonal_6, trigonal_7,
trigonal_6, hexagonal, cubic, isotropic. Without any, none is assumed and 21 constants are
fitted.

Examples:
  tricline recover speeds.csv
  tricline recover speeds.csv --density 2649 --class trigonal_6
  tricline recover speeds.csv --robust --direction-sigma 0.2 --json > constants.json

--json gives constants_gpa, std_gpa (null for a constant that has a part in what is not seen),
rank, singular_values (1/GPa, one for each independent constant), undetermined, chi2, dof,
outliers (row numbers, from 1) and next_directions (crystal axes).
"""


def add_recover(verb: argparse.ArgumentParser) -> None:
    """Add the arguments of the verb `recover`."""
    verb.add_argument("speeds", metavar="SPEEDS", help="a CSV file of measured speeds")
    verb.add_argument(
        "--density",
        metavar="RHO",
        help='kg/m³, for example 2649 or "2649 ± 1"; else that of the file',
    )
    verb.add_argument(
        "--class",
        dest="class_name",
        metavar="NAME",
        help="crystal class; else that of the file",
    )
    verb.add_argument(
        "--direction-sigma",
        metavar="DEG",
        default="",
        help="standard uncertainty of every direction, degrees",
    )
    verb.add_argument(
        "--robust", action="store_true", help="let readings that are far off count less"
    )
