"""One virtual screen, one OpenGL probe, fresh settings for every test."""

import os
import sys

import pytest

os.environ.setdefault("OPENBLAS_NUM_THREADS", "1")
if sys.platform == "linux":
    # Software OpenGL, so that pictures do not depend on the machine's graphics card.
    os.environ.setdefault("LIBGL_ALWAYS_SOFTWARE", "1")


@pytest.fixture(scope="session")
def gl_report(qapp):
    """What the OpenGL probe finds, asked once."""
    from gui.stage.gl_probe import probe

    return probe()


@pytest.fixture(autouse=True)
def _gl_where_it_works(request):
    """Skip tests marked `gl` where there is no OpenGL, unless it is required."""
    if request.node.get_closest_marker("gl") is None:
        return
    report = request.getfixturevalue("gl_report")
    if report.ok:
        return
    if os.environ.get("TRICLINE_REQUIRE_OPENGL") == "1":
        pytest.fail(f"OpenGL is required but does not work here: {report.reason}")
    pytest.skip(f"no OpenGL here: {report.reason}")


@pytest.fixture
def settings(tmp_path):
    """Settings that no other test and no user shares."""
    from PySide6.QtCore import QSettings

    return QSettings(str(tmp_path / "settings.ini"), QSettings.Format.IniFormat)
