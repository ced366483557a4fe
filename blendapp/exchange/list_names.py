"""Which ingredient a name in a list is: exact after folding, then known synonyms, never by likeness alone."""

from __future__ import annotations

import re
import unicodedata
from collections.abc import Iterator
from dataclasses import dataclass
from itertools import permutations

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT, Answer, source_of
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.wording import _
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.suggestions import LONGEST_NAME, Suggester

LEAST_LIKENESS = 0.5
MOST_LOOKED_FOR = 1000
_BETWEEN_DIGITS = re.compile(r"(?<=[0-9])[^0-9a-z%+]+(?=[0-9])")
# Marks of what stood between two digits; a plus sign tells grades apart.
_POINT, _GAP = "\x01", "\x02"
_KEPT = frozenset({_POINT, _GAP, "+"})


def match_key(name: str) -> str:
    """A name without case, spaces, punctuation and accents. What stands between two digits stays: 1.5 is not 15."""
    letters = unicodedata.normalize("NFKD", fold(name))
    plain = "".join(letter for letter in letters if not unicodedata.combining(letter))
    plain = _BETWEEN_DIGITS.sub(lambda found: _POINT if found[0].strip() in (".", ",") else _GAP, plain)
    return "".join(letter for letter in plain if letter.isalnum() or letter in _KEPT)


# Marks that set a word behind what it belongs to: "Wheat, feed" is feed wheat, and wheat feed is another good.
_SET_BEHIND = re.compile(r"(?<![0-9]),|,(?![0-9])|[;:()\[\]]|\s[-–—/]\s")
_MOST_PARTS = 4


def turned_keys(name: str) -> Iterator[str]:
    """The keys of a name with the parts between its commas and brackets in every other order."""
    parts = [part.strip() for part in _SET_BEHIND.split(name) if part.strip()]
    if 1 < len(parts) <= _MOST_PARTS:
        for order in list(permutations(parts))[1:]:
            yield match_key(" ".join(order))


@dataclass(frozen=True)
class Match:
    """ingredient: None where nothing is known by that name; reason: then the question, else what is worth saying.

    candidates: names of the ingredients that it may be.
    """

    ingredient: Ingredient | None
    reason: str = ""
    known: bool = True
    candidates: tuple[str, ...] = ()


class NameFinder:
    """Finds ingredients of a library by the names that a source gives them."""

    def __init__(self, library: Library, answers: Answers) -> None:
        self.library = library
        self.answers = answers
        source = source_of(answers.source)
        self._by_key: dict[str, list[Ingredient]] = {}
        for ingredient in library.ingredients:
            self._by_key.setdefault(match_key(ingredient.name), []).append(ingredient)
        self._synonyms: dict[str, set[int]] = {}
        self._of_source: set[str] = set()
        known = [s for s in library.all("synonym") if s.asked is Asked.INGREDIENT and s.ingredient_id is not None]
        for synonym in sorted(known, key=lambda s: source_of(s.source) != source):
            key = match_key(synonym.name)
            own = source_of(synonym.source) == source
            if own or key not in self._of_source:  # what the source itself was answered settles it
                self._synonyms.setdefault(key, set()).add(synonym.ingredient_id)
            if own:
                self._of_source.add(key)
        self._found: dict[str, Match] = {}
        self._looked_for = 0
        self._suggester: Suggester | None = None

    def is_known(self, name: str) -> bool:
        key = match_key(name) if len(name) <= LONGEST_NAME else ""
        return bool(key) and (key in self._by_key or key in self._synonyms or self._answer(name) is not None)

    def _answer(self, name: str) -> Answer | None:
        return self.answers.find(Asked.INGREDIENT, name)

    def is_left_out(self, name: str) -> bool:
        """Whether a person has answered that a name of this source is nothing for the mill."""
        found = self._answer(name) if name else None
        return found is not None and found.answer == LEAVE_OUT

    def by_id(self, ingredient_id: int | None) -> Ingredient | None:
        """The ingredient of an answer; None where none was meant, or it is gone."""
        known = ingredient_id is not None and ingredient_id in self.library.records["ingredient"]
        return self.library.ingredient(ingredient_id) if known and ingredient_id is not None else None

    def find(self, name: str) -> Match:
        folded = fold(name)
        if folded not in self._found:
            self._found[folded] = self._find(name)
        return self._found[folded]

    def _find(self, name: str) -> Match:
        answer = self._answer(name)
        if answer is not None and answer.ingredient_id in self.library.records["ingredient"]:
            assert answer.ingredient_id is not None
            return Match(self.library.ingredient(answer.ingredient_id), _("“{name}” as answered.").format(name=name))
        exact: Ingredient | None = self.library.named("ingredient", name)
        if exact is not None:
            return Match(exact)
        key = match_key(name) if len(name) <= LONGEST_NAME else ""
        same = self._by_key.get(key, []) if key else []
        if same:
            same = list(dict.fromkeys([*same, *self._turned(name)]))
        if len(same) == 1:
            return Match(same[0])
        if same:
            return self._either(name, same)
        ids = sorted(self._synonyms.get(key, set())) if key else []
        known = [self.library.ingredient(key) for key in ids if key in self.library.records["ingredient"]]
        if len(known) == 1 and (turned := [one for one in self._turned(name) if one is not known[0]]):
            return self._either(name, [*known, *turned])
        if len(known) == 1:
            return Match(known[0], _("Known as “{name}” from an earlier list.").format(name=name))
        if known:
            names = _(" or ").join(f"“{ingredient.name}”" for ingredient in known)
            return Match(None, _("“{name}” has been {names} before; say which.").format(name=name, names=names),
                         candidates=tuple(ingredient.name for ingredient in known))
        return self._unknown(name)

    @staticmethod
    def _either(name: str, among: list[Ingredient]) -> Match:
        names = _(" or ").join(f"“{ingredient.name}”" for ingredient in among)
        return Match(None, _("“{name}” may be {names}; say which.").format(name=name, names=names),
                     candidates=tuple(ingredient.name for ingredient in among))

    def _turned(self, name: str) -> list[Ingredient]:
        """The ingredients that a name means where a comma in it turns its words round."""
        return [one for key in turned_keys(name) for one in self._by_key.get(key, [])]

    def _unknown(self, name: str) -> Match:
        text = _("The mill has no ingredient “{name}”.").format(name=name)
        self._looked_for += 1
        candidates: list[str] = []
        if self._looked_for <= MOST_LOOKED_FOR:
            if self._suggester is None:
                self._suggester = Suggester((i.name for i in self.library.ingredients), LEAST_LIKENESS)
            candidates = self._suggester.close_names(name)
        if candidates:
            names = _(" or ").join(f"“{candidate}”" for candidate in candidates)
            text += " " + _("Is it {names}?").format(names=names)
            return Match(None, text, False, tuple(candidates))
        return Match(None, text + " " + _("Say which ingredient it is, or add it."), False)
