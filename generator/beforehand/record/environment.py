"""What can decide a number: the versions behind a run. Nothing here is part of ``record.json``."""

import platform
import sys
from importlib.metadata import PackageNotFoundError, version

import threadpoolctl  # type: ignore[import-untyped]  # it ships no types

PACKAGES = ("beforehand", "numpy", "scipy", "pandas", "statsmodels", "pydantic", "pyyaml", "rfc8785", "jinja2")


def environment() -> dict[str, str]:
    """Give the name and version of everything that can decide a number of a run."""
    return {
        "python": f"{platform.python_implementation()} {platform.python_version()}",
        "machine": f"{platform.machine()}, {sys.platform}",
        "libc": " ".join(platform.libc_ver()).strip(),
        **{name: _version(name) for name in PACKAGES},
        **_linear_algebra(),
    }


def _version(name: str) -> str:
    try:
        return version(name)
    except PackageNotFoundError:
        return "not installed"


def _linear_algebra() -> dict[str, str]:
    """Name the linear-algebra libraries that are loaded, with the kernel they chose for this processor."""
    import numpy.linalg  # noqa: F401 -- loads its library
    import scipy.linalg  # noqa: F401

    libraries = [library for library in threadpoolctl.threadpool_info() if library.get("user_api") == "blas"]
    words = sorted(
        f"{library.get('internal_api')} {library.get('version')} {library.get('architecture')}" for library in libraries
    )
    return {f"linear algebra {number}": text for number, text in enumerate(words, 1)}
