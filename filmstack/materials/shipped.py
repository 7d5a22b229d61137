"""Find the shipped data folders, in a wheel and in a checkout alike."""

from __future__ import annotations

from pathlib import Path
from typing import Literal

from filmstack.errors import FilmstackError

_PACKAGE = Path(__file__).resolve().parents[1]


def shipped_folder(name: Literal["materials", "designs"]) -> Path:
    """Return the folder of the shipped materials or designs.

    Raises
    ------
    FilmstackError
        If the installation lacks it.
    """
    for folder in (_PACKAGE / "shipped" / name, _PACKAGE.parent / name):
        if folder.is_dir():
            return folder
    raise FilmstackError(f"shipped folder {name!r}", "not found beside the package", "Install filmstack again")
