"""Folders that travel with the program: in a wheel inside the package, in a checkout at its top."""

from pathlib import Path

_PACKAGE = Path(__file__).resolve().parent


def asset_dir(name: str) -> Path:
    """The folder of that name: `templates`, `static` or `sample_jobs`.

    Raises:
        FileNotFoundError: where it is in neither place.
    """
    for base in (_PACKAGE, _PACKAGE.parent):
        if (base / name).is_dir():
            return base / name
    raise FileNotFoundError(name)
