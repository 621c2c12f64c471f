"""The cautions: what every reader of a number from this program has to know, in one place.

Help shows them and every report prints them.
"""

CAUTIONS = (
    "Everything here is linear elasticity of a perfect single crystal. It says nothing of "
    "strength, fatigue, creep or residual stress.",
    "Where a part carries load or pressure, the codes that hold at its place and licensed or "
    "certified people decide; a number from this program is one input to them.",
    "In ultrasonic inspection the beam of an anisotropic part walks off its wave normal by the "
    "power-flow angle: a probe set up for an isotropic part can miss a flaw.",
    "A table that is stable is not therefore right: axes, units and the order of the shear "
    "rows have to be checked against where it came from.",
)
