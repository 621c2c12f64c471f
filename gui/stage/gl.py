"""The OpenGL bindings, set up once: every other file takes `GL` from here."""

import OpenGL

# Asking for errors after each call costs more than the calls; the tests ask once per picture.
OpenGL.ERROR_CHECKING = False
OpenGL.ERROR_LOGGING = False

from OpenGL import GL  # noqa: E402 - after the switches above

__all__ = ["GL"]
