"""What a machine lacks is told in one line."""

import importlib.util

import pytest

from lumentrace.errors import UserError
from lumentrace_viz import probe


def test_without_opengl_the_packages_are_named(monkeypatch):
    monkeypatch.setattr(probe, "can_render", lambda: False)
    with pytest.raises(UserError) as caught:
        probe.make_ready()
    assert "apt-get install libegl1 libgl1-mesa-dri" in str(caught.value)
    assert "\n" not in str(caught.value)


def test_a_child_without_drivers_dies_and_this_process_does_not(monkeypatch):
    monkeypatch.setenv("VTK_DEFAULT_OPENGL_WINDOW", "vtkEGLRenderWindow")
    monkeypatch.setenv("__EGL_VENDOR_LIBRARY_DIRS", "/nonexistent")
    assert not probe.can_render()


def test_without_the_extra_it_is_named(monkeypatch):
    found = importlib.util.find_spec
    monkeypatch.setattr(
        importlib.util, "find_spec", lambda name: None if name == "pyvista" else found(name)
    )
    with pytest.raises(UserError, match=r"pictures need pyvista; type: pip install .*\[pictures\]"):
        probe.make_ready()
