"""Whether pictures can be made on this machine."""

import importlib.util
import os
import subprocess
import sys

from lumentrace.errors import UserError

_EXTRA = ("pyvista", "matplotlib")
_TRIAL = """
import pyvista
plotter = pyvista.Plotter(off_screen=True, window_size=(16, 16))
plotter.add_mesh(pyvista.Plane())
plotter.screenshot(return_img=True)
"""
_WINDOW = "VTK_DEFAULT_OPENGL_WINDOW"


def make_ready() -> None:
    """Let VTK draw without a display where there is none.

    Raises UserError, one line with what to install, where the extra or the system's OpenGL lacks.
    """
    lacking = [name for name in _EXTRA if importlib.util.find_spec(name) is None]
    if lacking:
        raise UserError(
            f"pictures need {' and '.join(lacking)}; "
            "type: pip install '.[pictures]' in lumentrace's folder"
        )
    if sys.platform == "linux" and not os.environ.get("DISPLAY"):
        os.environ.setdefault(_WINDOW, "vtkEGLRenderWindow")
    if not can_render():
        raise UserError(
            "pictures need OpenGL without a display, which does not work here; on Debian or "
            "Ubuntu type: apt-get install libegl1 libgl1-mesa-dri"
        )


def can_render() -> bool:
    """Whether VTK can draw. Another process tries, since one without OpenGL is killed."""
    done = subprocess.run([sys.executable, "-c", _TRIAL], capture_output=True)
    return done.returncode == 0
