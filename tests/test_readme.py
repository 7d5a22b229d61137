"""The README is true: its files are written, its commands are run, their output is compared line by line.

A block of a file follows a line that ends in "`NAME`:". In a `console` block a line after "$ " is a
command and the lines below it are what it prints; "..." stands for lines left out. The commands of
the set-up, in `bash` blocks, are run by continuous integration itself.
"""

import doctest
import re
import shlex
import shutil
from pathlib import Path

import pytest

from filmstack.cli.main import main

REPOSITORY = Path(__file__).parents[1]
TEXT = (REPOSITORY / "README.md").read_text(encoding="utf-8")
BLOCK = re.compile(r"(?:`(?P<name>[^`\n]+)`:\n\n)?```(?P<kind>\w+)\n(?P<body>.*?)\n```", re.DOTALL)
BLOCKS = [match.groupdict() for match in BLOCK.finditer(TEXT)]


@pytest.fixture
def folder(tmp_path, monkeypatch):
    monkeypatch.chdir(tmp_path)
    shutil.copytree(REPOSITORY / "designs", tmp_path / "designs")
    for block in BLOCKS:
        if block["name"]:
            path = tmp_path / block["name"]
            path.parent.mkdir(exist_ok=True)
            path.write_text(block["body"] + "\n", encoding="utf-8")
    return tmp_path


def same(printed, shown):
    """Compare line by line; a line "..." in the README stands for any lines."""
    pattern = "\n".join(r"(?:.*)" if line == "..." else re.escape(line) for line in shown)
    return re.fullmatch(pattern, printed.rstrip("\n"), re.DOTALL) is not None


def test_every_command_prints_what_the_readme_shows(folder, capsys):
    count = 0
    for block in BLOCKS:
        if block["kind"] != "console":
            continue
        for part in block["body"].removeprefix("$ ").split("\n$ "):
            line, *shown = part.split("\n")
            words = shlex.split(line)
            assert words[0] == "filmstack", line
            status = main(words[1:])
            printed = capsys.readouterr()
            assert same(printed.out + printed.err, shown), f"{line} prints\n{printed.out}{printed.err}"
            assert (status == 2) == printed.err.startswith("filmstack: ")
            for option in ("--output", "--plot"):
                if option in words:
                    assert (folder / words[words.index(option) + 1]).stat().st_size > 0
            count += 1
    assert count >= 4


def test_the_python_of_the_readme_gives_what_it_shows(folder):
    sessions = [block["body"] + "\n" for block in BLOCKS if block["kind"] == "python"]
    assert sessions
    parser, runner = doctest.DocTestParser(), doctest.DocTestRunner(optionflags=doctest.NORMALIZE_WHITESPACE)
    runner.run(parser.get_doctest("\n".join(sessions), {}, "README", "README.md", 0))
    assert runner.summarize().failed == 0


def test_the_main_job_in_one_command(folder):
    (main_job,) = [block["body"] for block in BLOCKS if block["kind"] == "bash" and "pip install" in block["body"]]
    (line,) = [part.strip() for part in main_job.replace("\\\n", " ").split("&&") if "spectrum" in part]
    words = shlex.split(line)
    assert words[0] == ".venv/bin/filmstack"
    assert main(words[1:]) == 0
    for option in ("--output", "--plot"):
        assert (folder / words[words.index(option) + 1]).stat().st_size > 0
