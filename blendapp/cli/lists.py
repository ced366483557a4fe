"""Lists that arrive and lists that were applied, as text and as JSON."""

from __future__ import annotations

import argparse
from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from blendapp.cli import as_json, as_text
from blendapp.domain.composition_rows import CompositionReading, CompositionRow, ReadValue, sample_means
from blendapp.domain.figures import write_measure
from blendapp.domain.library import Library
from blendapp.domain.list_rows import Answer, Fate, ListReading, ListRow
from blendapp.domain.mills import Asked, ListAbout, PriceList
from blendapp.domain.nutrients import DRY_MATTER
from blendapp.domain.price_rows import PriceListReading, PriceRow
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.wording import _

if TYPE_CHECKING:
    from blendapp.services.approved import Outside


def sender_answers(library: Library, given: argparse.Namespace) -> list[Answer]:
    """Whose list it is and for which site, as the call says it. Raises Refused for names that the mill has not."""
    answers, unknown = [], []
    no_supplier = _("The mill has no supplier “{name}”; add it there, or use {names}.")
    no_site = _("The mill has no site “{name}”; add it there, or use {names}.")
    for kind, asked, name, text in (
        ("supplier", Asked.SUPPLIER, given.supplier, no_supplier), ("site", Asked.SITE, given.site, no_site)
    ):
        if name is None:
            continue
        found = library.named(kind, name)
        if found is None:
            names = ", ".join(f"“{one.name}”" for one in library.all(kind)) or _("one that is added there")
            unknown.append(Problem(text.format(name=name, names=names), Place(file=given.mill)))
        else:
            answers.append(Answer(asked, "", found.name))
    if unknown:
        raise Refused(unknown)
    return answers


def question_lines(reading: ListReading) -> list[str]:
    """Every open question, as --answer names it, with what may be answered."""
    from blendapp.services.answering import questions

    lines = []
    for name, question in questions(reading):
        choices = "; ".join(question.choices)
        lines.append(f"  --answer \"{name}=…\"   {question.text}" + (f" [{choices}]" if choices else ""))
    return ["", _("Questions that can be answered:"), *lines] if lines else []


def questions_json(reading: ListReading) -> list[dict[str, Any]]:
    from blendapp.services.answering import questions

    return [{"question": name, "text": one.text, "choices": list(one.choices)} for name, one in questions(reading)]


def prices_json(reading: PriceListReading, applied: bool) -> dict[str, Any]:
    """A price list, with what it leaves open."""
    return {
        "currency": reading.currency, "rows": [as_json.price_row(row) for row in reading.rows],
        "questions": questions_json(reading), "applied": applied,
    }


def prices_text(reading: PriceListReading, applied: bool) -> str:
    """Every row of a price list with its fate, what can be answered, and the counts."""
    lines = [*as_text.price_rows(reading.rows, reading.currency), *question_lines(reading)]
    return "\n".join([*lines, *_closing(reading, applied)])


def composition_json(reading: CompositionReading, applied: bool) -> dict[str, Any]:
    rows = [_row_json(row) for row in reading.rows]
    return {"rows": rows, "questions": questions_json(reading), "applied": applied}


def _row_json(row: CompositionRow) -> dict[str, Any]:
    return {
        **as_json.list_row(row),
        "sample": row.sample or None,
        "sampled": None if row.sampled is None else row.sampled.isoformat(),
        "values": [_value_json(one) for one in row.values],
    }


def _value_json(one: ReadValue) -> dict[str, Any]:
    return {
        "nutrient": one.nutrient, "amount": one.amount, "unit": one.unit, "basis": str(one.basis), "old": one.old,
    }


def composition_text(
    reading: CompositionReading, applied: bool, library: Library, outside: Sequence[Outside]
) -> str:
    """Every row with its fate, the means that are or would be recorded, and approved formulas that no longer hold."""
    lines = _rows_text(reading.rows)
    means = sample_means(reading.accepted)
    if means:
        old = {
            (row.ingredient_id, one.nutrient_id, one.unit, one.basis): one.old
            for row in reading.accepted for one in row.values
        }
        heads = (_("ingredient"), _("nutrient"), _("mean"), _("unit"), _("basis"), _("n"), _("SD"), _("was"))
        rows = [
            (
                library.ingredient(one.ingredient_id).name,
                DRY_MATTER if one.nutrient_id is None else library.nutrient(one.nutrient_id).name,
                write_measure(one.amount), one.unit or "/kg", _(one.basis), str(one.n), write_measure(one.sd),
                write_measure(old.get((one.ingredient_id, one.nutrient_id, one.unit, one.basis))),
            )
            for one in means
        ]
        lines += ["", *as_text.table(heads, rows, (False, False, True, False, False, True, True, True))]
    lines += [*question_lines(reading), *_closing(reading, applied)]
    for one in outside:
        text = _("{formula}, version {version}, is outside its limits:")
        lines.append("  ! " + text.format(formula=one.formula, version=one.version))
        lines += [f"    {sentence}" for sentence in one.sentences]
    return "\n".join(lines)


def _closing(reading: ListReading, applied: bool) -> list[str]:
    counts = ", ".join(f"{_(fate)} {reading.count(fate)}" for fate in Fate)
    done = _("Recorded.") if applied else _("Nothing recorded.")
    return [*(f"  {note}" for note in reading.notes), "", f"  {counts}. {done}"]


def _rows_text(rows: Sequence[CompositionRow]) -> list[str]:
    heads = (
        _("sheet"), _("row"), _("fate"), _("name in the list"), _("ingredient"), _("sample"), _("day"), _("values"),
        _("reason"),
    )
    cells = [
        (
            row.sheet, str(row.row), _(row.fate), row.source_name, row.ingredient or "", row.sample,
            "" if row.sampled is None else row.sampled.isoformat(), str(len(row.values) or ""), row.reason,
        )
        for row in rows
    ]
    return as_text.table(heads, cells, (False, True, False, False, False, False, False, True, False))


# -- lists that were applied


def kept_json(kept: PriceList) -> dict[str, Any]:
    return {
        "number": kept.id,
        "about": str(kept.about),
        "file": kept.file_name,
        "digest": kept.digest,
        "source": kept.source or None,
        "applied": kept.applied.isoformat(),
        "rows": kept.rows,
        "accepted": kept.accepted,
        "withdrawn": None if kept.withdrawn is None else kept.withdrawn.isoformat(),
    }


def lists_text(lists: Sequence[PriceList]) -> str:
    """The lists that were applied, the latest first."""
    if not lists:
        return _("No list has been applied.")
    heads = (_("number"), _("applied"), _("about"), _("file"), _("rows"), _("accepted"), _("rolled back"))
    rows = [
        (
            str(one.id), one.applied.date().isoformat(), _(one.about), one.file_name, str(one.rows), str(one.accepted),
            "" if one.withdrawn is None else one.withdrawn.date().isoformat(),
        )
        for one in lists
    ]
    return "\n".join(as_text.table(heads, rows, (True, False, False, False, True, True, False)))


def list_rows_json(kept: PriceList, rows: Sequence[ListRow]) -> list[dict[str, Any]]:
    if kept.about is ListAbout.COMPOSITION:
        return [_row_json(row) for row in rows if isinstance(row, CompositionRow)]
    return [as_json.price_row(row) for row in rows if isinstance(row, PriceRow)]


def list_rows_text(kept: PriceList, rows: Sequence[ListRow], currency: str) -> str:
    """One applied list with the fate of every row."""
    head = _("{number}: {about} from {file}, applied on {day}").format(
        number=kept.id, about=_(kept.about), file=kept.file_name, day=kept.applied.date().isoformat()
    )
    if kept.withdrawn is not None:
        head += ", " + _("rolled back on {day}").format(day=kept.withdrawn.date().isoformat())
    if kept.about is ListAbout.COMPOSITION:
        return "\n".join([head, *_rows_text([row for row in rows if isinstance(row, CompositionRow)])])
    return "\n".join([head, *as_text.price_rows([row for row in rows if isinstance(row, PriceRow)], currency)])
