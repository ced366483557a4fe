"""Which nutrient of the mill a heading means: its name, its standard name, or a usual abbreviation of one meaning."""

from __future__ import annotations

import re
from dataclasses import dataclass

from blendapp.domain import units
from blendapp.domain.library import Library
from blendapp.domain.list_rows import LEAVE_OUT
from blendapp.domain.mills import Asked
from blendapp.domain.names import fold
from blendapp.domain.nutrients import DRY_MATTER, KEYS, MOISTURE, Nutrient
from blendapp.domain.wording import _
from blendapp.exchange.composition_words import HeadingWords, read_heading
from blendapp.exchange.list_answers import Answers
from blendapp.exchange.list_names import match_key
from blendapp.exchange.suggestions import Suggester

LEAST_LIKENESS = 0.5

# What laboratories write for the standard nutrients, each of one meaning; common practice, no source.
_WORDS: dict[str, tuple[str, ...]] = {
    "crude protein": ("cp", "protein"),
    "crude fat": ("ee", "ether extract", "fat"),
    "neutral detergent fibre": ("ndf",),
    "acid detergent fibre": ("adf",),
    "ash": ("crude ash", "total ash"),
    "sugars": ("sugar", "total sugar", "total sugars"),
    "calcium": ("ca",),
    "total phosphorus": ("p", "phosphorus", "total p"),
    "available phosphorus": ("available p",),
    "magnesium": ("mg",),
    "potassium": ("k",),
    "sodium": ("na",),
    "chloride": ("cl",),
    "sulphur": ("s",),
    "lysine": ("lys",),
    "methionine": ("met",),
    "methionine and cystine": ("met+cys", "m+c", "methionine+cystine", "methionine+cysteine", "met and cys"),
    "threonine": ("thr",),
    "tryptophan": ("trp",),
    "total copper": ("cu", "copper"),
    "total selenium": ("se", "selenium"),
    "total zinc": ("zn", "zinc"),
    "iron": ("fe",),
    "manganese": ("mn",),
    "iodine": ("i",),
    "cobalt": ("co",),
    "vitamin A": ("vit a",),
    "vitamin D": ("vit d",),
    "vitamin E": ("vit e",),
}
# Words that may mean several of them: asked about, with these as candidates.
_SEVERAL: dict[str, tuple[str, ...]] = {
    "cf": ("crude fibre", "crude fat"),
    "fibre": ("crude fibre", "neutral detergent fibre", "acid detergent fibre"),
    "oil": ("crude fat",),
    "saa": ("methionine and cystine",),
    "sul": ("sulphur",),
}
# Keys that several different measures share: never taken for one without its name.
_LOOSE = frozenset({"energy"})
# A word that only one of two names has makes them two things: total and digestible lysine.
_QUALIFIERS = frozenset({
    "digestible", "dig", "sid", "aid", "ileal", "available", "avail", "added", "true", "net", "metabolizable",
    "metabolisable", "rumen", "bypass", "degradable", "soluble", "insoluble", "npn", "free", "gross",
})


# "Lysine, % of protein" is no part of the material.
_OF_PROTEIN = re.compile(
    r"(?:%|g/16\s?g\s*n\b|g/100\s?g)\s*(?:(?:of|in)\s+)?(?:the\s+)?(?:crude\s+)?(?:cp|protein|xp)\b|g/16\s?g\s*n\b"
)


@dataclass(frozen=True)
class NutrientMatch:
    """nutrient: None where it is not known, and reason is the question. built_in: DRY_MATTER or MOISTURE, else "".

    left_out: a person has answered that the column is nothing for the mill. choices: what may be answered. may_be:
    whether the words are those of a nutrient, if one with several meanings or one that the mill lacks.
    """

    nutrient: Nutrient | None = None
    built_in: str = ""
    left_out: bool = False
    reason: str = ""
    choices: tuple[str, ...] = ()
    may_be: bool = False

    @property
    def is_settled(self) -> bool:
        return self.nutrient is not None or bool(self.built_in) or self.left_out

    @property
    def name(self) -> str:
        """What the mill calls it; "" where it is not known."""
        return self.built_in or ("" if self.nutrient is None else self.nutrient.name)


class NutrientFinder:
    """Finds nutrients of a library by the headings that a source gives them."""

    def __init__(self, library: Library, answers: Answers) -> None:
        self.library, self.answers = library, answers
        self._by_name: dict[str, list[Nutrient]] = {}
        self._by_meaning: dict[str, list[Nutrient]] = {}
        for nutrient in library.nutrients:
            self._by_name.setdefault(_key(nutrient.name), []).append(nutrient)
            meaning = nutrient.key if nutrient.key not in _LOOSE else ""
            meaning = meaning or _MEANING.get(_key(nutrient.name), "")
            if meaning:
                self._by_meaning.setdefault(meaning, []).append(nutrient)
        self._suggester: Suggester | None = None
        self._found: dict[str, NutrientMatch] = {}

    def knows(self, text: str) -> bool:
        """Whether a text names a nutrient of the mill, dry matter or moisture; quick, for looking over many cells."""
        words = read_heading(text)
        if words.is_dry_matter or words.is_moisture:
            return True
        key = _key(words.name)
        return bool(key) and (key in self._by_name or _MEANING.get(key, "") in self._by_meaning)

    def find(self, heading: str, about: str = "") -> NutrientMatch:
        """about: what an answer calls the column, where that is not its heading."""
        key = about or heading
        if key not in self._found:
            self._found[key] = self._answered(key) or self._find(heading, read_heading(heading))
        return self._found[key]

    def _answered(self, heading: str) -> NutrientMatch | None:
        found = self.answers.find(Asked.NUTRIENT, heading)
        if found is None:
            return None
        if found.answer == LEAVE_OUT:
            return NutrientMatch(left_out=True)
        for built_in in (DRY_MATTER, MOISTURE):
            if fold(found.answer) == fold(built_in):
                return NutrientMatch(built_in=built_in)
        nutrient: Nutrient | None = self.library.named("nutrient", found.answer)
        return None if nutrient is None else NutrientMatch(nutrient)

    def _find(self, heading: str, words: HeadingWords) -> NutrientMatch:
        if words.is_dry_matter:
            return NutrientMatch(built_in=DRY_MATTER)
        for text in (words.whole, words.name):
            same = self._by_name.get(_key(text), []) if text else []
            if len(same) == 1:
                return NutrientMatch(same[0])
        if words.is_moisture:
            return NutrientMatch(built_in=MOISTURE)
        parts = _parts(heading)
        meanings = {_MEANING.get(_key(part), "") for part in parts}
        if len(meanings) == 1 and (meaning := meanings.pop()):
            alike = [
                one for one in self._by_meaning.get(meaning, [])
                if _qualifiers(one.name) - _qualifiers(meaning) == _qualifiers(words.name) - _qualifiers(meaning)
            ]
            if len(alike) == 1:
                return NutrientMatch(alike[0])
        return self._asked(heading, words)

    def _asked(self, heading: str, words: HeadingWords) -> NutrientMatch:
        """The question, with those that the words may mean and those of like names, none of another kind of unit."""
        if _OF_PROTEIN.search(re.sub(r"[()\[\]]", " ", fold(heading))):
            text = _("“{heading}” is a part of the protein; give it as a part of the material, or leave it out.")
            return NutrientMatch(reason=text.format(heading=heading), choices=(LEAVE_OUT,), may_be=True)
        key = _key(words.name)
        meanings = _SEVERAL.get(key) or tuple(filter(None, [_MEANING.get(key)]))
        likely = [one for meaning in meanings for one in self._by_meaning.get(meaning, [])]
        likely += self._by_name.get(key, [])
        if self._suggester is None:
            self._suggester = Suggester((one.name for one in self.library.nutrients), LEAST_LIKENESS)
        names = [one.name for one in likely] + self._suggester.close_names(words.name)
        if words.unit:
            family = units.concentration(words.unit).family
            names = [name for name in names if self._family(name) is family]
        names = list(dict.fromkeys(names))[:4]
        text = _("“{heading}” is no nutrient of the mill.").format(heading=heading)
        if meanings and len(names) > 1:
            listed = _(" or ").join(f"“{name}”" for name in names)
            text = _("“{heading}” may be {names}; say which, or leave it out.").format(heading=heading, names=listed)
        elif names:
            listed = _(" or ").join(f"“{name}”" for name in names)
            text += " " + _("Is it {names}? Say which, or leave it out.").format(names=listed)
        else:
            text += " " + _("Say which one it is, add it, or leave it out.")
        return NutrientMatch(reason=text, choices=(*names, LEAVE_OUT), may_be=bool(meanings or likely))

    def _family(self, name: str) -> units.Family | None:
        nutrient: Nutrient | None = self.library.named("nutrient", name)
        return None if nutrient is None else units.concentration(nutrient.unit).family


def _parts(heading: str) -> list[str]:
    """The words of a heading, and those in brackets apart where they name the thing again: "Calcium (Ca) %"."""
    whole = read_heading(heading).name
    outside = read_heading(" ".join(heading.split("(")[:1])).name
    inside = read_heading(heading[heading.find("(") + 1 : heading.rfind(")")]).name if "(" in heading else ""
    if outside and inside and _MEANING.get(_key(outside)) and _MEANING.get(_key(inside)):
        return [outside, inside]
    return [whole]


def _key(name: str) -> str:
    """A name as names are compared, both spellings of English being one."""
    return match_key(re.sub(r"sulf(?=ur)", "sulph", re.sub(r"fiber", "fibre", fold(name))))


def _qualifiers(name: str) -> frozenset[str]:
    return frozenset(re.findall(r"[a-z]+", fold(name))) & _QUALIFIERS


_MEANING: dict[str, str] = {
    _key(word): standard
    for standard in KEYS if standard not in _LOOSE
    for word in (standard, *_WORDS.get(standard, ()))
}
