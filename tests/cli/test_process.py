"""The command as a process of its own: exit status, streams, start, and the editable install."""

import shutil
import signal
import subprocess
import sys
import sysconfig
import time
from pathlib import Path

import pytest

import filmstack as fs
from filmstack.cli import main as entry
from filmstack.cli.main import COMMANDS, main

REPOSITORY = Path(__file__).parents[2]
SCRIPT = Path(sysconfig.get_path("scripts")) / "filmstack"


def run(*words, cwd):
    return subprocess.run(
        [sys.executable, "-m", "filmstack", *words], capture_output=True, text=True, cwd=cwd, timeout=120, check=False
    )


def test_version(tmp_path):
    done = run("--version", cwd=tmp_path)
    assert (done.returncode, done.stdout, done.stderr) == (0, f"filmstack {fs.__version__}\n", "")


@pytest.mark.skipif(not SCRIPT.exists(), reason="the script is not installed beside this Python")
def test_the_installed_script_is_the_same_command(tmp_path):
    done = subprocess.run([SCRIPT, "--version"], capture_output=True, text=True, cwd=tmp_path, timeout=60, check=True)
    assert done.stdout == f"filmstack {fs.__version__}\n"


def test_help_tells_every_command(capsys):
    assert main([]) == main(["--help"]) == main(["-h"]) == 0
    told = capsys.readouterr().out
    for name, text in COMMANDS.items():
        assert told.count(f"\n  {name} ") == 3
        assert told.count(text) == 3


@pytest.mark.parametrize("name", COMMANDS)
def test_help_of_a_command(name, capsys):
    assert main([name, "--help"]) == 0
    told = capsys.readouterr().out
    assert told.startswith(f"usage: filmstack {name} ")


def test_wrong_input_is_one_line_without_traceback(tmp_path):
    done = run("spectrum", "none.toml", "--angle", "91", cwd=tmp_path)
    assert done.returncode == 2
    assert done.stdout == ""
    assert done.stderr == "filmstack: --angle: expected an angle of incidence from 0 to 90 degrees, got 91 degrees\n"


def test_an_interrupt_is_status_130(monkeypatch, capsys):
    monkeypatch.setattr(entry, "_run", lambda words: signal.raise_signal(signal.SIGINT))
    assert main(["spectrum"]) == 130
    assert capsys.readouterr().err == "filmstack: interrupted\n"


def test_several_faults_stand_a_line_each(monkeypatch, capsys):
    def fail(words):
        raise fs.DesignFileError("a.toml: first\nb.toml: second")

    monkeypatch.setattr(entry, "_run", fail)
    assert main([]) == 2
    assert capsys.readouterr().err == "filmstack:\n  a.toml: first\n  b.toml: second\n"


def test_a_file_that_may_not_be_read_is_told(monkeypatch, capsys):
    def fail(words):
        raise PermissionError(13, "Permission denied", "secret.toml")

    monkeypatch.setattr(entry, "_run", fail)
    assert main([]) == 2
    assert capsys.readouterr().err == "filmstack: secret.toml: Permission denied\n"


def test_a_reader_that_has_enough_is_no_error(tmp_path):
    process = subprocess.Popen(
        [
            sys.executable,
            "-c",
            "import time; time.sleep(0.5); import filmstack.__main__ as m; m.sys.exit(m.main(['--help']))",
        ],
        stdout=subprocess.PIPE,
        stderr=subprocess.PIPE,
        cwd=tmp_path,
    )
    process.stdout.close()  # as `head` does, before anything is written
    assert process.stderr.read() == b""
    process.stderr.close()
    assert process.wait(timeout=60) == 0


@pytest.mark.parametrize("word", ["--version", "--help"])
def test_the_answer_comes_at_once(word, tmp_path):
    seconds = []
    for _ in range(7):
        begin = time.perf_counter()
        run(word, cwd=tmp_path)
        seconds.append(time.perf_counter() - begin)
    assert min(seconds) < 0.15


def test_the_editable_install(tmp_path):
    checkout, environment = tmp_path / "checkout", tmp_path / "environment"
    skip = shutil.ignore_patterns(".*", "__pycache__", "build", "dist")
    shutil.copytree(REPOSITORY, checkout, ignore=skip)
    subprocess.run([sys.executable, "-m", "venv", "--without-pip", environment], check=True, timeout=120)
    python = environment / "bin" / "python"
    site = subprocess.run(
        [python, "-c", "import sysconfig; print(sysconfig.get_path('purelib'))"],
        capture_output=True,
        text=True,
        check=True,
        timeout=60,
    ).stdout.strip()
    # What filmstack needs is taken from the environment of the tests, so that no network is asked.
    (Path(site) / "zz-parent.pth").write_text(f"{sysconfig.get_path('purelib')}\n")
    pip = [sys.executable, "-m", "pip", "--python", python, "--disable-pip-version-check"]
    subprocess.run(
        [*pip, "install", "--quiet", "--no-deps", "--no-build-isolation", "--no-index", "-e", checkout],
        check=True,
        timeout=300,
        cwd=tmp_path,
    )
    code = (
        "import filmstack as fs; print(fs.__file__); print(len(fs.list_materials()) > 0); "
        "print(fs.material('SiO2').index(550.0).real > 1.4)"
    )
    told = subprocess.run([python, "-c", code], capture_output=True, text=True, check=True, timeout=120, cwd=tmp_path)
    assert told.stdout.splitlines() == [str(checkout / "filmstack" / "__init__.py"), "True", "True"]
    version = subprocess.run(
        [environment / "bin" / "filmstack", "--version"], capture_output=True, text=True, check=True, timeout=60
    )
    assert version.stdout == f"filmstack {fs.__version__}\n"
