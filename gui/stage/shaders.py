"""The shader programs of the stage, in GLSL 3.30 with the numbers of `lighting` written in."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

import numpy as np

from gui.stage import lighting
from gui.stage.gl import GL

UNDEFINED = -1.0e30  # stands for NaN in the value row: not every driver keeps NaN

_SURFACE_VERTEX = """#version 330 core
layout(location = 0) in vec3 a_place;
layout(location = 1) in vec3 a_normal;
layout(location = 2) in float a_value;
uniform mat4 u_matrix;   // part axes, in radii -> clip
uniform mat3 u_basis;    // part axes -> camera axes
uniform float u_distance;
uniform float u_unit;    // rows -> radii
uniform vec4 u_clip;
out vec3 v_normal;
out vec3 v_towards;
out float v_value;
invariant gl_Position;
void main() {
    vec3 place = a_place * u_unit;
    gl_Position = u_matrix * vec4(place, 1.0);
    gl_ClipDistance[0] = dot(u_clip, vec4(place, 1.0));
    v_normal = u_basis * a_normal;
    v_towards = vec3(0.0, 0.0, u_distance) - u_basis * place;
    v_value = a_value;
}
"""

_SURFACE_FRAGMENT = """#version 330 core
in vec3 v_normal;
in vec3 v_towards;
in float v_value;
uniform sampler2D u_table;
uniform vec3 u_range;         // ends of the table, and 1 where it is logarithmic
uniform float u_opacity;
uniform float u_back_amount;  // how much of the tint the inside gets
uniform float u_by_normal;    // 1: the inside is told by the normal, not by the winding
uniform vec3 u_undefined;
out vec4 o_colour;
void main() {
    vec3 n = normalize(v_normal);
    vec3 towards = normalize(v_towards);
    float facing = dot(n, towards);
    bool is_back = u_by_normal > 0.5 ? facing < 0.0 : !gl_FrontFacing;
    if (facing < 0.0) { n = -n; facing = -facing; }
    float value = u_range.z > 0.5 ? log(max(v_value, 1.0e-30)) : v_value;
    float position = clamp((value - u_range.x) / (u_range.y - u_range.x), 0.0, 1.0);
    vec3 colour = texture(u_table, vec2((position * 255.0 + 0.5) / 256.0, 0.5)).rgb;
    if (v_value < -1.0e29) colour = u_undefined;
    if (is_back) colour = mix(colour, colour * BACK_TINT, u_back_amount);
    float key = max((dot(n, KEY) + WRAP) / (1.0 + WRAP), 0.0);
    float fill = max(dot(n, FILL), 0.0);
    float gleam = max(dot(n, normalize(KEY + towards)), 0.0);
    gleam *= gleam; gleam *= gleam; gleam *= gleam; gleam *= gleam;  // to the 16th
    float aslant = clamp(1.0 - facing, 0.0, 1.0);
    float light = AMBIENT + KEY_POWER * key + FILL_POWER * fill;
    light *= 1.0 - RIM * aslant * aslant * aslant;
    float opacity = u_opacity;
    if (opacity < 1.0) opacity = mix(opacity, min(1.0, opacity + GLASS), aslant * aslant);
    o_colour = vec4(min(colour * light + SHEEN * gleam, 1.0) * opacity, opacity);
}
"""

_DEPTH_FRAGMENT = """#version 330 core
out vec4 o_colour;
void main() { o_colour = vec4(0.0); }
"""

# One stroke is a strip of four corners, widened in pixels and faded over its last one.
_LINE_VERTEX = """#version 330 core
layout(location = 0) in vec3 a_from;
layout(location = 1) in vec3 a_to;
uniform mat4 u_matrix;
uniform vec2 u_viewport;  // pixels
uniform float u_half;     // half the width in pixels
uniform float u_lift;
noperspective out float v_across;
noperspective out float v_along;
void main() {
    vec4 from = u_matrix * vec4(a_from, 1.0);
    vec4 to = u_matrix * vec4(a_to, 1.0);
    vec2 step = (to.xy / to.w - from.xy / from.w) * u_viewport * 0.5;
    float span = max(length(step), 1.0e-6);
    vec2 ahead = step / span;
    bool is_end = gl_VertexID >= 2;
    float side = (gl_VertexID & 1) == 0 ? -1.0 : 1.0;
    float reach = u_half + 0.5;
    vec4 place = is_end ? to : from;
    vec2 shift = side * reach * vec2(-ahead.y, ahead.x);
    place.xy += shift / (u_viewport * 0.5) * place.w;
    place.z -= u_lift * place.w;
    v_across = side * reach;
    v_along = is_end ? span : 0.0;
    gl_Position = place;
}
"""

_LINE_FRAGMENT = """#version 330 core
noperspective in float v_across;
noperspective in float v_along;
uniform float u_half;
uniform float u_dash;
uniform vec4 u_colour;
out vec4 o_colour;
void main() {
    float cover = clamp(u_half + 0.5 - abs(v_across), 0.0, 1.0);
    if (u_dash > 0.0 && mod(v_along, 1.8 * u_dash) > u_dash) cover = 0.0;
    if (cover <= 0.0) discard;
    float opacity = u_colour.a * cover;
    o_colour = vec4(u_colour.rgb * opacity, opacity);
}
"""

_DISC_VERTEX = """#version 330 core
layout(location = 0) in vec3 a_place;
uniform mat4 u_matrix;
void main() { gl_Position = u_matrix * vec4(a_place, 1.0); }
"""

_DISC_FRAGMENT = """#version 330 core
uniform vec4 u_colour;
out vec4 o_colour;
void main() { o_colour = vec4(u_colour.rgb * u_colour.a, u_colour.a); }
"""


@dataclass
class Program:
    """A linked program and where its uniforms are."""

    name: int
    _places: dict[str, int] = field(default_factory=dict)

    def use(self) -> None:
        """Make this the program that draws."""
        GL.glUseProgram(self.name)

    def set(self, **values: object) -> None:
        """Set uniforms `u_…` by their name without the prefix; matrices are row by row."""
        for key, value in values.items():
            place = self._place(key)
            numbers = np.asarray(value, dtype=np.float32)
            if numbers.shape == (4, 4):
                GL.glUniformMatrix4fv(place, 1, True, np.ascontiguousarray(numbers))
            elif numbers.shape == (3, 3):
                GL.glUniformMatrix3fv(place, 1, True, np.ascontiguousarray(numbers))
            else:
                _SETTERS[numbers.size](place, *numbers.ravel().tolist())

    def _place(self, key: str) -> int:
        """Return the location of a uniform, asked for once."""
        if key not in self._places:
            self._places[key] = GL.glGetUniformLocation(self.name, f"u_{key}")
        return self._places[key]


_SETTERS = {1: GL.glUniform1f, 2: GL.glUniform2f, 3: GL.glUniform3f, 4: GL.glUniform4f}


def surface_program() -> Program:
    """Compile the program that colours and lights a sheet."""
    return _link(_SURFACE_VERTEX, _with_lighting(_SURFACE_FRAGMENT))


def depth_program() -> Program:
    """Compile the program of the depth pre-pass: the same places, no colour."""
    return _link(_SURFACE_VERTEX, _DEPTH_FRAGMENT)


def line_program() -> Program:
    """Compile the program that draws strokes of a width in pixels."""
    return _link(_LINE_VERTEX, _LINE_FRAGMENT)


def disc_program() -> Program:
    """Compile the program that fills the section disc with one colour."""
    return _link(_DISC_VERTEX, _DISC_FRAGMENT)


def _with_lighting(source: str) -> str:
    """Write the numbers of `lighting` into a shader as defined names."""
    names = (
        "KEY", "FILL", "AMBIENT", "KEY_POWER", "FILL_POWER", "WRAP", "SHEEN", "RIM", "GLASS",
        "BACK_TINT",
    )
    lines = [f"#define {name} {_literal(getattr(lighting, name))}" for name in names]
    version, rest = source.split("\n", 1)
    return "\n".join([version, *lines, rest])


def _literal(value: float | Iterable[float]) -> str:
    """Write a number or a vector of three as GLSL does."""
    if isinstance(value, float):
        return f"{value:.7f}"
    return f"vec3({', '.join(f'{component:.7f}' for component in value)})"


def _link(vertex: str, fragment: str) -> Program:
    """Compile two shaders and link them.

    Raises
    ------
    RuntimeError
        With the driver's log, if it does not accept them.
    """
    program = GL.glCreateProgram()
    for kind, source in ((GL.GL_VERTEX_SHADER, vertex), (GL.GL_FRAGMENT_SHADER, fragment)):
        shader = GL.glCreateShader(kind)
        GL.glShaderSource(shader, source)
        GL.glCompileShader(shader)
        if not GL.glGetShaderiv(shader, GL.GL_COMPILE_STATUS):
            raise RuntimeError(f"shader: {GL.glGetShaderInfoLog(shader)}")
        GL.glAttachShader(program, shader)
        GL.glDeleteShader(shader)
    GL.glLinkProgram(program)
    if not GL.glGetProgramiv(program, GL.GL_LINK_STATUS):
        raise RuntimeError(f"shader program: {GL.glGetProgramInfoLog(program)}")
    return Program(int(program))
