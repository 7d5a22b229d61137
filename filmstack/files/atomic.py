"""Files that appear whole or not at all: results -> here -> disk.

What is written goes to a temporary file in the same folder, which takes the final name only once
everything is on disk. An interrupted or failed command leaves an older file as it was.
"""

from __future__ import annotations

import os
import tempfile
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path
from typing import IO, Any, Literal

from filmstack.errors import FilmstackError


@contextmanager
def atomic_writer(path: str | Path, mode: Literal["w", "wb"] = "w") -> Iterator[IO[Any]]:
    """Open a file that takes its name when the `with` block ends without an error.

    Parameters
    ----------
    path : str or Path
        Final name; an existing file is replaced at the end.
    mode : {"w", "wb"}
        Text (UTF-8, line ends as given) or bytes.

    Yields
    ------
    file object
        Open for writing.

    Raises
    ------
    FilmstackError
        If the folder does not exist or can not be written.
    """
    target = Path(path)
    encoding, newline = ("utf-8", "") if mode == "w" else (None, None)
    try:
        handle, name = tempfile.mkstemp(prefix=f".{target.name}.", suffix=".part", dir=target.parent)
    except OSError as error:
        raise FilmstackError(
            str(target), f"can not be written: {error.strerror}", "Name a file in a folder that you may write to"
        ) from error
    try:
        with os.fdopen(handle, mode, encoding=encoding, newline=newline) as file:
            yield file
        os.chmod(name, _usual_mode(target))
        os.replace(name, target)
    except IsADirectoryError as error:
        raise FilmstackError(str(target), "expected the name of a file, got a folder") from error
    finally:
        with suppress(FileNotFoundError):
            os.unlink(name)


def _usual_mode(target: Path) -> int:
    """Permissions of the file replaced, or what a plain `open` would have given."""
    with suppress(FileNotFoundError):
        return target.stat().st_mode & 0o777
    mask = os.umask(0)
    os.umask(mask)
    return 0o666 & ~mask
