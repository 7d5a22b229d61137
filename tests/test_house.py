"""The house plan: imports point downwards, nothing heavy loads early, every public name is told."""

import ast
import importlib
import inspect
import json
import os
import re
import subprocess
import sys
from pathlib import Path

import pytest

import filmstack as fs
from filmstack.cli.main import COMMANDS

PACKAGE = Path(fs.__file__).parent
REPOSITORY = Path(__file__).parents[1]

# From the top of the house to the ground; rooms in one line share a floor.
FLOORS = [
    {"__main__"},
    {"cli"},
    {"report"},
    {"production"},
    {"tolerancing"},
    {"synthesis"},
    {"variation"},
    {"requirements"},
    {"analysis"},
    {"design"},
    {"expand"},
    {"stack"},
    {"materials"},
    {"files"},
    {"wave"},
    {"work"},
    {"errors", "constants", "arraytypes", ""},
]
FLOOR = {room: number for number, rooms in enumerate(FLOORS) for room in rooms}

MODULES = sorted(
    ".".join(path.relative_to(PACKAGE.parent).with_suffix("").parts).removesuffix(".__init__")
    for path in PACKAGE.rglob("*.py")
)


def source(module):
    path = PACKAGE.parent.joinpath(*module.split("."))
    return (path / "__init__.py" if path.is_dir() else path.with_suffix(".py")).read_text(encoding="utf-8")


def room(module):
    return [*module.split("."), ""][1]


class Imports(ast.NodeVisitor):
    """Names of filmstack modules that a module imports: all of them, and those of its top level."""

    def __init__(self, tree):
        self.anywhere, self.at_once, self.depth = set(), set(), 0
        self.visit(tree)

    def visit_FunctionDef(self, node):
        if node.name != "plot":  # the one exception: results draw themselves by a late import
            self.depth += 1
            self.generic_visit(node)
            self.depth -= 1

    def visit_If(self, node):
        if isinstance(node.test, ast.Name) and node.test.id == "TYPE_CHECKING":
            self.depth += 1
            self.generic_visit(node)
            self.depth -= 1
        else:
            self.generic_visit(node)

    def visit_Import(self, node):
        for alias in node.names:
            self._note(alias.name)

    def visit_ImportFrom(self, node):
        assert node.level == 0, "imports are absolute"
        for alias in node.names:
            name = f"{node.module}.{alias.name}"
            self._note(name if name in MODULES else node.module)

    def _note(self, name):
        if name.split(".")[0] == "filmstack":
            self.anywhere.add(name)
            if self.depth == 0:
                self.at_once.add(name)


IMPORTS = {module: Imports(ast.parse(source(module))) for module in MODULES}


@pytest.mark.parametrize("module", MODULES)
def test_imports_point_downwards(module):
    assert room(module) in FLOOR, f"{room(module)} has no floor: add it to FLOORS"
    upwards = [name for name in IMPORTS[module].anywhere if FLOOR[room(name)] < FLOOR[room(module)]]
    assert not upwards


def test_no_import_cycle():
    done, path = set(), []

    def walk(module):
        assert module not in path, " > ".join([*path[path.index(module) :], module])
        if module in done or module not in IMPORTS:
            return
        path.append(module)
        for name in sorted(IMPORTS[module].at_once - {"filmstack", module}):
            walk(name)
        done.add(path.pop())

    for module in MODULES:
        walk(module)


def test_no_public_name_is_hidden_by_a_module():
    beside = {path.stem for path in PACKAGE.iterdir()}
    assert beside.isdisjoint(fs.__all__)


@pytest.mark.parametrize("name", sorted(set(fs.__all__) - {"__version__"}))
def test_every_public_name_is_there_and_told(name):
    value = getattr(fs, name)
    assert inspect.isclass(value) or callable(value)
    assert len(inspect.getdoc(value) or "") > 20
    assert value.__module__.startswith("filmstack.")


def test_an_unknown_name_is_an_attribute_error():
    with pytest.raises(AttributeError, match=r"^module 'filmstack' has no attribute 'spectrun'$"):
        getattr(fs, "spectrun")  # noqa: B009 - as a person would write it


def modules_after(code, *, cwd):
    """Top-level names and filmstack modules in sys.modules of a fresh process after some code."""
    report = "import sys, json; print('\\n' + json.dumps(sorted(sys.modules)))"
    done = subprocess.run(
        [sys.executable, "-c", f"{code}\n{report}"], capture_output=True, text=True, cwd=cwd, check=True, timeout=120
    )
    return set(json.loads(done.stdout.splitlines()[-1]))


def test_import_filmstack_loads_the_standard_library_only(tmp_path):
    before = modules_after("pass", cwd=tmp_path)
    loaded = {name.split(".")[0] for name in modules_after("import filmstack", cwd=tmp_path) - before}
    assert loaded - set(sys.stdlib_module_names) == {"filmstack"}


HEAVY = {"numpy", "scipy", "pandas", "matplotlib", "numba"}


@pytest.mark.parametrize("word", ["--version", "--help"])
def test_short_answers_load_no_command(word, tmp_path):
    code = f"from filmstack.cli.main import main\nassert main([{word!r}]) == 0"
    loaded = modules_after(code, cwd=tmp_path)
    assert "filmstack.cli.main" in loaded
    assert not loaded & (HEAVY | {f"filmstack.cli.{name}" for name in COMMANDS})


@pytest.mark.parametrize(
    ("words", "allowed"),
    [
        *((f"{name} --help", set()) for name in COMMANDS),
        ("spectrum DESIGN", {"numpy"}),
        ("spectrum DESIGN --output all.csv", {"numpy"}),
        ("spectrum DESIGN --plot all.png", {"numpy", "matplotlib"}),
        ("peaks DESIGN", {"numpy"}),
        ("phase DESIGN", {"numpy", "scipy"}),  # how far the rounding of a table moves the GDD
        ("field DESIGN", {"numpy"}),
        ("ellipsometry DESIGN", {"numpy"}),
        ("admittance DESIGN", {"numpy"}),
        ("show DESIGN", {"numpy"}),
        ("materials", {"numpy"}),
        ("materials SiO2 --at 550", {"numpy"}),
    ],
)
def test_a_command_loads_what_it_needs(words, allowed, tmp_path):
    design = tmp_path / "mirror.toml"
    design.write_text(
        'filmstack = 1\nname = "mirror"\nreference_wavelength_nm = 600\nincident = "air"\nsubstrate = "SiO2"\n'
        'sequence = "(H L)^2 H"\n[letters]\nH = { material = "TiO2", quarter_waves = 1 }\n'
        'L = { material = "SiO2", quarter_waves = 1 }\n'
    )
    line = words.replace("DESIGN", str(design)).split()
    code = f"from filmstack.cli.main import main\nassert main({line!r}) == 0"
    assert modules_after(code, cwd=tmp_path) & HEAVY <= allowed


def tracked_files():
    listed = subprocess.run(["git", "ls-files"], capture_output=True, text=True, cwd=REPOSITORY, check=False)
    if listed.returncode != 0:  # not a clone, such as an unpacked source archive
        files = [path for path in REPOSITORY.rglob("*") if path.is_file()]
        return [path for path in files if not path.relative_to(REPOSITORY).parts[0].startswith(".")]
    return [path for line in listed.stdout.splitlines() if (path := REPOSITORY / line).is_file()]


def test_no_file_names_a_place_on_somebodys_machine():
    folders = "|".join(["home", "root", "tmp", "work", "Users", "opt"])
    place = re.compile(rf"(?<![\w.$}}/])/(?:{folders})/")
    found = [
        f"{path.relative_to(REPOSITORY)}:{number}"
        for path in tracked_files()
        if path.suffix in {".py", ".md", ".toml", ".sh", ".csv", ".cfg", ""}
        for number, line in enumerate(path.read_text(encoding="utf-8").splitlines(), start=1)
        if place.search(line)
    ]
    assert found == []


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_module_has_what_main_asks_for(name):
    module = importlib.import_module(f"filmstack.cli.{name}")
    assert len(module.HELP) > 20
    assert callable(module.add_arguments)
    assert callable(module.run)


def test_continuous_integration_runs_the_command_of_the_readme():
    command = "bash tests/run.sh"
    assert f"\n{command}\n" in (REPOSITORY / "README.md").read_text(encoding="utf-8")
    assert (REPOSITORY / ".ci" / "run").read_text(encoding="utf-8").splitlines()[-1] == command
    assert os.access(REPOSITORY / ".ci" / "run", os.X_OK)
