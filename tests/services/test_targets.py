"""A page or a workbook never takes the place of a mill file."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from blendapp.domain.problems import Refused
from blendapp.services.targets import refuse_over_a_mill
from blendapp.storage import open_store
from tests.cli.conftest import Run, mill, run

__all__ = ["mill", "run"]

Runner = Callable[..., Run]


def dump(path: Path) -> object:
    store = open_store(path)
    try:
        return store.dump()
    finally:
        store.close()


@pytest.mark.parametrize("call", [("export",), ("sheet", "Sound", "--batch-kg", "1000", "-o")])
@pytest.mark.parametrize("other", [False, True])
def test_what_is_written_never_takes_the_place_of_a_mill_file(
    call: tuple[str, ...], other: bool, run: Runner, mill: Path, tmp_path: Path
) -> None:
    target = tmp_path / "other.mill" if other else mill
    if other:
        assert run("new", target).status == 0
    before = dump(target)
    command, *more = call
    (line,) = run(command, mill, *more, target, "--json").faults
    assert line == f"{target}: A mill file stands here and would be lost; choose another name."
    assert dump(target) == before


def test_any_other_file_or_none_may_be_replaced(tmp_path: Path) -> None:
    refuse_over_a_mill(tmp_path / "none.xlsx")
    (tmp_path / "a.xlsx").write_bytes(b"PK")
    refuse_over_a_mill(tmp_path / "a.xlsx")
    (tmp_path / "a.xlsx").write_bytes(b"SQLite format 3\0 and more")
    with pytest.raises(Refused):
        refuse_over_a_mill(tmp_path / "a.xlsx")
