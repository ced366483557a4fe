"""What rolling back a list of analyses restores: what stood before it, where nothing newer has taken its place."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.mills import PriceList
from blendapp.domain.problems import Place, Problem, Severity
from blendapp.domain.records import Change, Record, removed
from blendapp.domain.wording import _
from blendapp.services.mill import record_name

if TYPE_CHECKING:
    from blendapp.services.mill import Mill

Brought = dict[int, dict[tuple[str, int], Change]]


def composition_withdrawn(mill: Mill, kept: PriceList) -> tuple[list[Change], list[Problem]]:
    """The changes that take back a list of analyses, and a sentence for everything that has to stay.

    What stood before comes from the change log. Where that was brought by another list which is withdrawn itself, what
    stood before that one counts.
    """
    brought = _brought(mill)
    changes: list[Change] = []
    left: list[Problem] = []
    for (kind, key), change in brought.get(kept.id, {}).items():
        now: Record | None = mill.library.records[kind].get(key)
        before = _before(mill, brought, (kind, key), change)
        if kind == "ingredient":
            _dry_matter_back(mill, now, before, change, changes, left)
        elif now == change.after:
            if before is None or before.nutrient_id in mill.library.records["nutrient"]:
                changes.append(Change(now, before))
        elif now is not None or _still_has(mill, change.after):
            left.append(_stays(mill, change.after, now))
    more, said = _samples_gone(mill, kept)
    return changes + more, left + said


def _brought(mill: Mill) -> Brought:
    """What each list of analyses changed in values and ingredients, by the identifier of the list."""
    found: Brought = {}
    for entry in mill.store.entries():
        if entry.role != "edit":
            continue
        lists = [change.id for change in entry.changes if change.kind == "price_list" and change.before is None]
        for list_id in lists:
            found[list_id] = {
                (change.kind, change.id): change for change in entry.changes if change.kind in ("value", "ingredient")
            }
    return found


def _before(mill: Mill, brought: Brought, of: tuple[str, int], change: Change) -> Record | None:
    """What stood before a change, past every list that is withdrawn."""
    before = change.before
    withdrawn = [
        one for key, one in brought.items()
        if (kept := mill.library.records["price_list"].get(key)) is None or kept.withdrawn is not None
    ]
    for _step in withdrawn:
        earlier = next((one[of] for one in withdrawn if of in one and _same(of[0], one[of].after, before)), None)
        if earlier is None:
            break
        before = earlier.before
    return before


def _same(kind: str, after: Record | None, before: Record | None) -> bool:
    if kind == "ingredient" and after is not None and before is not None:
        return bool(after.dry_matter_percent == before.dry_matter_percent)
    return before is not None and after == before


def _dry_matter_back(
    mill: Mill, now: Ingredient | None, before: Record | None, change: Change, changes: list[Change],
    left: list[Problem],
) -> None:
    """Of an ingredient the dry matter alone is taken back: whatever else was changed since stays."""
    if now is None or before is None or change.after is None:
        return
    if now.dry_matter_percent == change.after.dry_matter_percent:
        changes.append(Change(now, replace(now, dry_matter_percent=before.dry_matter_percent)))
    else:
        left.append(_said(_("The dry matter was changed since and stays."), now.name))


def _still_has(mill: Mill, value: Record) -> bool:
    records = mill.library.records
    return value.ingredient_id in records["ingredient"] and value.nutrient_id in records["nutrient"]


def _stays(mill: Mill, value: Record, now: Record | None) -> Problem:
    cleared, changed = _("The value was cleared since and stays unknown."), _("The value was changed since and stays.")
    return _said(cleared if now is None else changed, record_name(value, mill.library))


def _samples_gone(mill: Mill, kept: PriceList) -> tuple[list[Change], list[Problem]]:
    """The samples of the list go with their analyses; one that stands in a bin stays."""
    library = mill.library
    held = {one.lot_id for one in library.all("bin")}
    lots = [lot for lot in library.all("lot") if lot.price_list_id == kept.id]
    gone = {lot.id: lot for lot in lots if lot.id not in held}
    values = [value for value in library.all("lot_value") if value.lot_id in gone]
    said = [_said(_("The lot stands in a bin and stays."), lot.name) for lot in lots if lot.id in held]
    return [*map(removed, values), *map(removed, gone.values())], said


def _said(text: str, record: str) -> Problem:
    return Problem(text, Place(record=record), Severity.ODDITY)
