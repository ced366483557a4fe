"""The contracts of pyproject.toml are tried on throwaway packages: each must refuse what architecture forbids."""

from __future__ import annotations

import ast
import re
import shutil
import subprocess
import sys
import tomllib
from importlib.metadata import packages_distributions
from pathlib import Path

import pytest

PROJECT = Path(__file__).resolve().parents[2]
SETTINGS = tomllib.loads((PROJECT / "pyproject.toml").read_text("utf-8"))
CONTRACTS = {contract["id"]: contract for contract in SETTINGS["tool"]["importlinter"]["contracts"]}
ROOMS = ("desk", "cli", "services", "optimise", "storage", "exchange", "documents", "domain")

# Where each library may be imported. The parts of desk and optimise that have a rule of their own stand as such.
HOMES = {
    "numpy": {"optimise", "exchange", "desk.plots"},
    "scipy": {"optimise"},
    "highspy": {"optimise"},
    "PySide6": {"desk", "desk.plots"},
    "shiboken6": {"desk", "desk.plots"},
    "pandas": {"exchange"},
    "openpyxl": {"exchange"},
    "python_calamine": {"exchange"},
    "rapidfuzz": {"exchange"},
    "defusedxml": {"exchange"},
    "sqlalchemy": {"storage"},
    "alembic": {"storage"},
    "filelock": {"storage"},
    "reportlab": {"documents"},
    "pypdfium2": {"documents"},
    "argon2": {"services"},
    "pyqtgraph": {"desk.plots"},
}
# May be used by any room but these two.
ELSEWHERE = {"platformdirs": {"domain", "optimise"}}


@pytest.fixture
def house(tmp_path: Path) -> Path:
    """An empty package with all rooms and the project's own contracts."""
    for room in ("", *ROOMS, "optimise/build", "desk/plots"):
        folder = tmp_path / "blendapp" / room
        folder.mkdir(parents=True, exist_ok=True)
        (folder / "__init__.py").touch()
    (tmp_path / "blendapp" / "__main__.py").write_text("import blendapp.cli, blendapp.desk\n", "utf-8")
    shutil.copy(PROJECT / "pyproject.toml", tmp_path)
    return tmp_path


def put(house: Path, module: str, line: str) -> None:
    path = house.joinpath(*module.split(".")).with_suffix(".py")
    path.write_text(line + "\n", "utf-8")


def lint(house: Path, *contracts: str) -> tuple[int, str]:
    """Exit status and words of lint-imports, held to some contracts or to all."""
    chosen = [word for contract in contracts for word in ("--contract", contract)]
    command = "from importlinter.cli import lint_imports_command as go; go()"
    ran = subprocess.run([sys.executable, "-c", command, "--no-cache", "--no-logo", *chosen], cwd=house,
                         capture_output=True, text=True, encoding="utf-8", timeout=60, check=False)
    return ran.returncode, ran.stdout + ran.stderr


def test_what_the_architecture_permits_breaks_no_contract(house: Path) -> None:
    for library, homes in HOMES.items():
        for home in homes:
            put(house, f"blendapp.{home}.uses_{library}", f"import {library}")
    for room in ROOMS:
        put(house, f"blendapp.{room}.uses_itself", f"import blendapp.{room}")
    for front in ("desk", "cli"):
        put(house, f"blendapp.{front}.asks", "import blendapp.services, blendapp.domain")
    behind = ("optimise", "optimise.build", "storage", "exchange", "documents", "domain")
    put(house, "blendapp.services.joins", "import " + ", ".join(f"blendapp.{room}" for room in behind))
    put(house, "blendapp.optimise.build.formula", "import blendapp.domain, blendapp.optimise")
    for room in ("storage", "exchange", "documents"):
        put(house, f"blendapp.{room}.speaks", "import blendapp.domain")
    status, words = lint(house)
    assert status == 0, words


BREACHES = [
    ("rooms", "blendapp.services.bad", "import blendapp.desk"),
    ("rooms", "blendapp.services.bad", "import blendapp.cli"),
    ("rooms", "blendapp.domain.bad", "from blendapp import services"),
    ("rooms", "blendapp.storage.bad", "from blendapp.services import price"),
    ("rooms", "blendapp.desk.bad", "import blendapp.cli"),
    ("rooms", "blendapp.cli.bad", "import blendapp.__main__"),
    ("rooms", "blendapp.drawer", "import math"),
    ("middle", "blendapp.exchange.bad", "from blendapp.optimise import build"),
    ("middle", "blendapp.documents.bad", "import blendapp.storage"),
    ("front", "blendapp.desk.bad", "import blendapp.optimise"),
    ("front", "blendapp.desk.plots.bad", "from blendapp.optimise import build"),
    ("front", "blendapp.cli.bad", "from blendapp import storage"),
    ("front", "blendapp.cli.bad", "def late():\n    import blendapp.exchange"),
    ("front", "blendapp.desk.bad", "import blendapp.documents"),
    ("domain", "blendapp.domain.bad", "import numpy as np"),
    ("domain", "blendapp.domain.bad", "def late():\n    from dateutil import parser"),
    ("optimise", "blendapp.optimise.bad", "import pandas"),
    ("optimise", "blendapp.optimise.build.bad", "import sqlalchemy"),
    ("build", "blendapp.optimise.bad", "from blendapp import domain"),
    ("numpy", "blendapp.desk.bad", "import numpy.typing"),
    ("numpy", "blendapp.services.bad", "import numpy"),
    ("solvers", "blendapp.services.bad", "from scipy.optimize import linprog"),
    ("window", "blendapp.documents.bad", "from PySide6.QtGui import QPainter"),
    ("tables", "blendapp.storage.bad", "import pandas"),
    ("mill-file", "blendapp.services.bad", "from sqlalchemy import select"),
    ("paper", "blendapp.desk.bad", "import pypdfium2"),
    ("plots", "blendapp.desk.bad", "import pyqtgraph"),
    ("passwords", "blendapp.storage.bad", "from argon2 import PasswordHasher"),
]


@pytest.mark.parametrize(("contract", "module", "line"), BREACHES)
def test_one_bad_import_breaks_its_contract(house: Path, contract: str, module: str, line: str) -> None:
    put(house, "blendapp.services.price", "import blendapp.domain")
    status, words = lint(house, contract)
    assert status == 0, words
    put(house, module, line)
    status, words = lint(house, contract)
    assert status == 1
    assert f"{CONTRACTS[contract]['name']} BROKEN" in words
    assert module in words


def test_every_contract_is_tried_with_a_bad_import() -> None:
    assert {contract for contract, _, _ in BREACHES} == set(CONTRACTS)


def test_a_library_is_refused_in_every_room_but_its_own(house: Path) -> None:
    places = ("", *ROOMS, "optimise.build", "desk.plots")
    expected = set()
    for library, homes in HOMES.items():
        for place in places:
            if place in homes or (place == "optimise.build" and "optimise" in homes):
                continue
            module = ".".join(part for part in ("blendapp", place, f"bad_{library}") if part)
            put(house, module, f"import {library}")
            expected.add((module, library))
    for library, rooms in ELSEWHERE.items():
        for room in rooms:
            put(house, f"blendapp.{room}.bad_{library}", f"import {library}")
            expected.add((f"blendapp.{room}.bad_{library}", library))
    status, words = lint(house)
    assert status == 1
    assert expected - set(re.findall(r"(\S+) -> (\w+)", words)) == set()


def imported(path: Path) -> set[str]:
    """The top-level packages that a file imports absolutely, wherever in it."""
    found = set()
    for node in ast.walk(ast.parse(path.read_text("utf-8"), str(path))):
        if isinstance(node, ast.Import):
            found |= {alias.name.partition(".")[0] for alias in node.names}
        elif isinstance(node, ast.ImportFrom) and node.level == 0:
            found.add((node.module or "").partition(".")[0])
    return found


def test_no_file_imports_a_library_that_no_contract_knows() -> None:
    known = set(HOMES) | set(ELSEWHERE) | set(sys.stdlib_module_names) | {"blendapp"}
    strangers = {(str(path.relative_to(PROJECT)), name) for path in (PROJECT / "blendapp").rglob("*.py")
                 for name in imported(path) - known}
    assert strangers == set()


def test_the_package_itself_imports_nothing_but_what_sets_the_environment() -> None:
    assert imported(PROJECT / "blendapp" / "__init__.py") == {"os"}


def test_every_dependency_of_the_program_is_forbidden_to_domain() -> None:
    wanted = {re.split(r"[<>=!~;\[ ]", text, maxsplit=1)[0].replace("_", "-").lower()
              for text in SETTINGS["project"]["dependencies"]}
    top_level: dict[str, set[str]] = {}
    for package, distributions in packages_distributions().items():
        for name in distributions:
            top_level.setdefault(name.replace("_", "-").lower(), set()).add(package)
    forbidden = set(CONTRACTS["domain"]["forbidden_modules"])
    assert {name for name in wanted if not top_level.get(name, set()) & forbidden} == set()
    assert set(HOMES) | set(ELSEWHERE) <= forbidden


def test_domain_can_be_imported_where_only_the_standard_library_is_installed() -> None:
    modules = [".".join(path.relative_to(PROJECT).with_suffix("").parts)
               for path in sorted((PROJECT / "blendapp" / "domain").rglob("*.py"))]
    lines = f"import sys; sys.path.insert(0, {str(PROJECT)!r})\n"
    lines += "".join(f"import {module.removesuffix('.__init__')}\n" for module in modules)
    lines += "assert not [path for path in sys.path if 'site-packages' in path], sys.path\n"
    lines += "print(len([name for name in sys.modules if name.startswith('blendapp.domain')]))\n"
    ran = subprocess.run([sys.executable, "-I", "-S", "-B", "-c", lines], capture_output=True, text=True, check=False)
    assert ran.returncode == 0, ran.stderr
    assert int(ran.stdout) == len(modules) > 1


@pytest.mark.parametrize("room", ["domain", "optimise", "services"])
def test_types_are_strict_where_decided_and_lenient_elsewhere(house: Path, room: str) -> None:
    loose = "def double(value):\n    return value\n\n\ndef count(values: list) -> int:\n    return len(values)"
    put(house, "blendapp.desk.loose", loose)
    mypy = [sys.executable, "-m", "mypy", "--cache-dir", str(house / "cache")]
    lenient = subprocess.run(mypy, cwd=house, capture_output=True, text=True, check=False)
    assert lenient.returncode == 0, lenient.stdout
    put(house, f"blendapp.{room}.loose", loose)
    strict = subprocess.run(mypy, cwd=house, capture_output=True, text=True, check=False)
    assert strict.returncode == 1
    assert "no-untyped-def" in strict.stdout
    assert "type-arg" in strict.stdout
