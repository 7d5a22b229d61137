"""Files appear whole or not at all."""

import os
import stat

import pytest

from filmstack.errors import FilmstackError
from filmstack.files.atomic import atomic_writer


def test_a_file_takes_its_name_at_the_end(tmp_path):
    path = tmp_path / "a.csv"
    with atomic_writer(path) as file:
        file.write("angle 45°\n")
        assert not path.exists()
    assert path.read_bytes() == "angle 45°\n".encode()
    assert list(tmp_path.iterdir()) == [path]


def test_an_error_leaves_the_older_file_and_nothing_else(tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("old")
    with pytest.raises(KeyboardInterrupt), atomic_writer(path, "wb") as file:  # noqa: PT012 - what stops the writing
        file.write(b"half")
        raise KeyboardInterrupt
    assert path.read_text() == "old"
    assert list(tmp_path.iterdir()) == [path]


def test_permissions_are_those_of_a_plain_file(tmp_path):
    plain, path = tmp_path / "plain", tmp_path / "a.csv"
    plain.touch()
    with atomic_writer(path) as file:
        file.write("")
    assert stat.S_IMODE(path.stat().st_mode) == stat.S_IMODE(plain.stat().st_mode)
    os.chmod(path, 0o600)
    with atomic_writer(path) as file:
        file.write("")
    assert stat.S_IMODE(path.stat().st_mode) == 0o600


def test_a_missing_folder_is_told(tmp_path):
    path = tmp_path / "none" / "a.csv"
    message = f"{path}: can not be written: No such file or directory. Name a file in a folder that you may write to"
    with pytest.raises(FilmstackError) as caught, atomic_writer(path) as file:
        file.write("")
    assert str(caught.value) == message


def test_a_folder_of_that_name_is_told(tmp_path):
    path = tmp_path / "a.csv"
    path.mkdir()
    with pytest.raises(FilmstackError) as caught, atomic_writer(path) as file:
        file.write("")
    assert str(caught.value) == f"{path}: expected the name of a file, got a folder"
    assert list(tmp_path.iterdir()) == [path]
