"""Sites, suppliers, scales, meters, mixers, bins and lots: added, and removed where nothing rests on them.

Fields of what stands are changed by services.typed and services.edits.
"""

from __future__ import annotations

import datetime
from collections.abc import Callable, Iterable

from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.plant import Bin, Lot, Mixer, Scale, Site, Supplier
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Record, added, removed
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill

# How many names a sentence lists before it counts the rest.
_MOST_NAMED = 5


def _add(mill: Mill, new: Record) -> Edit:
    return mill.apply(_("Add {name}").format(name=new.name), [added(new)])


def add_site(mill: Mill, name: str) -> Edit:
    """Add a site. Raises Refused for a taken name."""
    return _add(mill, Site(mill.new_id("site"), name.strip()))


def add_supplier(mill: Mill, name: str, note: str = "") -> Edit:
    """Add a supplier. Raises Refused for a taken name."""
    return _add(mill, Supplier(mill.new_id("supplier"), name.strip(), note))


def add_scale(mill: Mill, name: str, step_kg: float, site_id: int | None = None) -> Edit:
    """Add a scale that shows multiples of step_kg. Raises Refused for a step that is not above 0 or a taken name."""
    return _add(mill, Scale(mill.new_id("scale"), name.strip(), step_kg, site_id=site_id))


def add_meter(mill: Mill, name: str, step_l: float, site_id: int | None = None) -> Edit:
    """Add a liquid meter that doses multiples of step_l. Raises Refused as add_scale does."""
    return _add(mill, Scale(mill.new_id("scale"), name.strip(), None, site_id=site_id, step_l=step_l))


def add_mixer(mill: Mill, name: str, site_id: int | None = None) -> Edit:
    """Add a mixer. Raises Refused for a taken name."""
    return _add(mill, Mixer(mill.new_id("mixer"), name.strip(), site_id=site_id))


def add_bin(
    mill: Mill, name: str, ingredient_id: int | None = None, lot_id: int | None = None, site_id: int | None = None
) -> Edit:
    """Add a bin, empty unless an ingredient or a lot is given; a lot brings its ingredient.

    Raises Refused for a name that is taken on its site, and for a lot of another ingredient.
    """
    lot: Lot | None = None if lot_id is None else mill.library.records["lot"][lot_id]
    held = lot.ingredient_id if lot is not None and ingredient_id is None else ingredient_id
    return _add(mill, Bin(mill.new_id("bin"), name.strip(), held, lot_id, site_id))


def add_lot(
    mill: Mill, ingredient_id: int, name: str, *, received: datetime.date | None = None, mass_kg: float | None = None,
    supplier_id: int | None = None, note: str = "",
) -> Edit:
    """Add a lot of an ingredient. Raises Refused for a blank name, or one that another lot of the ingredient has."""
    plain = name.strip()
    if not plain:
        raise Refused(Problem(_("A name is needed here."), Place(column=_("Lot"))))
    if any(fold(lot.name) == fold(plain) for lot in lots_of(mill.library, ingredient_id)):
        text = _("{ingredient} has a lot “{name}” already; choose another name.")
        raise Refused(text.format(ingredient=mill.library.ingredient(ingredient_id).name, name=plain))
    return _add(mill, Lot(mill.new_id("lot"), ingredient_id, plain, received, mass_kg, supplier_id, note))


def lots_of(library: Library, ingredient_id: int) -> list[Lot]:
    """The lots of an ingredient, in the order of identifiers."""
    return [lot for lot in library.all("lot") if lot.ingredient_id == ingredient_id]


# -- removing


def remove(mill: Mill, kind: str, record_id: int) -> Edit:
    """Remove a site, supplier, scale, mixer, bin or lot (with its analyses), by its kind and identifier.

    Raises Refused with what rests on it and what to do about that.
    """
    library = mill.library
    record: Record = library.records[kind][record_id]
    standing = [text.format(name=record.name) for text in _RESTING[kind](library, record_id)]
    if standing:
        raise Refused([Problem(text, Place(record=record.name)) for text in standing])
    gone = [one for one in library.all("lot_value") if one.lot_id == record_id] if kind == "lot" else []
    return mill.apply(_("Remove {name}").format(name=record.name), [*map(removed, gone), removed(record)])


def _with(text: str, others: Iterable[str]) -> str:
    """The sentence with the names that rest on a record; {name} stays, for the record's own."""
    found = list(dict.fromkeys(others))
    shown = ", ".join(found[:_MOST_NAMED])
    if len(found) > _MOST_NAMED:
        shown = _("{names} and {count} more").format(names=shown, count=len(found) - _MOST_NAMED)
    return text.replace("{others}", shown.replace("{", "{{").replace("}", "}}"))


def _of(library: Library, kind: str, field: str, record_id: int) -> list[Record]:
    return [one for one in library.all(kind) if getattr(one, field) == record_id]


def _on_site(library: Library, site_id: int) -> list[str]:
    found: list[str] = []
    if library.mill.site_id == site_id:
        found.append(_("The mill works at {name}; choose another site for the mill, or none, first."))
    plant = [one.name for kind in ("scale", "mixer", "bin") for one in _of(library, kind, "site_id", site_id)]
    if plant:
        text = _("At {name} stand {others}; move them to another site, or remove them, first.")
        found.append(_with(text, plant))
    return found + _on_record(library, "site_id", site_id)


def _on_supplier(library: Library, supplier_id: int) -> list[str]:
    found: list[str] = []
    bought = [one.name for one in _of(library, "ingredient", "supplier_id", supplier_id)]
    if bought:
        text = _("From {name} are bought {others}; give those another supplier, or none, first.")
        found.append(_with(text, bought))
    lots = [one.name for one in _of(library, "lot", "supplier_id", supplier_id)]
    if lots:
        text = _("From {name} came the lots {others}; give those another supplier, or none, first.")
        found.append(_with(text, lots))
    return found + _on_record(library, "supplier_id", supplier_id)


def _on_record(library: Library, field: str, record_id: int) -> list[str]:
    """Prices and lists stay on record, and so does what they are of."""
    found: list[str] = []
    priced = [library.ingredient(one.ingredient_id).name for one in _of(library, "quote", field, record_id)]
    if priced:
        text = _("Prices of {others} are on record with {name} and stay; it can be renamed, not removed.")
        found.append(_with(text, priced))
    lists = [one.file_name for one in _of(library, "price_list", field, record_id)]
    if lists:
        text = _("The lists {others} are on record with {name} and stay; it can be renamed, not removed.")
        found.append(_with(text, lists))
    return found


def _on_scale(library: Library, scale_id: int) -> list[str]:
    weighed = [one.name for one in _of(library, "ingredient", "scale_id", scale_id)]
    text = _("{name} still weighs {others}; give those another scale first.")
    return [_with(text, weighed)] if weighed else []


def _on_mixer(library: Library, mixer_id: int) -> list[str]:
    batches = [str(one.number) for one in _of(library, "batch", "mixer_id", mixer_id)]
    text = _("The printed batches {others} were mixed in {name} and stay on record; it can be renamed, not removed.")
    return [_with(text, batches)] if batches else []


def _on_lot(library: Library, lot_id: int) -> list[str]:
    bins = [one.name for one in _of(library, "bin", "lot_id", lot_id)]
    text = _("Lot {name} stands in {others}; empty those first, or give them another lot.")
    return [_with(text, bins)] if bins else []


_RESTING: dict[str, Callable[[Library, int], list[str]]] = {
    "site": _on_site, "supplier": _on_supplier, "scale": _on_scale, "mixer": _on_mixer, "lot": _on_lot,
    "bin": lambda _library, _id: [],
}
