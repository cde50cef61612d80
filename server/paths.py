"""Where the files that are not code lie: beside the package in a wheel, in the root of a checkout."""

from __future__ import annotations

from pathlib import Path

from server.errors import JointError

_PACKAGE = Path(__file__).resolve().parent


def data_folder(name: str) -> Path:
    """Return the folder ``name`` (templates, static, seed_data): in the installed package, else in the checkout."""
    for folder in (_PACKAGE / "_data" / name, _PACKAGE.parent / name):
        if folder.is_dir():
            return folder
    raise JointError(f"The folder {name} is missing from this installation. Install the program again.")
