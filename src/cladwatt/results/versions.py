"""Versions of what the numbers depend on, to be kept with them."""

import platform
from importlib.metadata import PackageNotFoundError, version

__all__ = ["library_versions"]

_LIBRARIES = ("numpy", "scipy", "pandas", "opencv-python-headless", "tifffile")


def library_versions() -> dict[str, str]:
    """Return the versions of Python and of the installed libraries, by name."""
    found = {"python": platform.python_version()}
    for name in _LIBRARIES:
        try:
            found[name] = version(name)
        except PackageNotFoundError:
            continue
    return found
