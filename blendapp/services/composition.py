"""Lists of analyses: read with a fate for every row, and recorded whole as one undo. Afterwards: see lists."""

from __future__ import annotations

import datetime
from collections.abc import Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.domain.composition_rows import CompositionRow, SampleMean, sample_means
from blendapp.domain.ingredients import Origin
from blendapp.domain.mills import ListAbout, PriceList
from blendapp.domain.names import fold
from blendapp.domain.plant import Lot, LotValue
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added
from blendapp.domain.wording import _
from blendapp.services.edits import value_changes
from blendapp.services.list_memory import memory_changes
from blendapp.services.lists import kept_list
from blendapp.services.mill import Edit, Mill

if TYPE_CHECKING:
    from blendapp.domain.composition_rows import CompositionReading
    from blendapp.domain.list_rows import Answer


def read_composition_list(
    mill: Mill, path: Path | str, on: datetime.date, sheet: str | None = None,
    answers: Sequence[Answer] = (), source: str = "",
) -> CompositionReading:
    """What a list of analyses says, row by row; nothing is written. Arguments and faults: prices.read_price_list."""
    from blendapp.exchange import read_composition_list as read

    return read(Path(path), mill.library, on, sheet, answers, source)


def apply_composition_list(mill: Mill, reading: CompositionReading, on: datetime.date) -> Edit:
    """Record every accepted row as a lot with its analyses, and their means as the composition of the ingredients.

    The mean of a nutrient over the samples of an ingredient takes the place of its value, with n and the standard
    deviation of the sample, in the unit and on the basis of the list; dry matter likewise. A dated record of the list
    and its answers go with them: one transaction and one undo. Raises Refused where no row was accepted.
    """
    rows = reading.accepted
    if not rows:
        text = _("No row of {file} was accepted; there is no analysis to record.")
        raise Refused(text.format(file=reading.file_name))
    kept = kept_list(mill, reading, len(rows), ListAbout.COMPOSITION)
    changes: list[Change] = [added(kept)]
    taken = {(lot.ingredient_id, fold(lot.name)) for lot in mill.library.all("lot")}
    samples: dict[object, list[CompositionRow]] = {}
    for row in rows:
        samples.setdefault((row.ingredient_id, fold(row.sample), row.sampled), []).append(row)
    for of in samples.values():
        changes += _lots(mill, of, kept, on, taken)
    for mean in sample_means(rows):
        changes += _mean_taken(mill, mean, reading.file_name, on)
    changes += memory_changes(mill, reading)
    return mill.apply(_("Analyses from {file}").format(file=reading.file_name), changes)


def _lots(
    mill: Mill, of: Sequence[CompositionRow], kept: PriceList, on: datetime.date, taken: set[tuple[int, str]]
) -> list[Change]:
    """The rows of one sample as one lot; each row as its own where they measured the same.

    taken: the names that lots have by ingredient; new ones are added.
    """
    values = [value for row in of for value in row.values]
    if len({value.nutrient_id for value in values}) < len(values):
        return [change for row in of for change in _lot(mill, row, kept, on, taken)]
    return _lot(mill, replace(of[0], values=tuple(values)), kept, on, taken)


def _lot(
    mill: Mill, row: CompositionRow, kept: PriceList, on: datetime.date, taken: set[tuple[int, str]]
) -> list[Change]:
    assert row.ingredient_id is not None
    wanted = row.sample or (row.sampled.isoformat() if row.sampled else "")
    wanted = wanted or _("{file}, row {row}").format(file=kept.file_name, row=row.row)
    name, number = wanted, 2
    while (row.ingredient_id, fold(name)) in taken:
        name, number = f"{wanted} ({number})", number + 1
    taken.add((row.ingredient_id, fold(name)))
    lot = Lot(
        mill.new_id("lot"), row.ingredient_id, name, row.sampled, supplier_id=kept.supplier_id,
        price_list_id=kept.id, dry_matter_percent=row.dry_matter_percent,
    )
    values = [
        LotValue(
            mill.new_id("lot_value"), lot.id, one.nutrient_id, one.amount, one.unit, str(one.basis), kept.file_name,
            row.sampled or on,
        )
        for one in row.values if one.nutrient_id is not None
    ]
    return [added(lot), *map(added, values)]


def _mean_taken(mill: Mill, mean: SampleMean, source: str, on: datetime.date) -> list[Change]:
    if mean.nutrient_id is None:
        old = mill.library.ingredient(mean.ingredient_id)
        return [Change(old, replace(old, dry_matter_percent=mean.amount))]
    return value_changes(
        mill, mean.ingredient_id, mean.nutrient_id, mean.amount, unit=mean.unit, basis=mean.basis,
        origin=Origin.MEASURED, source=source, date=mean.sampled or on, n=mean.n, sd=mean.sd, entered="",
    )
