"""Set blendapp up in this folder, then do its main job or run its tests.

    python3 packaging/start.py run      the sample mill in the window, or in text where there is no screen
    python3 packaging/start.py tests    every check: lint, types, who imports whom, tests

Needs Python 3.11 or newer and its standard library. Everything else goes into the folder .venv, in the exact
versions of packaging/pins.txt; only system libraries of Qt are installed outside it, and only by the superuser
of a Debian-like system. Work already done is not done again.
"""

from __future__ import annotations

import argparse
import ctypes
import hashlib
import importlib.util
import json
import os
import shutil
import subprocess
import sys
from collections.abc import Callable, Iterable, Mapping, Sequence
from pathlib import Path

PROJECT = Path(__file__).resolve().parent.parent
PINS = PROJECT / "packaging" / "pins.txt"
ENVIRONMENT = PROJECT / ".venv"
OLDEST = (3, 11)
NO_ANSWER = "none"

# Shared libraries that the Qt wheels load but do not carry, and the Debian package that holds each.
# Measured with ldd in a minimal Debian 12.
DRAWING = {
    "libglib-2.0.so.0": "libglib2.0-0",
    "libgthread-2.0.so.0": "libglib2.0-0",
    "libGL.so.1": "libgl1",
    "libEGL.so.1": "libegl1",
    "libxkbcommon.so.0": "libxkbcommon0",
    "libdbus-1.so.3": "libdbus-1-3",
    "libfontconfig.so.1": "libfontconfig1",
}
SCREEN = {
    "libxcb-cursor.so.0": "libxcb-cursor0",
    "libxcb-icccm.so.4": "libxcb-icccm4",
    "libxcb-keysyms.so.1": "libxcb-keysyms1",
    "libxcb-shape.so.0": "libxcb-shape0",
    "libxkbcommon-x11.so.0": "libxkbcommon-x11-0",
    "libwayland-cursor.so.0": "libwayland-cursor0",
    "libwayland-egl.so.1": "libwayland-egl1",
    "libcups.so.2": "libcups2",
}
FONT = "fonts-dejavu-core"
FONT_FOLDERS = ("/usr/share/fonts", "/usr/local/share/fonts", "~/.local/share/fonts", "~/.fonts")


class Stop(Exception):
    """The set-up cannot go on; the text says why and what to do, in one sentence."""


def say(text: str) -> None:
    print(text, flush=True)


def call(command: Sequence[str | Path], **more: object) -> int:
    """Run a command of the project folder without standard input; its exit status."""
    return subprocess.run([str(part) for part in command], cwd=PROJECT, stdin=subprocess.DEVNULL,
                          env=clean(os.environ), check=False, **more).returncode  # type: ignore[call-overload]


def clean(environ: Mapping[str, str]) -> dict[str, str]:
    """The environment without what would lead Python or pip outside .venv."""
    kept = {name: value for name, value in environ.items()
            if name not in ("PYTHONPATH", "PYTHONHOME", "PIP_USER", "PIP_TARGET", "PIP_PREFIX", "__PYVENV_LAUNCHER__")}
    return {**kept, "PYTHONNOUSERSITE": "1", "PYTHONUTF8": "1", "PIP_USER": "0", "PIP_DISABLE_PIP_VERSION_CHECK": "1"}


# --- System packages


def loads(library: str) -> bool:
    """Whether the system can load a shared library."""
    try:
        ctypes.CDLL(library)
    except OSError:
        return False
    return True


def has_font(folders: Iterable[str] = FONT_FOLDERS) -> bool:
    """Whether any font is installed; without one Qt draws boxes for what the program's own fonts lack."""
    found = (file for folder in folders for file in Path(folder).expanduser().rglob("*"))
    return any(file.suffix.lower() in (".ttf", ".otf", ".ttc") for file in found)


def missing_packages(on_screen: bool, loads: Callable[[str], bool], has_font: Callable[[], bool]) -> list[str]:
    """The Debian packages of what Qt needs and the system lacks, each once, in a settled order."""
    wanted = {**DRAWING, **(SCREEN if on_screen else {})}
    packages = [package for library, package in wanted.items() if not loads(library)]
    if not has_font():
        packages.append(FONT)
    return list(dict.fromkeys(packages))


def may_install() -> bool:
    """Whether this process may install Debian packages."""
    return shutil.which("apt-get") is not None and hasattr(os, "geteuid") and os.geteuid() == 0


def apt_install(packages: Sequence[str]) -> bool:
    """Install Debian packages; False where that is not permitted or fails."""
    if not may_install():
        return False
    say(f"Installing system packages: {' '.join(packages)}")
    quiet = ["env", "DEBIAN_FRONTEND=noninteractive", "apt-get", "-qq", "-o", "Dpkg::Use-Pty=0"]
    if call([*quiet, "update"], stdout=subprocess.DEVNULL) != 0:
        return False
    return call([*quiet, "install", "-y", "--no-install-recommends", *packages], stdout=subprocess.DEVNULL) == 0


def provide_libraries(on_screen: bool) -> None:
    """Install the system libraries of Qt where that is permitted, else name them."""
    if not sys.platform.startswith("linux"):
        return
    missing = missing_packages(on_screen, loads, has_font)
    if missing and not (apt_install(missing) and not missing_packages(on_screen, loads, has_font)):
        say("Qt needs system libraries that are missing here; a superuser of a Debian-like system installs them with "
            f"\"apt-get install {' '.join(missing)}\", another system has packages of similar names.")


# --- The virtual environment


def stamp_of(pins: str, project: str, version: Sequence[int], folder: str) -> str:
    """What the environment was made from, as one digest: equal digests need no new work."""
    parts = json.dumps([pins, project, list(version[:2]), folder])
    return hashlib.sha256(parts.encode()).hexdigest()


def is_reusable(settings: str, version: Sequence[int]) -> bool:
    """Whether an environment whose pyvenv.cfg is given is of this Python and closed to the system's packages."""
    pairs = dict(line.split("=", 1) for line in settings.splitlines() if "=" in line)
    value = {key.strip(): text.strip() for key, text in pairs.items()}
    same = value.get("version", "").split(".")[:2] == [str(part) for part in version[:2]]
    return same and value.get("include-system-site-packages") == "false"


def python_of(environment: Path) -> Path:
    return environment / ("Scripts/python.exe" if os.name == "nt" else "bin/python")


def make_environment(environment: Path) -> Path:
    """A virtual environment of this Python with pip, kept if it serves; its interpreter.

    Raises Stop where Python comes without venv and it cannot be installed.
    """
    python, settings = python_of(environment), environment / "pyvenv.cfg"
    serves = python.exists() and settings.exists() and is_reusable(settings.read_text("utf-8"), sys.version_info)
    if serves and call([python, "-m", "pip", "--version"], stdout=subprocess.DEVNULL) == 0:
        return python
    if not has_venv():
        package = f"python{sys.version_info[0]}.{sys.version_info[1]}-venv"
        apt_install([package])
        if not has_venv():
            raise Stop("This Python cannot make virtual environments: install its venv module (on Debian and Ubuntu "
                       f"\"apt-get install {package}\", as superuser) and run this again.")
    say(f"Making a virtual environment in {environment}")
    if call([sys.executable, "-m", "venv", "--clear", environment]) != 0:
        raise Stop(f"The virtual environment {environment} could not be made; Python's words above say why.")
    return python


def has_venv() -> bool:
    """Whether this Python has venv and the pip that goes into one."""
    importlib.invalidate_caches()
    return all(importlib.util.find_spec(name) is not None for name in ("venv", "ensurepip"))


def set_up() -> Path:
    """The interpreter of .venv with the pinned set and blendapp in it. Raises Stop."""
    stamp = ENVIRONMENT / "blendapp-stamp"
    wanted = stamp_of(PINS.read_text("utf-8"), (PROJECT / "pyproject.toml").read_text("utf-8"),
                      sys.version_info, str(PROJECT))
    if python_of(ENVIRONMENT).exists() and stamp.exists() and stamp.read_text("utf-8") == wanted:
        return python_of(ENVIRONMENT)
    python = make_environment(ENVIRONMENT)
    stamp.unlink(missing_ok=True)
    say("Fetching and installing the pinned packages (about 200 MB the first time)")
    install_pins(python)
    install_project(python)
    stamp.write_text(wanted, "utf-8")
    return python


def install_pins(python: Path) -> None:
    """Put the pinned set into an environment. Raises Stop."""
    if call([python, "-m", "pip", "install", "-q", "--no-deps", "--only-binary=:all:", "-r", PINS]) != 0:
        raise Stop("The packages of packaging/pins.txt could not be installed; pip's words above say why (is the "
                   "package index reachable, and does it have them for this system and Python "
                   f"{sys.version_info[0]}.{sys.version_info[1]}?).")


def install_project(python: Path) -> None:
    """Put blendapp itself into an environment, so that it runs from this folder as it stands. Raises Stop."""
    if call([python, "-m", "pip", "install", "-q", "--no-deps", "--no-build-isolation", "--no-index", "-e", "."]) != 0:
        raise Stop("blendapp itself could not be installed into the virtual environment; pip's words above say why.")


# --- The main job


def names_a_screen(environ: Mapping[str, str], platform: str) -> bool:
    """Whether the system says that it has a screen to draw on."""
    if platform in ("win32", "darwin"):
        return True
    return bool(environ.get("DISPLAY") or environ.get("WAYLAND_DISPLAY"))


def can_start_qt(python: Path) -> bool:
    """Whether Qt loads and reaches the screen, tried in a process of its own because Qt ends it where it does not."""
    attempt = "import sys; from PySide6.QtGui import QGuiApplication; QGuiApplication(sys.argv)"
    return call([python, "-c", attempt], stdout=subprocess.DEVNULL, stderr=subprocess.DEVNULL) == 0


def fresh_folder(parent: Path, name: str) -> Path:
    """A new folder of the first free number, so that no run touches the files of another."""
    parent.mkdir(parents=True, exist_ok=True)
    number = 1
    while True:
        folder = parent / f"{name}-{number}"
        try:
            folder.mkdir()
        except FileExistsError:
            number += 1
        else:
            return folder


def main_job(python: Path, in_text: bool) -> int:
    """The sample mill in the window or in text; the exit status. Raises Stop."""
    if not in_text:
        mill = PROJECT / "build" / "sample" / "sample.mill"
        if not mill.exists():
            mill.parent.mkdir(parents=True, exist_ok=True)
            make_sample_mill(python, mill)
        say(f"Opening {mill}")
        return call([python, "-m", "blendapp", mill])
    folder = fresh_folder(PROJECT / "build", "sample-in-text")
    try:
        return job_in_text(python, folder)
    finally:
        say(f"\nThe files of this run are in {folder}")


def job_in_text(python: Path, folder: Path) -> int:
    """Solve every formula, apply the price list, show what it changed and write a batch sheet; the exit status.

    Raises Stop where a step before the last gives no answer.
    """
    mill, page = folder / "sample.mill", folder / "batch sheet.pdf"
    make_sample_mill(python, mill)
    solved = blendapp(python, "formulate", mill)
    before = costs(python, mill)
    # Rows of the list that ask a question or are refused make its status 1; the others are applied all the same.
    blendapp(python, "prices", mill, PROJECT / "sample_data" / "price_list.xlsx", "--apply")
    after = costs(python, mill)
    say("\nCost of each formula before and after the price list")
    width = max(map(len, before))
    for name, (cost, unit) in before.items():
        say(f"  {name:{width}}  {cost}  {after[name][0]}  {unit}")
    formula = next((name for name, (cost, _) in after.items() if cost.strip() != NO_ANSWER), None)
    if formula is None:
        raise Stop("No formula of the sample mill has an answer.")
    # A sheet that names limits which rounding to the scales breaks has status 1; it is written all the same.
    blendapp(python, "sheet", mill, formula, "--batch-kg", "2000", "-o", page)
    return int(solved != 0 or not page.exists())


def costs(python: Path, mill: Path) -> dict[str, tuple[str, str]]:
    """Cost as text and its unit, of each formula of a mill. Raises Stop."""
    status, answer = ask(python, "formulate", mill, "--json")
    if status > 1 or not answer:
        raise Stop("The formulas of the sample mill could not be solved; the words above say why.")
    return {one["formula"]: (f"{NO_ANSWER if one['cost'] is None else format(one['cost'], '.2f'):>9}",
                             f"{one['currency']}/{one['cost_per']}") for one in json.loads(answer)["formulas"]}


def blendapp(python: Path, *arguments: str | Path) -> int:
    """Run one blendapp command, shown as a person would type it, and show its answer; its exit status, 0 or 1.

    Raises Stop where the command could not be carried out, which its status or the lack of any answer tells.
    """
    say("\n> blendapp " + " ".join(f'"{part}"' if " " in part else part for part in map(shown, arguments)))
    status, answer = ask(python, *arguments)
    say(answer.rstrip())
    if status > 1 or not answer:
        raise Stop(f"\"blendapp {arguments[0]}\" could not be carried out; the words above say why.")
    return status


def ask(python: Path, *arguments: str | Path) -> tuple[int, str]:
    """Exit status and standard output of one blendapp command."""
    ran = subprocess.run([str(part) for part in (python, "-m", "blendapp", *arguments)], cwd=PROJECT, check=False,
                         env=clean(os.environ), stdin=subprocess.DEVNULL, stdout=subprocess.PIPE, encoding="utf-8")
    return ran.returncode, ran.stdout


def shown(argument: str | Path) -> str:
    """An argument as a person in the project folder would type it."""
    path = Path(argument)
    return str(path.relative_to(PROJECT)) if path.is_relative_to(PROJECT) else str(argument)


def make_sample_mill(python: Path, mill: Path) -> None:
    """A mill file from the sample workbook. Raises Stop."""
    if blendapp(python, "new", mill, "--from", PROJECT / "sample_data" / "mill.xlsx") != 0:
        raise Stop("The sample mill could not be made; the words above say why.")


# --- The tests


def all_checks(python: Path, arguments: Sequence[str]) -> int:
    """Every check, also after one has failed; the tests come last, so that their summary is the last line."""
    failed = []
    for name, command in (
        ("ruff", ["-m", "ruff", "check", "."]),
        ("mypy", ["-m", "mypy"]),
        ("lint-imports", ["-c", "from importlinter.cli import lint_imports_command as go; go(['--no-logo'])"]),
    ):
        say(f"\n== {name}")
        if call([python, *command]) != 0:
            failed.append(name)
    say("\n== pytest" + (f" (already failed: {', '.join(failed)})" if failed else ""))
    side_by_side = ["-n", "2"] if (os.cpu_count() or 1) > 1 else []
    tests = call([python, "-m", "pytest", *side_by_side, *arguments])
    return int(bool(failed) or tests != 0)


def main(arguments: Sequence[str] | None = None) -> int:
    parser = argparse.ArgumentParser(description="Set blendapp up in this folder, then run its main job or its tests.")
    jobs = parser.add_subparsers(dest="job", required=True, metavar="run|tests")
    run = jobs.add_parser("run", help="the sample mill in the window, or in text where there is no screen")
    run.add_argument("--text", action="store_true", help="in text although there is a screen")
    tests = jobs.add_parser("tests", help="every check; further arguments go to pytest")
    asked, more = parser.parse_known_args(arguments)
    if more and asked.job != "tests":
        tests.error(f"unknown argument {more[0]}")
    try:
        python = set_up()
        if asked.job == "tests":
            os.environ["QT_QPA_PLATFORM"] = "offscreen"
            provide_libraries(on_screen=False)
            if not can_start_qt(python):
                raise Stop("Qt cannot start here, and many tests draw with it, so no check was run.")
            return all_checks(python, more)
        in_text = asked.text or not names_a_screen(os.environ, sys.platform)
        if not in_text:
            provide_libraries(on_screen=True)
            if not can_start_qt(python):
                say("There should be a screen but Qt cannot open a window on it, so the job goes on in text.")
                in_text = True
        return main_job(python, in_text)
    except Stop as stop:
        print(stop, file=sys.stderr)
        return 2
    except KeyboardInterrupt:
        return 130


if __name__ == "__main__":
    if sys.version_info < OLDEST:
        sys.exit("blendapp needs Python 3.11 or newer; this is " + sys.version.split()[0] + ".")
    for stream in (sys.stdout, sys.stderr):
        stream.reconfigure(errors="replace")  # a console that lacks a sign shows another in its place
    sys.exit(main())
