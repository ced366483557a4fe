"""Typed texts of the ingredient table as changes of the mill: each column's way of being read. No Qt."""

from __future__ import annotations

import datetime
import re
from collections.abc import Callable

from blendapp.domain import units
from blendapp.domain.fields import field_of
from blendapp.domain.ingredients import Basis, Ingredient, Tag
from blendapp.domain.library import Library
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.records import Change
from blendapp.domain.wording import _
from blendapp.services import edits, typed
from blendapp.services.mill import Mill

NUTRIENT = "nutrient "
PRICE_KEYS = ("price", "quoted")

_NUMBERS = ("dry_matter_percent", "stock_kg", "density_kg_per_l", "bushel_lb")
_DRY = re.compile(r"(.*?)\s*(dm|dry matter)$", re.IGNORECASE)
_FED = re.compile(r"(.*?)\s*(as fed)$", re.IGNORECASE)


def changes_of(mill: Mill, owner: int, key: str, text: str, on: datetime.date) -> list[Change]:
    """The changes that a text typed into a cell asks for. Raises ValueError or Refused with the sentence."""
    ingredient = mill.library.ingredient(owner)
    plain = text.strip()
    if key.startswith(NUTRIENT):
        return _value(mill, owner, int(key.removeprefix(NUTRIENT)), plain)
    if key in PRICE_KEYS:
        return _price(mill, ingredient, plain, on, per="t" if key == "price" else None)
    if key in _NUMBERS:
        value = notation().read(plain) if plain else None
        sentence = field_of("ingredient", key).fault(value)
        if sentence:
            raise ValueError(sentence)
        return edits.field_changes(mill, ingredient, **{key: value})
    if key in typed.LINKS or key == "opened":
        return typed.typed_changes(mill, ingredient, key, plain)
    return edits.field_changes(mill, ingredient, **{key: _READ.get(key, _text)(mill, plain)})


def pasted_changes(mill: Mill, owner: int, key: str, text: str, on: datetime.date) -> list[Change]:
    """As changes_of, for a cell of a block from outside, in which a price of 0 or below is most often a slip."""
    if key in PRICE_KEYS and text.strip() and read_price(whose_price(mill.library, text.strip())[0])[0] <= 0:
        raise ValueError(_("A price of 0 or below is kept out of what is pasted; type it if it is meant."))
    return changes_of(mill, owner, key, text, on)


def _text(_mill: Mill, text: str) -> str:
    return text


def _price(mill: Mill, ingredient: Ingredient, text: str, on: datetime.date, per: str | None) -> list[Change]:
    if not text:
        return edits.price_changes(mill, ingredient.id, None, on)
    text, supplier_id, site_id = whose_price(mill.library, text)
    amount, stated = read_price(text)
    old = mill.library.quote_in_force(ingredient.id, on)
    chosen = stated or per or (old.per if old is not None else "t")
    if chosen == units.BUSHEL:
        units.price_per_t(amount, chosen, ingredient.bushel_lb)
    return edits.price_changes(
        mill, ingredient.id, amount, on, per=chosen, entered=text, supplier_id=supplier_id, site_id=site_id)


def whose_price(library: Library, text: str) -> tuple[str, int | None, int | None]:
    """A typed price without "from Bay Grain" and "at North yard" behind it, and the supplier and the site that these
    name, None where they are not there. Raises ValueError for a name that the mill does not know."""
    by, at = f" {_('from')} ", f" {_('at')} "
    if by not in text and at not in text:
        return text, None, None
    # Names may hold these words themselves: every way of reading the text is tried.
    for head, rest in _cuts(text, by):
        for supplier, site in _cuts(rest, at) if rest else ():
            known = library.named("supplier", supplier), library.named("site", site) if site else None
            if known[0] is not None and (not site or known[1] is not None):
                return head, int(known[0].id), None if known[1] is None else int(known[1].id)
    for head, site in _cuts(text, at):
        known_site = library.named("site", site) if site else None
        if known_site is not None and by not in head:
            return head, None, int(known_site.id)
    names = {kind: ", ".join(one.name for one in library.all(kind)) or _("none yet") for kind in ("supplier", "site")}
    sentence = _("“{text}” names a supplier or a site that the mill does not know. Its suppliers: {suppliers}; its "
                 "sites: {sites}.")
    raise ValueError(sentence.format(text=text, suppliers=names["supplier"], sites=names["site"]))


def _cuts(text: str, word: str) -> list[tuple[str, str]]:
    """A text cut in two at each place of a word, and uncut at last."""
    places = [at for at in range(len(text)) if text.startswith(word, at)]
    return [(text[:at].strip(), text[at + len(word):].strip()) for at in places] + [(text, "")]


def read_price(text: str) -> tuple[float, str | None]:
    """A price and the mass it is per: "452", "18.20 / cwt", "4.10 per bu". Raises ValueError with the mend."""
    head, slash, tail = text.partition("/")
    if not slash:
        head, slash, tail = text.partition(" per ")
    per = " ".join(tail.split()) if slash else None
    if per is not None and per not in units.PRICE_PER:
        masses = ", ".join(units.PRICE_PER)
        raise ValueError(_("A price can be per {masses}; “{per}” is none of them.").format(masses=masses, per=per))
    return notation().read(head), per


def _value(mill: Mill, ingredient_id: int, nutrient_id: int, text: str) -> list[Change]:
    if not text:
        return edits.value_changes(mill, ingredient_id, nutrient_id, None)
    basis: Basis | None = None
    for pattern, meant in ((_DRY, Basis.DRY_MATTER), (_FED, Basis.AS_FED)):
        found = pattern.fullmatch(text)
        if found:
            text, basis = found.group(1), meant
    unit = mill.library.nutrient(nutrient_id).unit
    return edits.value_changes(mill, ingredient_id, nutrient_id, notation().read(text), unit=unit, basis=basis)


def _basis(_mill: Mill, text: str) -> Basis:
    if not text:
        return Basis.AS_FED
    for basis in Basis:
        if fold(text) in (basis, fold(_(str(basis)))):
            return basis
    raise ValueError(_("The basis is as fed or dry matter; “{text}” is neither.").format(text=text))


def _tags(_mill: Mill, text: str) -> tuple[Tag, ...]:
    known = {fold(_(str(tag))): tag for tag in Tag} | {str(tag): tag for tag in Tag}
    found: list[Tag] = []
    for part in text.split(","):
        if not part.strip():
            continue
        if fold(part) not in known:
            tags = ", ".join(_(str(tag)) for tag in Tag)
            raise ValueError(_("“{tag}” is no tag; use {tags}, joined by commas.").format(tag=part.strip(), tags=tags))
        found.append(known[fold(part)])
    return tuple(found)


_READ: dict[str, Callable[[Mill, str], object]] = {
    "basis": _basis, "tags": _tags,
}
