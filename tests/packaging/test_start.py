"""The set-up script: which system packages it asks for, when it works anew, and what it hands on."""

from __future__ import annotations

import importlib.util
import json
import re
import subprocess
import sys
import tomllib
from pathlib import Path
from types import ModuleType

import pytest
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

PROJECT = Path(__file__).resolve().parents[2]


def script() -> ModuleType:
    spec = importlib.util.spec_from_file_location("blendapp_start", PROJECT / "packaging" / "start.py")
    assert spec is not None
    assert spec.loader is not None
    module = importlib.util.module_from_spec(spec)
    spec.loader.exec_module(module)
    return module


start = script()


def all_there() -> bool:
    return True


def test_nothing_is_asked_for_where_every_library_loads_and_a_font_is_there() -> None:
    assert start.missing_packages(True, lambda library: True, all_there) == []


def test_without_a_screen_no_package_of_a_screen_is_asked_for() -> None:
    asked = start.missing_packages(False, lambda library: False, all_there)
    assert set(asked) == set(start.DRAWING.values())
    assert set(asked) & set(start.SCREEN.values()) == set()


def test_with_a_screen_the_packages_of_drawing_and_screen_are_asked_for_each_once() -> None:
    asked = start.missing_packages(True, lambda library: False, all_there)
    assert sorted(asked) == sorted({*start.DRAWING.values(), *start.SCREEN.values()})


def test_only_the_package_of_the_one_missing_library_is_asked_for() -> None:
    asked = start.missing_packages(True, lambda library: library != "libEGL.so.1", all_there)
    assert asked == ["libegl1"]


def test_a_font_is_asked_for_only_where_no_folder_holds_one(tmp_path: Path) -> None:
    assert not start.has_font([str(tmp_path), str(tmp_path / "no such folder")])
    assert start.missing_packages(False, lambda library: True, lambda: False) == [start.FONT]
    (tmp_path / "deep").mkdir()
    (tmp_path / "deep" / "Some.TTF").touch()
    assert start.has_font([str(tmp_path)])


def test_a_library_that_does_not_exist_does_not_load() -> None:
    assert not start.loads("libno-such-library.so.99")


def test_the_stamp_changes_with_pins_project_python_and_folder_and_with_nothing_else() -> None:
    same = start.stamp_of("a==1", "x", (3, 11, 2), "/p")
    assert same == start.stamp_of("a==1", "x", (3, 11, 9), "/p")
    others = {start.stamp_of("a==2", "x", (3, 11, 2), "/p"), start.stamp_of("a==1", "y", (3, 11, 2), "/p"),
              start.stamp_of("a==1", "x", (3, 12, 2), "/p"), start.stamp_of("a==1", "x", (3, 11, 2), "/q"),
              start.stamp_of("a==1x", "", (3, 11, 2), "/p")}
    assert len(others | {same}) == 6


@pytest.mark.parametrize(("settings", "kept"), [
    ("home = /usr/bin\ninclude-system-site-packages = false\nversion = 3.11.2\n", True),
    ("home = /usr/bin\ninclude-system-site-packages = true\nversion = 3.11.2\n", False),
    ("home = /usr/bin\ninclude-system-site-packages = false\nversion = 3.1.2\n", False),
    ("home = /usr/bin\ninclude-system-site-packages = false\nversion = 3.12.1\n", False),
    ("", False),
])
def test_only_a_closed_environment_of_this_python_is_kept(settings: str, kept: bool) -> None:
    assert start.is_reusable(settings, (3, 11, 5)) is kept


@pytest.mark.parametrize(("environ", "platform", "screen"), [
    ({}, "linux", False),
    ({"DISPLAY": ""}, "linux", False),
    ({"DISPLAY": ":0"}, "linux", True),
    ({"WAYLAND_DISPLAY": "wayland-0"}, "linux", True),
    ({}, "darwin", True),
    ({}, "win32", True),
])
def test_a_screen_is_expected_where_the_system_names_one(
        environ: dict[str, str], platform: str, screen: bool) -> None:
    assert start.names_a_screen(environ, platform) is screen


def test_commands_do_not_inherit_paths_to_other_packages() -> None:
    handed = start.clean({"PYTHONPATH": "/x", "PYTHONHOME": "/y", "PIP_TARGET": "/z", "PIP_USER": "1", "LANG": "C"})
    assert {"PYTHONPATH", "PYTHONHOME", "PIP_TARGET"} & set(handed) == set()
    assert (handed["LANG"], handed["PYTHONNOUSERSITE"], handed["PIP_USER"]) == ("C", "1", "0")


def test_a_run_in_text_never_uses_a_folder_that_is_there(tmp_path: Path) -> None:
    first, second = (start.fresh_folder(tmp_path / "build", "sample") for _ in range(2))
    assert (first.name, second.name) == ("sample-1", "sample-2")
    assert first.is_dir()
    assert second.is_dir()


class Program:
    """Stands in for blendapp's commands; the mill's first formula has no answer, its second costs less afterwards."""

    def __init__(self, sheet_status: int = 1, has_page: bool = True, silent: str = "") -> None:
        self.sheet_status, self.has_page, self.silent = sheet_status, has_page, silent
        self.calls: list[list[str]] = []

    def ask(self, python: Path, *arguments: str | Path) -> tuple[int, str]:
        self.calls.append([str(part) for part in arguments])
        if self.silent and self.silent == arguments[0]:
            return 1, ""
        if "--json" in arguments:
            cost = 200.0 if any(call[0] == "prices" for call in self.calls) else 210.5
            both = [("Impossible", None), ("Layer", cost)]
            return 1, json.dumps({"formulas": [
                {"formula": name, "cost": cost, "currency": "USD", "cost_per": "t"} for name, cost in both]})
        if arguments[0] == "sheet" and self.has_page:
            Path(arguments[-1]).write_bytes(b"%PDF-")
        return {"prices": 1, "sheet": self.sheet_status}.get(str(arguments[0]), 0), "said\n"


@pytest.fixture
def python() -> Path:
    return Path("python")


def test_the_job_in_text_solves_prices_and_prints_the_first_formula_with_an_answer(
        python: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    program = Program()
    monkeypatch.setattr(start, "ask", program.ask)
    assert start.job_in_text(python, tmp_path) == 0
    assert [call[0] for call in program.calls] == ["new", "formulate", "formulate", "prices", "formulate", "sheet"]
    assert program.calls[-1][2] == "Layer"
    words = capsys.readouterr().out
    assert re.search(r"Layer +210\.50 +200\.00  USD/t", words)
    assert re.search(r"Impossible +none +none", words)


@pytest.mark.parametrize("command", ["new", "formulate", "prices", "sheet"])
def test_the_job_in_text_stops_at_a_command_that_gives_no_answer(
        python: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch, command: str) -> None:
    program = Program(silent=command)
    monkeypatch.setattr(start, "ask", program.ask)
    with pytest.raises(start.Stop, match=f"blendapp {command}"):
        start.job_in_text(python, tmp_path)
    assert program.calls[-1][0] == command


def test_a_batch_sheet_that_was_not_written_makes_the_job_fail(
        python: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(start, "ask", Program(has_page=False).ask)
    assert start.job_in_text(python, tmp_path) == 1


def test_a_batch_sheet_that_names_broken_limits_is_a_sheet(
        python: Path, tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(start, "ask", Program(sheet_status=1).ask)
    assert start.job_in_text(python, tmp_path) == 0
    monkeypatch.setattr(start, "ask", Program(sheet_status=2, has_page=False).ask)
    with pytest.raises(start.Stop, match="blendapp sheet"):
        start.job_in_text(python, tmp_path / "other")


def test_without_venv_one_sentence_says_what_to_install(
        tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(start, "has_venv", lambda: False)
    monkeypatch.setattr(start, "apt_install", lambda packages: False)
    with pytest.raises(start.Stop, match=r"apt-get install python3\.\d+-venv") as stopped:
        start.make_environment(tmp_path / "environment")
    assert "\n" not in str(stopped.value)
    assert not (tmp_path / "environment").exists()


def test_every_check_runs_and_the_exit_tells_of_any_failure(
        monkeypatch: pytest.MonkeyPatch, capsys: pytest.CaptureFixture[str]) -> None:
    for failing in ("ruff", "mypy", "importlinter", "pytest", None):
        ran = []

        def call(command: list[str], failing: str | None = failing, ran: list[str] = ran) -> int:
            ran.append(" ".join(str(part) for part in command))
            return int(failing is not None and failing in ran[-1])

        monkeypatch.setattr(start, "call", call)
        assert start.all_checks(Path("python"), []) == int(failing is not None)
        assert [next(name for name in ("ruff", "mypy", "importlinter", "pytest") if name in line) for line in ran] == [
            "ruff", "mypy", "importlinter", "pytest"]
        assert ("already failed" in capsys.readouterr().out) is (failing in ("ruff", "mypy", "importlinter"))


def test_an_unknown_argument_is_refused_before_anything_is_set_up(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(start, "set_up", lambda: pytest.fail("set up before the arguments were read"))
    with pytest.raises(SystemExit) as stopped:
        start.main(["run", "--no-such-thing"])
    assert stopped.value.code == 2


def test_the_script_starts_with_the_standard_library_alone() -> None:
    ran = subprocess.run([sys.executable, "-I", "-S", "-B", str(PROJECT / "packaging" / "start.py"), "--help"],
                         capture_output=True, text=True, check=False)
    assert ran.returncode == 0, ran.stderr
    assert "run" in ran.stdout


def pins() -> dict[str, str]:
    lines = (PROJECT / "packaging" / "pins.txt").read_text("utf-8").splitlines()
    exact = [re.fullmatch(r"([A-Za-z0-9._-]+)==([^=;\s]+)(; .*)?", line) for line in lines if not line.startswith("#")]
    assert None not in exact
    return {canonicalize_name(found[1]): found[2] for found in exact if found is not None}


def test_every_direct_dependency_is_pinned_within_its_range() -> None:
    settings = tomllib.loads((PROJECT / "pyproject.toml").read_text("utf-8"))
    project = settings["project"]
    wanted = [*project["dependencies"], *project["optional-dependencies"]["tests"],
              *settings["build-system"]["requires"]]
    pinned = pins()
    outside = [text for text in wanted if (name := canonicalize_name(Requirement(text).name)) not in pinned
               or pinned[name] not in Requirement(text).specifier]
    assert outside == []


def test_the_pinned_set_lacks_nothing_that_its_members_need() -> None:
    from importlib.metadata import PackageNotFoundError, requires

    pinned, lacking = pins(), []
    for name in pinned:
        try:
            needed = requires(name) or []
        except PackageNotFoundError:
            continue  # pinned for another system
        for text in needed:
            wish = Requirement(text)
            if wish.marker is not None and not wish.marker.evaluate({"extra": ""}):
                continue
            version = pinned.get(canonicalize_name(wish.name))
            if version is None or not wish.specifier.contains(version, prereleases=True):
                lacking.append(f"{name} needs {text}")
    assert lacking == []
