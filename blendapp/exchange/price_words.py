"""Currencies and units in the words of a price list: in a heading, in a cell of its own, or beside the number."""

from __future__ import annotations

import re
from dataclasses import dataclass
from functools import lru_cache

from blendapp.exchange.price_units import is_price_unit, plain_words

# Codes of ISO 4217 that price lists of feed may carry; from memory.
CODES = frozenset({
    "USD", "EUR", "GBP", "CAD", "AUD", "NZD", "JPY", "CNY", "INR", "BRL", "ARS", "CLP", "COP", "MXN", "PEN",
    "UYU", "PYG", "BOB", "ZAR", "KES", "NGN", "GHS", "TZS", "UGX", "ETB", "EGP", "MAD", "TND", "TRY", "ILS",
    "SAR", "AED", "QAR", "KWD", "IRR", "PKR", "BDT", "LKR", "NPR", "THB", "VND", "IDR", "MYR", "PHP", "SGD",
    "HKD", "KRW", "TWD", "RUB", "UAH", "KZT", "BYN", "PLN", "CZK", "HUF", "RON", "BGN", "HRK", "RSD", "SEK",
    "NOK", "DKK", "ISK", "CHF",
})
_DOLLARS = frozenset({"USD", "CAD", "AUD", "NZD", "MXN", "ARS", "CLP", "COP", "SGD", "HKD", "TWD"})
_CROWNS = frozenset({"SEK", "NOK", "DKK", "ISK", "CZK"})
# Signs and what they may stand for; longer ones first, since US$ holds $.
_SIGNS: tuple[tuple[str, frozenset[str]], ...] = (
    ("US$", frozenset({"USD"})), ("CA$", frozenset({"CAD"})), ("AU$", frozenset({"AUD"})), ("NZ$", frozenset({"NZD"})),
    ("C$", frozenset({"CAD"})), ("A$", frozenset({"AUD"})), ("R$", frozenset({"BRL"})), ("$", _DOLLARS),
    ("€", frozenset({"EUR"})), ("£", frozenset({"GBP", "EGP"})), ("¥", frozenset({"JPY", "CNY"})),
    ("₹", frozenset({"INR"})), ("₽", frozenset({"RUB"})), ("₺", frozenset({"TRY"})), ("₴", frozenset({"UAH"})),
    ("₩", frozenset({"KRW"})), ("₦", frozenset({"NGN"})), ("₫", frozenset({"VND"})), ("฿", frozenset({"THB"})),
    ("zł", frozenset({"PLN"})), ("Kč", frozenset({"CZK"})),
)
_WORDS: dict[str, frozenset[str]] = {
    "euro": frozenset({"EUR"}), "euros": frozenset({"EUR"}), "dollar": _DOLLARS, "dollars": _DOLLARS,
    "sterling": frozenset({"GBP"}), "kr": _CROWNS, "fr": frozenset({"CHF"}), "sfr": frozenset({"CHF"}),
}
_CENTS = re.compile(r"[¢]|\b(?:us\s*)?(?:cents?|cts?|pence)\b|(?<![\w])(?:c|p)\s*(?=/|per\b)", re.IGNORECASE)
# Whose hundredths are called so; from memory.
_WITH_CENTS = frozenset({"USD", "CAD", "AUD", "NZD", "EUR", "ZAR", "SGD", "HKD", "KES"})
_WITH_PENCE = frozenset({"GBP"})
_AFTER_PER = re.compile(r"(?:/|\bper\b)\s*([^,;]+)", re.IGNORECASE)
_WORD = re.compile(r"[A-Za-zÀ-ž$€£¥₹₽₺₴₩₦₫฿]+")


@dataclass(frozen=True)
class Money:
    """What words say about money. currencies: codes that they may mean, None if they name none; sign: as written.

    cents: they speak of hundredths. pence: and call them pence.
    """

    currencies: frozenset[str] | None = None
    sign: str = ""
    cents: bool = False
    pence: bool = False

    def are_hundredths_of(self, currency: str) -> bool:
        """Whether nobody calls hundredths of another currency so in a list for a mill that reckons in that one."""
        return self.cents and currency in (_WITH_PENCE if self.pence else _WITH_CENTS)

    def is_foreign(self, currency: str) -> bool:
        """Whether the words name a currency and it cannot be that one."""
        return self.currencies is not None and currency not in self.currencies


NO_MONEY = Money()


@dataclass(frozen=True)
class Words:
    """Words with their money and mass told apart. unit: as written, "" if none; rest: what is neither.

    dry: whether they say that the price is for dry matter; as_fed: that it is not. at_dry: a share of dry matter that
    they say beside a price, "85 % DM", which leaves open what the price is for.
    """

    money: Money
    unit: str
    rest: str
    dry: bool = False
    as_fed: bool = False
    at_dry: str = ""


NO_WORDS = Words(NO_MONEY, "", "")
# "88 % dry matter" names the goods, not what the price is for.
_DRY = re.compile(
    r"(?<![%\w])(?<!% )(?:(?:on|in|of)\s+(?:a\s+)?)?(?:dry[ -]?(?:matter|basis|weight)|dm)(?:\s+basis)?\b",
    re.IGNORECASE,
)

_AS_FED = re.compile(r"\bas[ -](?:fed|received|is)\b|\b(?:fresh|wet)[ -](?:weight|matter|basis)\b", re.IGNORECASE)
_AT_DRY = re.compile(
    r"\b(?:at|on|basis)\s+(?:an?\s+)?[0-9]+(?:[.,][0-9]+)? ?% ?(?:dm\b|dry[ -]?matter\b)", re.IGNORECASE
)
# What an analysis is on dry matter says nothing of the price.
_ANALYSIS = re.compile(
    r"\b(?:analys\w+|protein|fib(?:re|er)|ash|oil|fat|starch|sugars?|energy|ndf|adf|moisture|content|nutrients?)\b",
    re.IGNORECASE,
)


def split_dry(text: str) -> tuple[bool, str]:
    """Whether words speak of dry matter, and the words without it."""
    found = _DRY.search(text)
    return (True, text[: found.start()] + " " + text[found.end() :]) if found else (False, text)


def split_money(text: str) -> tuple[Money, str]:
    """The money in words, and the words without it."""
    named = _CENTS.search(text)
    cents, pence = named is not None, named is not None and named[0].strip().casefold().startswith("p")
    rest = _CENTS.sub(" ", text)
    for sign, codes in _SIGNS:
        if sign in rest:
            code = _code_in(rest)
            named_codes = (code and frozenset({code})) or codes
            return Money(named_codes, sign, cents, pence), _without_code(rest.replace(sign, " "))
    code = _code_in(rest)
    if code:
        return Money(frozenset({code}), code, cents, pence), _without_code(rest)
    for word in _WORD.findall(rest):
        if word.casefold() in _WORDS:
            found = _WORDS[word.casefold()]
            return Money(found, word, cents, pence), re.sub(rf"\b{re.escape(word)}\b\.?", " ", rest)
    return Money(cents=cents, pence=pence), rest


def _code_in(text: str) -> str:
    return next((word for word in re.findall(r"\b[A-Z]{3}\b", text) if word in CODES), "")


def _without_code(text: str) -> str:
    code = _code_in(text)
    return re.sub(rf"\b{code}\b", " ", text) if code else text


@lru_cache(1024)
def read_unit_words(text: str) -> Words:
    """The words of a cell that holds a unit, or of what stands beside a number: "USD / short ton"."""
    dry, text = split_dry(text)
    as_fed = _AS_FED.search(text) is not None
    money, rest = split_money(_AS_FED.sub(" ", text))
    plain = plain_words(rest)
    if not plain:
        return Words(money, "", "", dry, as_fed)
    if is_price_unit(plain):
        return Words(money, _tidy(rest), "", dry, as_fed)
    return Words(money, "", _tidy(rest), dry, as_fed)


def read_heading_words(text: str) -> Words:
    """The words of a heading over prices: "Price USD/t", "$ per short ton", "Price (EUR/100 kg)".

    A mass that is named but not known is left in `rest` behind a slash.
    """
    at_dry = _AT_DRY.search(text)
    more = bool(_AS_FED.search(text)), at_dry[0] if at_dry and re.search(r"/|\bper\b|\bprices?\b", text, re.I) else ""
    spoken = bool(_ANALYSIS.search(text))
    dry, text = split_dry(text)
    dry = dry and not spoken
    money, rest = split_money(text)
    unknown = ""
    for found in _AFTER_PER.finditer(rest):
        words = re.split(r"[()\[\]]", found[1])[0].split()
        for count in range(len(words), 0, -1):
            if is_price_unit(" ".join(words[:count])):
                return Words(money, " ".join(words[:count]), rest, dry, *more)
        if words and words[0].casefold() not in ("unit", "uom"):
            unknown = "/" + " ".join(words)
    for inside in re.findall(r"[(\[]([^()\[\]]*)[)\]]", rest):
        if is_price_unit(inside):
            return Words(money, _tidy(inside), rest, dry, *more)
    return Words(money, "", unknown, dry, *more)


def _tidy(text: str) -> str:
    return " ".join(re.sub(r"^\s*(?:/|per\b)", "", text.strip(), flags=re.IGNORECASE).split()).strip("()[] ")


@lru_cache(1024)
def words_of_format(number_format: str) -> Words:
    """What a number format prints beside the number: a currency, a mass, "DM"; for example [$€-2] #,##0.00" /t"."""
    money = money_of_format(number_format)
    first = number_format.partition(";")[0]
    printed = [read_unit_words(text) for text in re.findall(r'"([^"]*)"', first)]
    unit = next((words.unit for words in printed if words.unit), "")
    return Words(money, unit, "", any(words.dry for words in printed))


def money_of_format(number_format: str) -> Money:
    """The currency that a number format shows beside the number, for example [$€-2] #,##0.00."""
    first = number_format.partition(";")[0]
    named = re.findall(r"\[\$([^\]-]*)(?:-[0-9A-Fa-f]+)?\]", first) + re.findall(r'"([^"]*)"', first)
    plain = re.sub(r'\[[^\]]*\]|"[^"]*"', "", first).replace("\\", "")
    signs = [sign for sign, _codes in _SIGNS if sign in plain][:1]
    return split_money(" ".join([*named, *signs]))[0] if named or signs else NO_MONEY
