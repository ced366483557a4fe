"""The ingredient table's model: which columns a set shows, and how each cell looks."""

from __future__ import annotations

import datetime
from dataclasses import replace
from typing import TYPE_CHECKING, Any

from blendapp.desk.have.reading import NUTRIENT, PRICE_KEYS, changes_of, pasted_changes
from blendapp.desk.mix.lines import break_even_words
from blendapp.desk.rail.geometry import Axis, End, RailState, axis_for
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain import units
from blendapp.domain.fields import field_of
from blendapp.domain.ingredients import Basis, Ingredient, Origin, Value
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.wording import _
from blendapp.services import edits, typed
from blendapp.services.mill import Edit, record_name
from blendapp.services.price_history import coming, expired

if TYPE_CHECKING:
    from blendapp.desk.work import Work

PRICES, COMPOSITION, KEEPING = "prices", "composition", "keeping"
NAME_PX = 148


def column_sets() -> dict[str, str]:
    """The sets of columns and what they are called."""
    return {PRICES: _("Prices"), COMPOSITION: _("Composition"), KEEPING: _("Keeping")}


class HaveModel(Grid):
    """Ingredients as rows. filter_text keeps those whose name, class or code holds it; sort_key orders them."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.column_set = PRICES
        self.filter_text = ""
        self.sort_key: str | None = None
        self.sort_down = False
        self._axes: dict[int, Axis] = {}
        self._decimals: dict[int, int] = {}
        self._trial_price: tuple[int, float] | None = None

    # -- rows and columns

    def rebuild(self) -> None:
        """Show what the mill holds now."""
        self.set_headings(self._headings())
        wanted = fold(self.filter_text)
        shown = [
            one for one in self.work.library.ingredients
            if not wanted or any(wanted in fold(text) for text in (one.name, one.class_name, one.code))
        ]
        if self.sort_key is not None:
            key = self.sort_key
            shown.sort(key=lambda one: self._sort_value(one, key)[1], reverse=self.sort_down)
            # Unknown cells stand last whichever way the rest is ordered.
            shown.sort(key=lambda one: self._sort_value(one, key)[0])
        self.set_rows([one.id for one in shown])

    def take_decimals(self) -> None:
        """The decimals of each nutrient's column: none where values run into hundreds, three where all are small."""
        greatest: dict[int, float] = {}
        for value in self.work.library.records["value"].values():
            size = abs(value.amount)
            greatest[value.nutrient_id] = max(greatest.get(value.nutrient_id, 0.0), size)
        self._decimals = {key: 0 if size >= 1000 else 1 if size >= 200 else 2 for key, size in greatest.items()}

    def _headings(self) -> list[Heading]:
        money = self.work.library.mill.currency
        name = Heading("name", _("Ingredient"), NAME_PX)
        if self.column_set == COMPOSITION:
            return [
                name, self._heading("dry_matter_percent", 92), self._heading("basis", 84),
                *(Heading(f"{NUTRIENT}{n.id}", f"{n.name} {n.unit}".strip(), self._nutrient_width(n.name, n.unit), True)
                  for n in self.work.library.nutrients),
            ]
        if self.column_set == KEEPING:
            plain = (
                ("class_name", 110), ("scale_id", 110), ("density_kg_per_l", 96), ("made_by_formula_id", 140),
                ("opened", 76), ("supplier_id", 130), ("code", 70), ("tags", 150), ("bushel_lb", 80), ("drug", 110),
                ("drug_level", 90), ("drug_species", 100), ("withdrawal", 100), ("note", 220),
            )
            return [name, *(self._heading(key, width) for key, width in plain)]
        return [
            name,
            Heading("price", _("Price {currency}/t").format(currency=money), 88, True, _("Money per tonne as fed")),
            Heading("holds", _("holds from / to"), 106, False, _("Drag the mark to see at which price the mix turns")),
            Heading("stock_kg", field_of("ingredient", "stock_kg").label, 72, True),
            Heading("quoted", _("as quoted"), 136, True,
                    _("The price in force, as it was given. Type 18.2 / cwt, or 210 from a supplier at a site")),
            Heading("since", _("since"), 96), Heading("source", _("source"), 160),
        ]

    def _heading(self, key: str, width: int) -> Heading:
        field = field_of("ingredient", key)
        return Heading(key, field.label, width, field.decimals is not None, field.help_text)

    @staticmethod
    def _nutrient_width(name: str, unit: str) -> int:
        return max(72, int(len(f"{name} {unit}") * 6.9) + 16)

    def _sort_value(self, ingredient: Ingredient, key: str) -> tuple[bool, Any]:
        value = self._plain(ingredient, key)
        if isinstance(value, str):
            return (not value, fold(value))
        return (value is None, value or 0.0)

    def _plain(self, ingredient: Ingredient, key: str) -> Any:
        if key.startswith(NUTRIENT):
            nutrient = self.work.library.nutrient(int(key.removeprefix(NUTRIENT)))
            value = self.work.library.value(ingredient.id, nutrient.id)
            return None if value is None else value.as_fed(nutrient.unit, ingredient.dry_matter_percent)
        if key == "holds" or key in PRICE_KEYS:
            return self.work.library.price_per_t(ingredient.id, self.work.on)
        if key == "since":
            quote = self.work.library.quote_in_force(ingredient.id, self.work.on)
            return None if quote is None or quote.valid_from is None else float(quote.valid_from.toordinal())
        found = getattr(ingredient, key, "")
        return found if found is None or isinstance(found, (int, float)) else str(found)

    # -- cells

    def make_look(self, owner: int, key: str) -> Look:
        ingredient = self.work.library.records["ingredient"].get(owner)
        if ingredient is None:
            return EMPTY
        if key == "name":
            admitted = owner in self.work.admitted_ids
            hint = "" if admitted else _("Not admitted to this formula")
            return Look(text=ingredient.name, typed=ingredient.name, editable=True, quiet=not admitted, hint=hint)
        if key.startswith(NUTRIENT):
            return self._value_look(ingredient, int(key.removeprefix(NUTRIENT)))
        if key in ("price", "holds", "quoted", "since", "source"):
            return self._price_look(ingredient, key)
        return self._field_look(ingredient, key)

    def _field_look(self, ingredient: Ingredient, key: str) -> Look:
        field = field_of("ingredient", key)
        value = getattr(ingredient, key)
        if field.decimals is not None:
            return number_look(value, fitting_decimals(value, field.decimals), widest=field.decimals, editable=True)
        if key in typed.LINKS:
            names = tuple(sorted(typed.choices(self.work.library, ingredient, key) or (), key=fold))
            text = typed.shown_link(self.work.library, ingredient, key)
            return Look(text=text, typed=text, editable=True, choices=names, hint=field.help_text)
        if key == "opened":
            # Of an ingredient that is bought there is nothing to open.
            made = ingredient.made_by_formula_id is not None
            text = (_("yes") if value else _("no")) if made or value else ""
            return Look(text=text, typed=text, editable=True, choices=(_("yes"), _("no")), hint=field.help_text)
        if key == "basis":
            words = _(str(value))
            return Look(text=words, typed=words, editable=True, choices=tuple(_(str(one)) for one in Basis))
        text = ", ".join(_(str(one)) for one in value) if isinstance(value, tuple) else str(value)
        return Look(text=text, typed=text, editable=True)

    def _value_look(self, ingredient: Ingredient, nutrient_id: int) -> Look:
        nutrient = self.work.library.nutrient(nutrient_id)
        value = self.work.library.value(ingredient.id, nutrient_id)
        if value is None:
            words = _("{nutrient} of {ingredient} is unknown")
            words = words.format(nutrient=nutrient.name, ingredient=ingredient.name)
            return number_look(None, self._decimals.get(nutrient_id, 2), editable=True, words=words)
        amount = round(units.convert(value.amount, value.unit, nutrient.unit), 10)
        decimals = fitting_decimals(amount, self._decimals.get(nutrient_id, 2), 4)
        plain = number_look(
            amount, decimals, editable=True, italic=value.origin is Origin.ESTIMATED, hint=_about(value),
        )
        if value.basis is not ingredient.basis:
            plain = replace(plain, typed=f"{plain.typed} {'DM' if value.basis is Basis.DRY_MATTER else 'as fed'}")
        return plain

    def _price_look(self, ingredient: Ingredient, key: str) -> Look:
        on = self.work.on
        quote = self.work.library.quote_in_force(ingredient.id, on)
        price = None if quote is None else quote.price_per_t
        trial = self._trial_price
        if trial is not None and trial[0] == ingredient.id:
            price = trial[1]
        if key == "price":
            tried = trial is not None and trial[0] == ingredient.id
            lacking = _("expired") if price is None and self._expired(ingredient) else _("no price")
            return number_look(price, 2, editable=True, unknown=lacking, strong=tried,
                               hint=self._price_hint(ingredient))
        if key == "holds":
            return self._rail_look(ingredient, price)
        if quote is None or quote.price is None:
            gone = expired(self.work.library, ingredient.id, on) if key == "since" else None
            if gone is not None:
                return Look(text=_("ended {age}").format(age=age(gone.valid_to, on)), quiet=True,
                            hint=_date(gone.valid_to))
            return Look(editable=key == "quoted", number=key == "quoted")
        if key == "quoted":
            words = _("{price} per {mass}")
            text = words.format(price=notation().write_short(quote.price), mass=quote.per)
            typed = words.format(price=notation().write_exact(quote.price), mass=quote.per)
            return Look(text=text, typed=typed, number=True, editable=True, quiet=True)
        if key == "since":
            return Look(text=age(quote.valid_from, on), quiet=True, hint=_date(quote.valid_from))
        whose = [str(self.work.library.records[kind][key].name)
                 for kind, key in (("supplier", quote.supplier_id), ("site", quote.site_id)) if key is not None]
        text = ", ".join([*whose, _("typed by hand") if quote.source == edits.TYPED else quote.source])
        return Look(text=text, quiet=True, hint=text)

    def _price_hint(self, ingredient: Ingredient) -> str:
        quote = self.work.library.quote_in_force(ingredient.id, self.work.on)
        if quote is None or quote.price is None:
            gone = expired(self.work.library, ingredient.id, self.work.on)
            if gone is None:
                return _("No price is in force; the ingredient is left out of every mix.")
            text = _("Its last price, {price} per {mass}, held until {day}; without a new one it is left out of every "
                     "mix.")
            return text.format(price=notation().write_short(gone.price), mass=gone.per, day=_date(gone.valid_to))
        words = _("{price} per {mass}, {age}, {source}").format(
            price=notation().write_short(quote.price), mass=quote.per, age=age(quote.valid_from, self.work.on),
            source=quote.source or _("no source"),
        )
        parts = [words, self._coming(ingredient.id), _("Ctrl+H shows all of its prices")]
        return ". ".join(part for part in parts if part)

    def _expired(self, ingredient: Ingredient) -> bool:
        return expired(self.work.library, ingredient.id, self.work.on) is not None

    def _coming(self, ingredient_id: int) -> str:
        """What the price is going to be, "" where nothing is known of it."""
        step = coming(self.work.library, ingredient_id, self.work.on)
        if step is None:
            return ""
        if step.price_per_t is None:
            return _("From {day} no price is known").format(day=_date(step.first))
        return _("From {day} it is {price}").format(day=_date(step.first), price=notation().write(step.price_per_t, 2))

    def _rail_look(self, ingredient: Ingredient, price: float | None) -> Look:
        if price is None:
            return EMPTY
        found = self.work.ingredient_result(ingredient.id)
        low, high = found.price_range if found is not None and found.price_range is not None else (None, None)
        touching = {
            end for end, bound in ((End.MINIMUM, low), (End.MAXIMUM, high))
            if bound is not None and abs(bound - price) <= 1e-9 * max(1.0, abs(price))
        }
        state = RailState(
            minimum=low, maximum=high, mark=price, held=(End.MARK,), working=frozenset(touching), decimals=2,
            stale=self.work.stale,
        )
        if self._trial_price is None or self._trial_price[0] != ingredient.id:
            self._axes[ingredient.id] = price_axis(state, self._axes.get(ingredient.id))
        axis = self._axes.get(ingredient.id) or price_axis(state, None)
        words = _("Price of {name}, {price}").format(name=ingredient.name, price=notation().write(price, 2))
        hint = self._range_words(low, high)
        if found is not None and found.amount == 0 and found.break_even_price is not None:
            hint = break_even_words(found, self.work.library.mill.currency)
        return Look(rail=state, axis=axis, words=words, hint=hint)

    def _range_words(self, low: float | None, high: float | None) -> str:
        write = notation().write
        if low is not None and high is not None:
            return _("The mix stays as it is from {low} to {high}.").format(low=write(low, 2), high=write(high, 2))
        if low is not None:
            return _("The mix stays as it is from {low} upwards.").format(low=write(low, 2))
        if high is not None:
            return _("The mix stays as it is up to {high}.").format(high=write(high, 2))
        return _("Drag the mark to see at which price the mix turns.")

    def try_price(self, owner: int, price: float | None) -> None:
        """Show a price that is being tried; None shows the stored one again."""
        before = self._trial_price
        self._trial_price = None if price is None else (owner, price)
        self.refresh([owner] if before is None else [owner, before[0]])

    # -- typing

    def write(self, owner: int, key: str, text: str) -> None:
        changes = changes_of(self.work.mill, owner, key, text, self.work.on)
        name = record_name(self.work.library.ingredient(owner), self.work.library)
        heading = next(one.words for one in self.headings if one.key == key)
        self.work.apply(_("Change {field} of {name}").format(field=heading, name=name), changes)

    def write_block(self, cells: list[tuple[int, str, str]], what: str, *, pasted: bool = False) -> dict[int, str]:
        """Take every cell of a block that can be taken, as one undo; the sentences of the others by their place."""
        read = pasted_changes if pasted else changes_of

        def thunk(owner: int, key: str, text: str) -> Any:
            return lambda: read(self.work.mill, owner, key, text, self.work.on)

        many = self.work.do(lambda mill: edits.many(mill, what, [thunk(*cell) for cell in cells]))
        return {at: " ".join(problem.text for problem in problems) for at, problems in many.refused.items()}

    def forgive_stored(self, edit: Edit) -> None:
        """Forget the refused texts of every cell whose record an edit has changed."""
        gone: set[tuple[int, str]] = set()
        for change in edit.changes:
            record: Any = change.after or change.before
            if change.kind == "quote":
                gone |= {(record.ingredient_id, "price"), (record.ingredient_id, "quoted")}
            elif change.kind == "value":
                gone.add((record.ingredient_id, f"{NUTRIENT}{record.nutrient_id}"))
        for owner, key in gone:
            self.forgive(owner, key)
        self.forgive_owners({change.id for change in edit.changes if change.kind == "ingredient"})

    def count_expired(self) -> int:
        """How many ingredients have had a price that ended, and have none now."""
        return sum(map(self._expired, self.work.library.ingredients))

    def has_price(self, owner: int) -> bool:
        """Whether a price of an ingredient is in force."""
        return self.work.library.price_per_t(owner, self.work.on) is not None

    def can_write(self, key: str) -> bool:
        """Whether cells of a column are typed into at all."""
        return key not in ("holds", "since", "source")


def price_axis(state: RailState, before: Axis | None) -> Axis:
    """The axis of a price: at least a third below and above it, so that there is somewhere to drag to."""
    axis = axis_for(state, before)
    assert state.mark is not None
    spare = max(abs(state.mark) * 0.3, 1.0)
    if axis.low <= state.mark - 0.5 * spare and axis.high >= state.mark + 0.5 * spare:
        return axis
    return Axis(min(axis.low, state.mark - spare), max(axis.high, state.mark + spare))


def age(day: datetime.date | None, today: datetime.date) -> str:
    """How old a price is, short."""
    if day is None:
        return _("no date")
    days = (today - day).days
    if days == 0:
        return _("today")
    if days < 0:
        return _date(day)
    if days < 60:
        return _("{days} d").format(days=days)
    return _("{months} months").format(months=round(days / 30.4))


def _date(day: datetime.date | None) -> str:
    return "" if day is None else day.isoformat()


def _about(value: Value) -> str:
    parts = [
        _("per kg dry matter") if value.basis is Basis.DRY_MATTER else _("as fed"),
        _(str(value.origin)) if value.origin is not None else _("origin not stated"), value.source, _date(value.date),
    ]
    if value.n is not None:
        parts.append(_("n {n}").format(n=value.n))
    if value.sd is not None:
        parts.append(_("SD {sd}").format(sd=notation().write_short(value.sd)))
    return ", ".join(part for part in parts if part)
