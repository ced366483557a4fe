"""What a person types into a field of a record, as changes: numbers with a unit, links by name, words of closed lists.

It serves every table of records whose columns stand in domain.fields; prices and composition have edits of their own.
"""

from __future__ import annotations

import datetime
import re
import typing
from collections.abc import Iterable
from enum import Enum
from typing import Any

from blendapp.domain import units
from blendapp.domain.fields import Field, field_of
from blendapp.domain.library import Library
from blendapp.domain.mills import PAPERS, SHEET_MASSES
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.nutrients import KEYS
from blendapp.domain.plant import Bin, Lot
from blendapp.domain.records import Change, Record, field_types
from blendapp.domain.wording import _
from blendapp.services.edits import field_changes
from blendapp.services.mill import Edit, Mill, kind_of, record_name

# The kind of record that a field of this name refers to by its name.
LINKS: dict[str, str] = {
    "site_id": "site", "supplier_id": "supplier", "scale_id": "scale", "ingredient_id": "ingredient", "lot_id": "lot",
    "formula_id": "formula", "made_by_formula_id": "formula",
}

# Fields that hold one of a few words.
WORDS: dict[tuple[str, str], tuple[str, ...]] = {
    ("mill", "ton_means"): ("", *units.TON_MEANINGS),
    ("mill", "cwt_means"): ("", *units.CWT_MEANINGS),
    ("mill", "sheet_mass"): SHEET_MASSES,
    ("mill", "paper"): PAPERS,
    ("nutrient", "key"): ("", *KEYS),
}

_IN_WORDS = re.compile(r"(?P<number>[^A-Za-z]+?)\s*(?P<unit>[A-Za-z][A-Za-z ]*)")


def set_typed(mill: Mill, record: Record, field: str, text: str) -> Edit:
    """Change one field of a record to what was typed. Raises ValueError or Refused with the sentence."""
    changes = typed_changes(mill, record, field, text)
    what = _("Change {field} of {name}").format(
        field=field_of(kind_of(record), field).label, name=record_name(record, mill.library)
    )
    return mill.apply(what, changes)


def typed_changes(mill: Mill, record: Record, field: str, text: str) -> list[Change]:
    """The changes of set_typed, to be joined with others into one edit (edits.many).

    What cannot stand beside the new content goes with it: a step in l takes the place of one in kg, another ingredient
    in a bin that of the lot that was in it.
    """
    value = read_typed(mill.library, record, field, text)
    return field_changes(mill, record, **{field: value, **_along(mill.library, record, field, value)})


def read_typed(library: Library, record: Record, field: str, text: str) -> Any:
    """What a typed text means in a field of a record. A blank is nothing known. Raises ValueError with the mend."""
    kind, plain = kind_of(record), " ".join(text.split())
    shown = field_of(kind, field)
    declared, optional = field_types(type(record))[field]
    if field in LINKS:
        return linked(library, record, field, plain) if plain else None
    if (kind, field) in WORDS:
        return _one_of(plain, WORDS[kind, field], shown)
    if declared is bool:
        return _yes(plain)
    if declared is float or declared is int:
        number = _number(plain, shown)
        if number is None and not optional:
            raise ValueError(_("{label} needs a number.").format(label=shown.label))
        return number if number is None or declared is float else int(number)
    if declared is datetime.date:
        return _date(plain)
    if typing.get_origin(declared) is tuple:
        return _several(plain, typing.get_args(declared)[0], shown)
    if isinstance(declared, type) and issubclass(declared, Enum):
        if not plain:
            return None if optional else type(record).__dataclass_fields__[field].default
        return declared(_one_of(plain, [str(word.value) for word in declared], shown))
    return text.strip()


def choices(library: Library, record: Record, field: str) -> list[str] | None:
    """What a field may hold, where that is a list, a blank first where it may be blank; None where it is typed freely.
    """
    kind = kind_of(record)
    declared, optional = field_types(type(record))[field]
    if field in LINKS:
        return ["", *(one.name for one in _candidates(library, record, field))]
    if (kind, field) in WORDS:
        return list(WORDS[kind, field])
    if declared is bool:
        return [_("yes"), _("no")]
    if isinstance(declared, type) and issubclass(declared, Enum):
        return [*([""] if optional else []), *(str(word.value) for word in declared)]
    return None


def shown_link(library: Library, record: Record, field: str) -> str:
    """The name behind a link, "" where there is none: what typing it again would be read from."""
    found = library.records[LINKS[field]].get(getattr(record, field) or 0)
    return "" if found is None else str(found.name)


# -- links


def linked(library: Library, record: Record, field: str, name: str) -> int:
    """The identifier of the record that a name means in a link. Raises ValueError with the names most like it."""
    candidates = _candidates(library, record, field)
    found = [one for one in candidates if fold(one.name) == fold(name)]
    if len(found) == 1 or (found and field != "lot_id"):
        return int(found[0].id)
    if found:
        text = _("Several lots are called “{name}”; enter the ingredient first.")
        raise ValueError(text.format(name=name))
    raise ValueError(_unknown(field, name, [one.name for one in candidates]))


def _candidates(library: Library, record: Record, field: str) -> list[Record]:
    found = library.all(LINKS[field])
    if field == "lot_id" and isinstance(record, Bin) and record.ingredient_id is not None:
        return [lot for lot in found if lot.ingredient_id == record.ingredient_id]
    return found


def _unknown(field: str, name: str, known: list[str]) -> str:
    from blendapp.exchange.suggestions import did_you_mean

    sentences = {
        "site": _("There is no site “{name}”."), "supplier": _("There is no supplier “{name}”."),
        "scale": _("There is no scale “{name}”."), "ingredient": _("There is no ingredient “{name}”."),
        "lot": _("There is no lot “{name}” of this ingredient."), "formula": _("There is no formula “{name}”."),
    }
    said = sentences[LINKS[field]].format(name=name)
    near = did_you_mean(name, known)
    if near:
        return said + near
    return said + " " + (_("Choose one of the mill's own, or add it first.") if known else _("Add it first."))


def _along(library: Library, record: Record, field: str, value: Any) -> dict[str, Any]:
    """Other fields of the record that change with one."""
    if value is None:
        return {"opened": False} if field == "made_by_formula_id" else {}
    if field == "step_l" and record.step_kg is not None:
        return {"step_kg": None, "least_kg": None, "greatest_kg": None}
    if field == "step_kg" and getattr(record, "step_l", None) is not None:
        return {"step_l": None, "least_l": None, "greatest_l": None}
    if isinstance(record, Bin) and field == "ingredient_id" and record.lot_id is not None:
        lot: Lot = library.records["lot"][record.lot_id]
        return {} if lot.ingredient_id == value else {"lot_id": None}
    if isinstance(record, Bin) and field == "lot_id":
        return {"ingredient_id": library.records["lot"][value].ingredient_id}
    return {}


# -- numbers and words


def _number(text: str, field: Field) -> float | None:
    """A number, in the unit of its field or with another one of mass or volume behind it."""
    if not text:
        return None
    value = _measured(text, field)
    if field.decimals == 0 and field.unit == "" and value != int(value):
        raise ValueError(_("A whole number is needed here; {number} is none.").format(number=text))
    sentence = field.fault(value)
    if sentence:
        raise ValueError(sentence)
    return value


def _measured(text: str, field: Field) -> float:
    tables = {"kg": units.MASS_KG, "l": units.VOLUME_L}
    found = _IN_WORDS.fullmatch(text)
    if found is None:
        own = bool(field.unit) and field.unit not in tables and fold(text).endswith(fold(field.unit))
        return notation().read(text[: -len(field.unit)] if own else text)
    number, word = found["number"].strip(), " ".join(found["unit"].split())
    if fold(word) == fold(field.unit) or field.unit not in tables:
        return notation().read(number if fold(word) == fold(field.unit) else text)
    table = tables[field.unit]
    known = {fold(name): factor for name, factor in table.items()}
    if fold(word) in known:
        return notation().read(number) * known[fold(word)]
    sentence = _("{label} is in {unit}; “{word}” is not known there, use one of {known}.")
    raise ValueError(sentence.format(label=field.label, unit=field.unit, word=word, known=", ".join(table)))


def _yes(text: str) -> bool:
    yes, no = fold(_("yes")), fold(_("no"))
    if fold(text) in (yes, no, ""):
        return fold(text) == yes
    raise ValueError(_("Write {yes} or {no}.").format(yes=_("yes"), no=_("no")))


def _date(text: str) -> datetime.date | None:
    try:
        return datetime.date.fromisoformat(text) if text else None
    except ValueError:
        raise ValueError(_("“{text}” is no date; write it like 2024-03-31.").format(text=text)) from None


def _one_of(text: str, words: Iterable[str], field: Field) -> str:
    known = list(words)
    for word in known:
        if fold(text) in (fold(word), fold(_(word)) if word else ""):
            return word
    sentence = _("{label} is one of {known}; “{text}” is none of them.")
    raise ValueError(sentence.format(label=field.label, known=", ".join(w for w in known if w), text=text))


def _several(text: str, cls: Any, field: Field) -> tuple[Any, ...]:
    parts = [part.strip() for part in text.split(",") if part.strip()]
    return tuple(dict.fromkeys(cls(_one_of(part, [str(word.value) for word in cls], field)) for part in parts))


