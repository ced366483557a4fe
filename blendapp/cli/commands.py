"""Each command: its service called, its result printed, its exit status."""

from __future__ import annotations

import argparse
import datetime
import os
import sys
import time
from collections.abc import Callable, Sequence
from dataclasses import replace
from pathlib import Path

from blendapp.cli import as_json, as_text, lists, sheet_text
from blendapp.cli.parser import CallFault, make_parser
from blendapp.domain.cautions import general_caution
from blendapp.domain.list_rows import Fate
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.results import Status
from blendapp.domain.wording import _, use_language
from blendapp.services.mill import Mill, MillFileError, open_mill

DONE, NO, UNUSABLE = 0, 1, 2


def run(arguments: Sequence[str]) -> int:
    """Run one command; returns the exit status. Every fault is one line on standard error."""
    use_language(os.environ.get("BLENDAPP_LANGUAGE"))
    mill = ""
    try:
        given = make_parser().parse_args(list(arguments))
        mill = given.mill
        return _COMMANDS[given.command](given)
    except CallFault as fault:
        return _unusable([str(fault)])
    except Refused as refused:
        return _unusable([str(_in_file(problem, mill)) for problem in refused.problems])
    except MillFileError as error:
        return _unusable([str(error)])
    except BrokenPipeError:
        # Whoever read the output has gone; standard output is closed so that leaving does not complain again.
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
        return UNUSABLE


def _in_file(problem: Problem, mill: str) -> Problem:
    """A problem that names no file is about what the mill file holds."""
    return problem if problem.place.file else replace(problem, place=replace(problem.place, file=mill))


def _unusable(lines: Sequence[str]) -> int:
    for line in lines:
        print(" ".join(line.split()), file=sys.stderr)
    return UNUSABLE


def _print(text: str) -> None:
    print(text)
    sys.stdout.flush()


def _new(given: argparse.Namespace) -> int:
    from blendapp.services.workbook import new_mill

    mill, warnings = new_mill(given.mill, given.workbook)
    mill.close()
    said = [str(problem) for problem in warnings]
    if given.json:
        _print(as_json.text_of({"mill": given.mill, "warnings": said}))
    else:
        lines = [f"  {warning}" for warning in said]
        _print("\n".join([_("Made {mill}.").format(mill=given.mill), *lines, general_caution()]))
    return DONE


def _formulate(given: argparse.Namespace) -> int:
    from blendapp.services.asking import formulate_whole
    from blendapp.services.formulate import FailedCertificate, formulas_named

    with _Open(given.mill) as mill:
        chosen = formulas_named(mill.library, given.formulas)
        try:
            results = formulate_whole(
                mill.library, [f.id for f in chosen], datetime.date.today(), mill.composition, given.near,
                given.prove,
            )
        except FailedCertificate as failure:
            raise Refused(Problem(str(failure), Place(file=given.mill))) from failure
    if given.json:
        _print(as_json.text_of(as_json.formulas(results)))
    else:
        _print("\n\n".join(map(as_text.formula, results)) if results else _("The mill has no formula."))
    return DONE if all(result.status is Status.OPTIMAL for result in results) else NO


def _prices(given: argparse.Namespace) -> int:
    from blendapp.services.answering import answered
    from blendapp.services.arriving import with_note_of_earlier
    from blendapp.services.effect_table import effect_of, summary, write_effect
    from blendapp.services.prices import apply_price_list, read_price_list

    today = datetime.date.today()
    with _Open(given.mill, writes=given.apply) as mill:
        if given.apply and not mill.writable:
            raise Refused(Problem(mill.why_read_only or "", Place(file=given.mill)))
        if given.effect is not None:
            _refuse_effect(given)
        reading = answered(
            mill.library, lambda known: read_price_list(mill, given.list, today, given.sheet, known, given.source),
            given.answer, today, lists.sender_answers(mill.library, given),
        )
        reading = with_note_of_earlier(mill.library, reading)
        if given.effect is not None:
            # Before anything is recorded, so that a file that cannot be written leaves the mill as it was.
            moved = effect_of(mill.library, reading, today, mill.answers.view())
            write_effect(given.effect, moved, mill.library.mill.currency)
        applied = bool(given.apply and reading.accepted)
        if applied:
            apply_price_list(mill, reading, today)
    if given.json:
        written = {} if given.effect is None else {"effect": given.effect}
        _print(as_json.text_of({**lists.prices_json(reading, applied), **written}))
    else:
        _print(lists.prices_text(reading, applied))
        if given.effect is not None:
            _print("  " + _("{summary}; the table is in {file}.").format(
                summary=summary(moved).rstrip("."), file=given.effect))
    return NO if reading.count(Fate.QUESTION) or reading.count(Fate.REFUSED) else DONE


def _composition(given: argparse.Namespace) -> int:
    from blendapp.services.answering import answered
    from blendapp.services.approved import outside_their_limits
    from blendapp.services.arriving import with_note_of_earlier
    from blendapp.services.composition import apply_composition_list, read_composition_list

    today = datetime.date.today()
    with _Open(given.mill, writes=given.apply) as mill:
        if given.apply and not mill.writable:
            raise Refused(Problem(mill.why_read_only or "", Place(file=given.mill)))
        reading = answered(
            mill.library,
            lambda known: read_composition_list(mill, given.list, today, given.sheet, known, given.source),
            given.answer, today,
        )
        reading = with_note_of_earlier(mill.library, reading)
        applied = bool(given.apply and reading.accepted)
        if applied:
            apply_composition_list(mill, reading, today)
        outside = outside_their_limits(mill, today) if applied and not given.json else []
        library = mill.library
    if given.json:
        _print(as_json.text_of(lists.composition_json(reading, applied)))
    else:
        _print(lists.composition_text(reading, applied, library, outside))
    return NO if reading.count(Fate.QUESTION) or reading.count(Fate.REFUSED) else DONE


def _lists(given: argparse.Namespace) -> int:
    from blendapp.services.lists import applied_lists, open_list, roll_back

    if given.roll_back and given.number is None:
        raise CallFault(_("blendapp lists: --roll-back needs the number of a list; see blendapp lists MILL."))
    with _Open(given.mill, writes=given.roll_back) as mill:
        if given.roll_back and not mill.writable:
            raise Refused(Problem(mill.why_read_only or "", Place(file=given.mill)))
        rows = [] if given.number is None else open_list(mill, given.number)
        left = [str(one) for one in roll_back(mill, given.number).oddities] if given.roll_back else []
        kept = [one for one in applied_lists(mill) if given.number in (None, one.id)]
        currency = mill.library.mill.currency
    if given.json:
        found = {"lists": [lists.kept_json(one) for one in kept], "left": left}
        if given.number is not None:
            found["rows"] = lists.list_rows_json(kept[0], rows)
        _print(as_json.text_of(found))
    elif given.number is None:
        _print(lists.lists_text(kept))
    else:
        _print("\n".join([lists.list_rows_text(kept[0], rows, currency), *(f"  ! {one}" for one in left)]))
    return DONE


def _refuse_effect(given: argparse.Namespace) -> None:
    """Raises Refused for a file of --effect that cannot be written as asked, or would take the place of the list."""
    from blendapp.services.effect_table import refuse_name

    refuse_name(given.effect)
    if Path(given.effect).resolve() == Path(given.list).resolve():
        text = _("The table would take the place of the price list; choose another name for --effect.")
        raise Refused(Problem(text, Place(file=given.effect)))


def _sheet(given: argparse.Namespace) -> int:
    from blendapp.cli.ordering import ordered
    from blendapp.services.accepting import accepted_by
    from blendapp.services.batch import clean_out_question, lacks_clean_out, print_sheet
    from blendapp.services.formulate import FailedCertificate
    from blendapp.services.sheets import write_page

    if bool(given.accept) != bool(given.by):
        raise CallFault(_("blendapp sheet: --accept and --by go together; give both or neither."))
    recorded = given.page == "sheet"
    pdf = None
    with _Open(given.mill, writes=recorded) as mill:
        if recorded and not mill.writable:
            raise Refused(Problem(mill.why_read_only or "", Place(file=given.mill)))
        by = accepted_by(mill.library, given.by or "")
        try:
            batch = ordered(mill, given, datetime.date.today())
        except FailedCertificate as failure:
            raise Refused(Problem(str(failure), Place(file=given.mill))) from failure
        if batch.cause is None and recorded and lacks_clean_out(batch, given.accept or ""):
            batch = replace(batch, cause=clean_out_question(batch))
        if batch.cause is None and recorded:
            batch = print_sheet(mill, batch, Path(given.pdf), reason=given.accept or "", by=by)
            pdf = given.pdf
        elif batch.cause is None:
            batch = replace(batch, accepted_reason=given.accept or "", accepted_by=by)
            write_page(batch, Path(given.pdf), given.page)
            pdf = given.pdf
    _print(as_json.text_of(as_json.sheet(batch, pdf)) if given.json else sheet_text.sheet(batch, pdf))
    return DONE if batch.cause is None and batch.fit_to_mix else NO


def _export(given: argparse.Namespace) -> int:
    from blendapp.services.workbook import export_workbook

    with _Open(given.mill) as mill:
        warnings = [str(p) for p in export_workbook(mill.library, given.workbook, datetime.date.today())]
    if given.json:
        _print(as_json.text_of({"workbook": given.workbook, "warnings": warnings}))
    else:
        lines = [f"  {warning}" for warning in warnings]
        _print("\n".join([_("Wrote {workbook}.").format(workbook=given.workbook), *lines]))
    return DONE


# How long a command that writes waits for another process to let the file go, and how often it looks: another command
# has it for a second or two, a window for as long as somebody works in it.
WAIT_S = 3.0
_LOOK_S = 0.1


class _Open:
    """An open mill that is closed again. writes: the command needs to write, and waits a while until it can."""

    def __init__(self, path: str, writes: bool = False) -> None:
        self.path, self.writes = path, writes

    def __enter__(self) -> Mill:
        ends = time.monotonic() + WAIT_S
        self.mill = open_mill(self.path)
        while self.writes and self.mill.held_elsewhere and time.monotonic() < ends:
            self.mill.close()
            time.sleep(_LOOK_S)
            self.mill = open_mill(self.path)
        return self.mill

    def __exit__(self, *_error: object) -> None:
        self.mill.close()


_COMMANDS: dict[str, Callable[[argparse.Namespace], int]] = {
    "new": _new,
    "formulate": _formulate,
    "prices": _prices,
    "composition": _composition,
    "lists": _lists,
    "sheet": _sheet,
    "export": _export,
}
