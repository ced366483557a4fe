"""Calls that do not fit, and files that cannot be used: status 2, one line a fault, nothing on standard output."""

from __future__ import annotations

import os
import subprocess
import sys
from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.cli import COMMANDS, is_command
from tests.cli import shapes
from tests.cli.conftest import Run

Runner = Callable[..., Run]
CALLS = {
    "formulate": ["formulate", "MILL"], "prices": ["prices", "MILL", "LIST"],
    "sheet": ["sheet", "MILL", "Sound", "--batch-kg", "1000", "-o", "PDF"], "export": ["export", "MILL", "BOOK"],
}


def filled(call: list[str], folder: Path, mill: Path | str) -> list[str]:
    places = {"MILL": str(mill), "LIST": str(folder / "list.csv"), "PDF": str(folder / "a.pdf"),
              "BOOK": str(folder / "a.xlsx")}
    return [places.get(word, word) for word in call]


@pytest.mark.parametrize("command", COMMANDS)
def test_every_command_has_help_with_an_example(command: str, run: Runner) -> None:
    found = run(command, "--help")
    assert found.status == 0
    assert f"Example: blendapp {command} " in " ".join(found.out.split())
    assert "--json" in found.out


def test_help_names_every_command(run: Runner) -> None:
    found = run("--help")
    assert found.status == 0
    assert all(command in found.out for command in COMMANDS)


@pytest.mark.parametrize("command", CALLS)
@pytest.mark.parametrize("json", [[], ["--json"]])
def test_a_mill_that_is_not_there_is_one_line_with_its_name(
    command: str, json: list[str], run: Runner, tmp_path: Path
) -> None:
    (tmp_path / "list.csv").write_text("Ingredient,Price,Unit\nMaize,210,t\n")
    (line,) = run(*filled(CALLS[command], tmp_path, tmp_path / "gone.mill"), *json).faults
    assert "gone.mill" in line
    assert sorted(p.name for p in tmp_path.iterdir()) == ["list.csv"]


@pytest.mark.parametrize("command", CALLS)
@pytest.mark.parametrize("content", [b"", b"no mill at all\n" * 50, b"SQLite format 3\0" + b"x" * 500])
def test_a_file_that_is_no_mill_is_one_line_and_stays_as_it_is(
    command: str, content: bytes, run: Runner, tmp_path: Path
) -> None:
    (tmp_path / "list.csv").write_text("Ingredient,Price,Unit\nMaize,210,t\n")
    path = tmp_path / "notes.mill"
    path.write_bytes(content)
    (line,) = run(*filled(CALLS[command], tmp_path, path), "--json").faults
    assert "notes.mill" in line
    assert path.read_bytes() == content


@pytest.mark.parametrize("command", CALLS)
def test_a_folder_is_no_mill(command: str, run: Runner, tmp_path: Path) -> None:
    (tmp_path / "list.csv").write_text("Ingredient,Price,Unit\nMaize,210,t\n")
    (line,) = run(*filled(CALLS[command], tmp_path, tmp_path), "--json").faults
    assert tmp_path.name in line


@pytest.mark.parametrize(
    ("call", "words"),
    [
        (["formulate"], "MILL"),
        (["sheet", "MILL", "Sound", "--batch-kg", "1000"], "-o"),
        (["sheet", "MILL", "Sound", "-o", "PDF"], "--batch-kg"),
        (["sheet", "MILL", "Sound", "--batch-kg", "0", "-o", "PDF"], "above 0"),
        (["sheet", "MILL", "Sound", "--batch-kg", "-5", "-o", "PDF"], "--batch-kg"),
        (["sheet", "MILL", "Sound", "--batch-kg", "1 t", "-o", "PDF"], "1 t"),
        (["sheet", "MILL", "Sound", "--batch-kg", "nan", "-o", "PDF"], "nan"),
        (["sheet", "MILL", "--batch-kg", "1000", "-o", "PDF"], "FORMULA"),
        (["prices", "MILL"], "LIST"),
        (["export", "MILL"], "WORKBOOK"),
        (["new"], "MILL"),
        (["formulate", "MILL", "--fast"], "--fast"),
        (["formulate", "MILL", "--pro"], "--pro"),
        (["export", "MILL", "BOOK", "more"], "more"),
        (["mix", "MILL"], "mix"),
        (["MILL", "formulate"], "invalid choice"),
        (["--version"], "--help"),
    ],
)
def test_a_call_that_does_not_fit_is_one_line_with_the_way_to_help(
    call: list[str], words: str, run: Runner, mill: Path
) -> None:
    (line,) = run(*filled(call, mill.parent, mill)).faults
    assert words in line
    assert "--help" in line
    assert [p.name for p in mill.parent.iterdir() if not p.name.startswith(".")] == ["valley.mill"]


def test_a_mill_file_or_nothing_asks_for_the_window() -> None:
    assert not is_command([])
    assert not is_command(["north.mill"])
    assert not is_command([str(Path(__file__))])
    assert is_command(["formulate", "north.mill"])
    assert is_command(["--help"])
    assert is_command(["fromulate"])
    assert is_command(["north.mill", "formulate"])


def process(*arguments: object, folder: Path) -> subprocess.CompletedProcess[str]:
    environment = {**os.environ, "PYTHONPATH": os.getcwd(), "PYTHONWARNINGS": "error::ResourceWarning"}
    return subprocess.run(
        [sys.executable, "-m", "blendapp", *map(str, arguments)], capture_output=True, text=True, cwd=folder,
        env=environment, timeout=120, check=False,
    )


def test_as_a_process_of_its_own_a_command_prints_json_alone(mill: Path) -> None:
    import json

    found = process("formulate", "valley.mill", "Sound", "--json", folder=mill.parent)
    assert (found.returncode, found.stderr) == (0, "")
    formula = json.loads(found.stdout)["formulas"][0]
    shapes.check(formula, shapes.formula("blend"))


def test_as_a_process_of_its_own_a_no_is_1_and_an_unusable_call_is_2(mill: Path) -> None:
    refused = process("formulate", "valley.mill", "Conflict", folder=mill.parent)
    assert (refused.returncode, refused.stderr) == (1, "")
    unusable = process("formulate", "gone.mill", "--json", folder=mill.parent)
    assert (unusable.returncode, unusable.stdout) == (2, "")
    assert len(unusable.stderr.splitlines()) == 1
    assert "Traceback" not in unusable.stderr


def test_a_reader_that_goes_away_early_gets_no_traceback(mill: Path) -> None:
    environment = {**os.environ, "PYTHONPATH": os.getcwd()}
    child = subprocess.Popen(
        [sys.executable, "-m", "blendapp", "formulate", str(mill)], stdout=subprocess.PIPE, stderr=subprocess.PIPE,
        text=True, env=environment,
    )
    assert child.stdout is not None
    assert child.stderr is not None
    child.stdout.close()
    said = child.stderr.read()
    child.wait(timeout=120)
    assert "Traceback" not in said
    assert "Exception" not in said


def test_a_minus_zero_is_written_as_0() -> None:
    from blendapp.cli import as_json

    assert as_json.text_of({"amount": -0.0, "gap": float("inf")}) == '{\n  "amount": 0.0,\n  "gap": null\n}'
