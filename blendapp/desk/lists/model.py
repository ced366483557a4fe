"""Tables of the lists that were applied, of the rows of one, and of what is remembered."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from blendapp.desk.lists import telling
from blendapp.desk.table.grid import Grid, Heading
from blendapp.desk.table.look import EMPTY, Look, number_look
from blendapp.domain.composition_rows import CompositionRow
from blendapp.domain.list_rows import Fate, ListRow
from blendapp.domain.mills import Asked, ListAbout, PriceList, Synonym
from blendapp.domain.names import fold
from blendapp.domain.notation import notation
from blendapp.domain.price_history import day_words
from blendapp.domain.price_rows import PriceRow
from blendapp.domain.wording import _
from blendapp.services.list_memory import answer_again, remembered, set_usual_change

if TYPE_CHECKING:
    from blendapp.desk.work import Work

DIGEST_SIGNS = 10


class AppliedRows(Grid):
    """Owners are lists, the latest first."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self._list: dict[int, PriceList] = {}

    def show(self, lists: Sequence[PriceList]) -> None:
        """Show lists."""
        self._list = {one.id: one for one in lists}
        self.set_headings([
            Heading("applied", _("applied"), 130), Heading("file_name", _("file"), 230), Heading("about", _("of"), 96),
            Heading("source", _("remembered as"), 150), Heading("supplier_id", _("Supplier"), 130),
            Heading("site_id", _("Site"), 110), Heading("rows", _("rows"), 64, True),
            Heading("accepted", _("taken"), 64, True), Heading("stands", "", 190),
            Heading("digest", _("digest"), 104, False, _("SHA-256 of the file; two files with the same are the same")),
        ])
        self.set_rows(list(self._list))
        self.refresh()

    def list_of(self, owner: int) -> PriceList | None:
        """The list of a row."""
        return self._list.get(owner)

    def make_look(self, owner: int, key: str) -> Look:
        one = self._list.get(owner)
        if one is None:
            return EMPTY
        gone = one.withdrawn is not None
        if key == "applied":
            moment = one.applied.astimezone()
            return Look(text=f"{moment:%Y-%m-%d %H:%M}", quiet=gone)
        if key == "stands":
            text = "" if one.withdrawn is None else _("rolled back on {day}").format(
                day=day_words(one.withdrawn.astimezone().date()))
            return Look(text=text, strong=gone, words=text or _("it stands"))
        if key in ("rows", "accepted"):
            return Look(text=str(getattr(one, key)), number=True, quiet=gone)
        if key == "about":
            return Look(text=_("prices") if one.about is ListAbout.PRICES else _("analyses"), quiet=True)
        if key in ("supplier_id", "site_id"):
            record = self.work.library.records[key.removesuffix("_id")].get(getattr(one, key) or 0)
            return Look(text="" if record is None else record.name, quiet=gone)
        if key == "digest":
            return Look(text=one.digest[:DIGEST_SIGNS], hint=one.digest, quiet=True)
        text = str(getattr(one, key))
        return Look(text=text, quiet=gone or key == "source", hint=text)

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("A list that was applied stays as it was; roll it back, or apply another one."))


def fate_words(fate: Fate) -> str:
    """What became of a row, in a word."""
    return {Fate.ACCEPTED: _("taken"), Fate.QUESTION: _("question"), Fate.REFUSED: _("refused"),
            Fate.IGNORED: _("left alone")}[fate]


class OpenedRows(Grid):
    """The rows of one applied list, in their order. Owners are places among them."""

    def __init__(self, parent: Any = None) -> None:
        super().__init__(parent)
        self.rows: list[ListRow] = []

    def show(self, rows: Sequence[ListRow], currency: str) -> None:
        """Show rows, of a list of prices or of analyses."""
        self.rows = list(rows)
        samples = any(isinstance(row, CompositionRow) for row in rows)
        middle = [Heading("sample", _("sample"), 110), Heading("sampled", _("day"), 92),
                  Heading("values", _("values"), 340)] if samples else [
            Heading("entered", _("price as listed"), 130, True),
            Heading("price_per_t", _("{currency}/t").format(currency=currency), 82, True),
            Heading("old_price_per_t", _("was"), 82, True), Heading("valid_from", _("from"), 92),
            Heading("valid_to", _("to"), 92)]
        self.set_headings([
            Heading("fate", "", 84), Heading("place", _("row"), 96), Heading("source_name", _("in the list"), 180),
            Heading("ingredient", _("Ingredient"), 170), *middle, Heading("reason", _("why"), 520),
        ])
        self.set_rows([])
        self.set_rows(list(range(len(self.rows))))

    def make_look(self, owner: int, key: str) -> Look:
        if owner >= len(self.rows):
            return EMPTY
        row = self.rows[owner]
        quiet = row.fate is Fate.IGNORED
        if key == "fate":
            return Look(text=fate_words(row.fate), strong=row.fate in (Fate.QUESTION, Fate.REFUSED), quiet=quiet)
        if key == "place":
            return Look(text=f"{row.sheet} {row.row}".strip(), quiet=True)
        if isinstance(row, PriceRow) and key in ("price_per_t", "old_price_per_t"):
            return number_look(getattr(row, key), 2, unknown="", quiet=key != "price_per_t")
        if isinstance(row, PriceRow) and key == "entered":
            return Look(text=f"{row.entered} {row.unit or ''}".strip(), number=True, quiet=quiet)
        if isinstance(row, CompositionRow) and key == "values":
            text = "   ".join(f"{one.nutrient} {notation().write_short(one.amount)} {one.unit}" for one in row.values)
            return Look(text=text, hint=text, quiet=quiet)
        value = getattr(row, key, None)
        text = "" if value is None else str(value)
        return Look(text=text, quiet=quiet, hint=text if key in ("reason", "source_name") else "")

    def write(self, owner: int, key: str, text: str) -> None:
        raise ValueError(_("A list that was applied stays as it was; roll it back, or apply another one."))


class MemoryRows(Grid):
    """Owners are answers. filter_text keeps those of sources, words or answers that hold it."""

    def __init__(self, work: Work, parent: Any = None) -> None:
        super().__init__(parent)
        self.work = work
        self.filter_text = ""
        self._one: dict[int, Synonym] = {}

    def rebuild(self) -> None:
        """Show what the mill remembers now."""
        self.set_headings([
            Heading("source", _("of the lists of"), 200), Heading("question", _("what was asked"), 240),
            Heading("about", _("in the list"), 240), Heading("answer", _("the answer"), 320),
        ])
        found = remembered(self.work.mill) if self.work.is_open else []
        wanted = fold(self.filter_text)
        self._one = {one.id: one for one in found if not wanted or wanted in fold(" ".join(self._words(one)))}
        self.set_rows(list(self._one))
        self.refresh()

    def _words(self, one: Synonym) -> tuple[str, str, str, str]:
        library = self.work.library
        return (telling.source_words(one), telling.question_words(one), telling.about_words(one),
                telling.told_answer(one, library, library.mill.currency))

    def make_look(self, owner: int, key: str) -> Look:
        one = self._one.get(owner)
        if one is None:
            return EMPTY
        source, question, about, answer = self._words(one)
        if key == "answer":
            editable = telling.is_changed_here(one, self.work.library)
            hint = "" if not one.per else _("Where the list leaves the unit open, the price is per {mass}.").format(
                mass=one.per)
            choices = telling.offered(one, self.work.library) if editable else ()
            return Look(text=answer, typed=answer, editable=editable, choices=choices, hint=hint)
        text = {"source": source, "question": question, "about": about}[key]
        return Look(text=text, quiet=key != "about", hint=text)

    def write(self, owner: int, key: str, text: str) -> None:
        one = self.work.library.records["synonym"].get(owner)
        if one is None:
            raise ValueError(_("This answer is no longer remembered."))
        if key != "answer":
            raise ValueError(_("What was asked stays as it was; the answer can be changed, or forgotten."))
        answer = telling.read_answer(one, text, self.work.library, self.work.on)
        if one.asked is Asked.USUAL_CHANGE:
            self.work.do(lambda mill: set_usual_change(mill, one.name, float(answer.answer)))
        else:
            self.work.do(lambda mill: answer_again(mill, owner, answer))
