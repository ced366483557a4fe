"""The quotes of one ingredient as a table. A cell that is typed into makes a new quote in the place of the old one."""

from __future__ import annotations

import datetime
from collections.abc import Callable
from typing import TYPE_CHECKING, Any

from blendapp.desk.have.reading import read_price
from blendapp.desk.history.marks import marks_of, sign_of
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, fitting_decimals, number_look
from blendapp.domain.fields import field_of
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.price_history import PriceHistory, QuoteLine, Standing, day_words
from blendapp.domain.quotes import Quote, QuoteKind, Terms
from blendapp.domain.wording import _
from blendapp.services.price_history import change_quote
from blendapp.services.typed import choices, read_typed

if TYPE_CHECKING:
    from blendapp.desk.work import Work

_FIELDS = (("supplier_id", 130), ("site_id", 92), ("valid_from", 88), ("valid_to", 88))
_FURTHER = (("terms", 84), ("kind", 104))
_LEAST, _MOST = 2, 4
# What may be chosen, by its words.
_WORDS: dict[str, Callable[[], dict[str, Terms | QuoteKind | None]]] = {
    "terms": lambda: {"": None, **{_(str(one)): one for one in Terms}},
    "kind": lambda: {_(str(one)): one for one in QuoteKind},
}


class QuoteRows(Grid):
    """Owners are quotes, those with the latest first day first. with_replaced: also entries that no longer count."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.history: PriceHistory | None = None
        self.with_replaced = False
        self._line: dict[int, QuoteLine] = {}
        self._marks: dict[str, int] = {}
        self._decimals: dict[int, int] = {}
        self._widest = _LEAST

    def show(self, history: PriceHistory | None) -> None:
        """Show a history, or nothing."""
        self.history = history
        lines = [] if history is None else [
            one for one in history.lines if self.with_replaced or one.standing is not Standing.REPLACED
        ]
        self._line = {one.quote.id: one for one in lines}
        self._marks = {} if history is None else marks_of(history)
        self._decimals = {
            key: fitting_decimals(_rounded(one.quote.price_per_t), _LEAST, _MOST) for key, one in self._line.items()
        }
        self._widest = max(self._decimals.values(), default=_LEAST)
        currency = "" if history is None else history.currency
        self.set_headings([
            Heading("standing", "", 110),
            Heading("quoted", _("as quoted"), 116, True, _("As it was given; type 212, 18.2 / cwt or 4.1 per bu")),
            Heading("price", _("{currency}/t").format(currency=currency), 82, True, _("Money per tonne as fed")),
            *(_heading(*one) for one in _FIELDS), _heading("source", 160), *(_heading(*one) for one in _FURTHER),
            _heading("recorded", 92),
        ])
        self.set_rows(list(self._line))
        self.refresh()

    def line(self, owner: int) -> QuoteLine | None:
        """The quote of a row."""
        return self._line.get(owner)

    def make_look(self, owner: int, key: str) -> Look:
        line = self._line.get(owner)
        if line is None:
            return EMPTY
        quote = line.quote
        counts = line.standing is not Standing.REPLACED
        strong, quiet = line.standing is Standing.IN_FORCE, line.standing is not Standing.IN_FORCE
        why = line.why or (self.history.why if self.history is not None else "")
        if key == "standing":
            sign = sign_of(line, self._marks)
            return Look(text=f"{sign}  {line.standing.label}", words=line.standing.label, strong=strong, quiet=quiet,
                        hint=why)
        if key == "quoted":
            return self._quoted(quote, counts, why)
        if key == "price":
            return number_look(quote.price_per_t, self._decimals[owner], widest=self._widest, strong=strong, hint=why)
        if key == "recorded":
            return Look(text=day_words(quote.recorded), quiet=True)
        if key == "source":
            hint = line.source if line.price_list_id is None else _("{source}; Enter opens the list").format(
                source=line.source)
            return Look(text=line.source, quiet=True, hint=hint)
        return self._field_look(quote, key, counts)

    def _quoted(self, quote: Quote, counts: bool, why: str) -> Look:
        if quote.price is None:
            return Look(text=_("withdrawn"), typed="", editable=counts, quiet=True, number=True, hint=why)
        words = _("{price} per {mass}")
        return Look(
            text=words.format(price=notation().write_short(quote.price), mass=quote.per), number=True, hint=why,
            typed=words.format(price=notation().write_exact(quote.price), mass=quote.per), editable=counts,
        )

    def _field_look(self, quote: Quote, key: str, counts: bool) -> Look:
        value = getattr(quote, key)
        if key in ("valid_from", "valid_to"):
            return Look(text=day_words(value), typed=day_words(value), editable=counts)
        if key in ("supplier_id", "site_id"):
            kind = key.removesuffix("_id")
            text = "" if value is None else str(self.work.library.records[kind][value].name)
            shown = text or (_("whole mill") if key == "site_id" else "")
            offered = tuple(choices(self.work.library, quote, key) or ())
            return Look(text=shown, typed=text, editable=counts, choices=offered, quiet=not text)
        text = "" if value is None else _(str(value))
        return Look(text=text, typed=text, editable=counts, choices=tuple(_WORDS[key]()), quiet=True)

    def write(self, owner: int, key: str, text: str) -> None:
        quote = self.work.library.records["quote"].get(owner)
        if quote is None:
            raise ValueError(_("This price is no longer on record."))
        fields = self._read(quote, key, text.strip())
        self.work.do(lambda mill: change_quote(mill, owner, self.work.on, **fields))

    def _read(self, quote: Quote, key: str, text: str) -> dict[str, Any]:
        if key == "quoted":
            if not text:
                raise ValueError(_("A price that no longer holds is withdrawn or ended; the buttons below do both."))
            price, per = read_price(text)
            return {"price": price, "per": per or quote.per, "entered": text}
        if key in ("valid_from", "valid_to"):
            return {key: read_day(text, self.work.on)}
        if key not in dict((*_FIELDS, *_FURTHER)):
            raise ValueError(_("This says where the price comes from, and stays."))
        if key in _WORDS:
            words = {fold(said): one for said, one in _WORDS[key]().items()}
            if fold(text) not in words:
                offered = ", ".join(said for said in _WORDS[key]() if said)
                raise ValueError(_("“{text}” is none of {offered}.").format(text=text, offered=offered))
            return {key: words[fold(text)]}
        return {key: read_typed(self.work.library, quote, key, text)}


def _heading(key: str, width: int) -> Heading:
    field = field_of("quote", key)
    return Heading(key, field.label, width, False, field.help_text)


def _rounded(value: float | None) -> float | None:
    return None if value is None else round(value, 6)


def read_day(text: str, on: datetime.date) -> datetime.date | None:
    """A day typed as 2026-12-24, as "today" or in days from today: "+7". Blank is open. Raises ValueError."""
    plain = text.strip()
    if not plain:
        return None
    if plain.casefold() == _("today").casefold():
        return on
    try:
        if plain[0] in "+-−" and plain[1:].isdigit():
            return on + datetime.timedelta(int(plain.replace("−", "-")))
        return datetime.date.fromisoformat(plain)
    except (ValueError, OverflowError):
        sentence = _("“{text}” is no day; write it year first, like {day}, or like +7 for a week from today.")
        raise ValueError(sentence.format(text=plain, day=on.isoformat())) from None
