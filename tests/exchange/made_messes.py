"""Made price lists, each one mess or several, with the fate of every row that is not blank and the accepted prices."""

from __future__ import annotations

import datetime

from blendapp.domain.list_rows import Fate
from tests.exchange.made_lists import Rows

A, Q, R, IGNORED = Fate.ACCEPTED, Fate.QUESTION, Fate.REFUSED, Fate.IGNORED
HEAD = ["Ingredient", "Price", "Unit"]
DAY, PAST = datetime.date(2026, 3, 9), datetime.date(2026, 2, 1)

# The mill knows Maize (200 per t), Wheat (210), Soybean meal (400), Limestone and Molasses without a price.
MESSES: dict[str, tuple[Rows, list[Fate], list[float]]] = {
    # Numbers
    "decimal points and grouping commas": (
        [HEAD, ["Limestone", "1,234.50", "t"], ["Molasses", "99.5", "t"]], [IGNORED, A, A], [1234.5, 99.5]),
    "decimal commas and grouping points": (
        [HEAD, ["Limestone", "1.234,50", "t"], ["Molasses", "99,5", "t"]], [IGNORED, A, A], [1234.5, 99.5]),
    "decimal commas and grouping spaces": (
        [HEAD, ["Limestone", "1 234,50", "t"], ["Molasses", "99,5", "t"]], [IGNORED, A, A], [1234.5, 99.5]),
    "grouping apostrophes": (
        [HEAD, ["Limestone", "1'234.50", "t"], ["Molasses", "1’099.50", "t"]], [IGNORED, A, A], [1234.5, 1099.5]),
    "a column that fits both ways": (
        [HEAD, ["Limestone", "1,234", "t"], ["Molasses", "2,345", "t"]], [IGNORED, Q, Q], []),
    "one number decides for its column": (
        [HEAD, ["Limestone", "1,234", "t"], ["Molasses", "99.5", "t"]], [IGNORED, A, A], [1234, 99.5]),
    "a column that is written in both ways": (
        [HEAD, ["Limestone", "1.234,5", "t"], ["Molasses", "1,234.5", "t"]], [IGNORED, Q, Q], []),
    "numbers stored as text": ([HEAD, ["Maize", "205", "t"]], [IGNORED, A], [205]),
    "a negative in brackets": ([HEAD, ["Molasses", "(15.50)", "t"]], [IGNORED, Q], []),
    "a minus behind the number": ([HEAD, ["Molasses", "15.50-", "t"]], [IGNORED, Q], []),
    "a price of nothing": ([HEAD, ["Molasses", 0, "t"]], [IGNORED, Q], []),
    "no price in all the words for it": (
        [HEAD, ["Maize", "call", "t"], ["Wheat", "n/q", "t"], ["Soybean meal", "-", "t"],
         ["Limestone", "see note", "t"], ["Molasses", None, "t"]], [IGNORED] * 6, []),
    "two prices in one cell": ([HEAD, ["Maize", "205/210", "t"], ["Wheat", "212 or 215", "t"]], [IGNORED, Q, Q], []),
    "whole prices with a dash for the cents": (
        [HEAD, ["Maize", "205,-", "t"], ["Wheat", "€ 212.–", "t"], ["Limestone", "$44,--", "t"]], [IGNORED, A, Q, A],
        [205, 44]),
    "numbers that nobody reckons with": (
        [HEAD, ["Maize", "9" * 400, "t"], ["Wheat", 1e308, "t"], ["Limestone", 44, "0.0000001 kg bag"],
         ["Molasses", 99, "9" * 400 + " kg bag"]], [IGNORED, Q, Q, Q, Q], []),
    "a percentage for a price": ([HEAD, ["Maize", "5 %", "t"]], [IGNORED, Q], []),
    # Money
    "the mill's own sign and code": (
        [HEAD, ["Maize", "$205", "t"], ["Wheat", "212 USD", "t"], ["Limestone", "US$ 44", "t"]],
        [IGNORED, A, A, A], [205, 212, 44]),
    "another sign": ([HEAD, ["Maize", "€205", "t"], ["Wheat", "212", "t"]], [IGNORED, Q, A], [212]),
    "a column of currencies": (
        [[*HEAD, "Currency"], ["Maize", 205, "t", "USD"], ["Wheat", 200, "t", "eur"], ["Limestone", 44, "t", None]],
        [IGNORED, A, Q, A], [205, 44]),
    "cents in the heading": ([["Ingredient", "Price cts/lb"], ["Maize", 9.3]], [IGNORED, A], [205.03]),
    "cents a bushel, and pence of another country": (
        [HEAD[:2], ["Maize", "510 c/bu"], ["Wheat", "570 cents per bushel"], ["Soybean meal", "18 p/lb"]],
        [IGNORED, A, A, Q], [200.78, 209.44]),
    "dollars under a heading of cents": ([["Ingredient", "c/bu"], ["Maize", 5.1]], [IGNORED, Q], []),
    "packs of a mass and no other unit": (
        [["Item", "Pack", "Price"], ["Maize", "25 kg bag", 5.1], ["Wheat", "25-kg sack", 5.3],
         ["Limestone", "25 kg", 1.1], ["Molasses", "bag", 2], ["Soybean meal", "50 lb bag", 9]],
        [IGNORED, A, A, A, Q, A], [204, 212, 44, 396.83]),
    "packs beside a unit": (
        [["Item", "Pack", "Price $/t"], ["Maize", "25 kg bag", 205]], [IGNORED, A], [205]),
    "packs below a title with a unit": (
        [["All prices per tonne"], ["Item", "Pack", "Price"], ["Maize", "25 kg bag", 205]], [IGNORED, IGNORED, A],
        [205]),
    "a dash of any length for a price": (
        [HEAD, ["Maize", "–", "t"], ["Wheat", "—", "t"], ["Limestone", 44, "t"]], [IGNORED, IGNORED, IGNORED, A], [44]),
    "a currency in the title": ([["All prices in GBP per tonne"], HEAD[:2], ["Maize", 205]], [IGNORED, IGNORED, Q], []),
    "the mill's currency in the title": (
        [["All prices in USD per tonne"], HEAD[:2], ["Maize", 205]], [IGNORED, IGNORED, A], [205]),
    # Units
    "bushels of legal and of unknown weight": (
        [HEAD, ["Maize", 5.1, "bu"], ["Wheat", 5.7, "bushel"], ["Molasses", 5.1, "bu"]], [IGNORED, A, A, Q],
        [200.78, 209.44]),
    "bags of two weights": (
        [HEAD, ["Maize", 5.1, "25 kg bag"], ["Wheat", 4.8, "50 lb sack"]], [IGNORED, A, A], [204, 211.64]),
    "a unit beside each number": (
        [HEAD[:2], ["Maize", "205 / t"], ["Wheat", "0.212/kg"], ["Limestone", "4.40 per 100 kg"]], [IGNORED, A, A, A],
        [205, 212, 44]),
    "short, long and bare tons": (
        [HEAD, ["Maize", 190, "short ton"], ["Wheat", 215, "long ton"], ["Limestone", 44, "ton"]], [IGNORED, A, A, Q],
        [209.44, 211.6]),
    "a unit in the heading and another in the row": (
        [["Ingredient", "Price $/t", "Unit"], ["Maize", 205, "t"], ["Wheat", 212, "kg"]], [IGNORED, A, Q], [205]),
    # Names
    "names in capitals, with accents and odd spaces": (
        [HEAD, ["MAIZE", 205, "t"], ["  soybean   meal ", 410, "t"], ["Mólasses", 99, "t"]], [IGNORED, A, A, A],
        [205, 410, 99]),
    "names that are only alike": (
        [HEAD, ["Soybean meals", 410, "t"], ["Lime", 44, "t"], ["Wheat feed", 150, "t"]], [IGNORED, Q, Q, Q], []),
    "a price without a name": ([HEAD, ["Maize", 205, "t"], [None, 212, "t"]], [IGNORED, A, Q], [205]),
    "one ingredient twice, and once more in capitals": (
        [HEAD, ["Maize", 205, "t"], ["Wheat", 212, "t"], ["MAIZE", 207, "t"]], [IGNORED, Q, A, Q], [212]),
    # Rows that are no prices
    "section heads, subtotals and a footnote": (
        [HEAD, ["CEREALS"], ["Maize", 205, "t"], ["Wheat", 212, "t"], ["Average", 208.5, "t"], ["MINERALS"],
         ["Limestone", 44, "t"], ["Grand total", 461, "t"], ["* ex store, subject to being unsold"]],
        [IGNORED, IGNORED, A, A, IGNORED, IGNORED, A, IGNORED, IGNORED], [205, 212, 44]),
    "the headings again on every page": (
        [HEAD, ["Maize", 205, "t"], HEAD, ["Wheat", 212, "t"], HEAD], [IGNORED, A, IGNORED, A, IGNORED], [205, 212]),
    "a letter and no table": ([["Dear miller,"], ["prices will follow on Monday."]], [IGNORED, IGNORED], []),
    "a table of something else": ([["Week", "Rain mm"], ["10", 14], ["11", 3]], [IGNORED, Q, Q], []),
    # Freight, terms and dry matter
    "base, freight and sum": (
        [["Ingredient", "Price", "Freight", "Delivered price", "Unit"], ["Maize", 190, 15, 205, "t"],
         ["Wheat", 200, 15, 216, "t"]], [IGNORED, A, Q], [205]),
    "base and freight without a sum": (
        [["Ingredient", "Price", "Haulage", "Unit"], ["Maize", 190, 15, "t"]], [IGNORED, Q], []),
    "a price of dry matter": (
        [["Ingredient", "USD/t DM"], ["Maize", 233], ["Limestone", 44]], [IGNORED, A, Q], [205.04]),
    "a discount beside the price": (
        [[*HEAD, "Discount"], ["Maize", 205, "t", 5], ["Wheat", 212, "t", None]], [IGNORED, Q, A], [212]),
    # Changes
    "leaps up, down and by a lost decimal sign": (
        [HEAD, ["Maize", 261, "t"], ["Wheat", 140, "t"], ["Soybean meal", 4000, "t"]], [IGNORED, Q, Q, Q], []),
    "changes of what is usual": (
        [HEAD, ["Maize", 259, "t"], ["Wheat", 148, "t"], ["Soybean meal", 400, "t"]], [IGNORED, A, A, A],
        [259, 148, 400]),
    # Days
    "day first, as one row shows": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", "9/3/2026"], ["Wheat", 212, "t", "13/3/2026"]], [IGNORED, A, A],
        [205, 212]),
    "month first, as one row shows": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", "3/9/2026"], ["Wheat", 212, "t", "3/13/2026"]], [IGNORED, A, A],
        [205, 212]),
    "days that may be months": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", "9/3/2026"], ["Wheat", 212, "t", "10/3/2026"]],
        [IGNORED, Q, Q], []),
    "days in words": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", "9 March 2026"], ["Wheat", 212, "t", "Mar 9, 2026"]],
        [IGNORED, A, A], [205, 212]),
    "one price of the list has expired": (
        [[*HEAD, "Valid to"], ["Maize", 205, "t", PAST], ["Wheat", 212, "t", DAY]], [IGNORED, Q, A], [212]),
    "the whole list has expired": (
        [[*HEAD, "Valid to"], ["Maize", 205, "t", PAST], ["Wheat", 212, "t", PAST]], [IGNORED, Q, Q], []),
    "prices of two days to come": (
        [[*HEAD, "Valid from"], ["Maize", 205, "t", DAY], ["Maize", 207, "t", datetime.date(2026, 4, 9)]],
        [IGNORED, A, A], [205, 207]),
    # Several at once
    "a broker's list with everything": (
        [["Larkwater Grain Ltd"], ["Week 10", None, "all prices USD per short ton ex store"], [],
         [None, "Price", None, "Valid"], ["Commodity", "last week", "this week", "from"],
         ["Yellow goods"], ["Maize", 180, "186,50", "9.3.2026"], ["Wheat", 190, "call", "9.3.2026"],
         ["Soy bean meal", 370, "372,00", "16.3.2026"], [], ["E. & O. E."]],
        [IGNORED, IGNORED, IGNORED, IGNORED, IGNORED, A, IGNORED, A, IGNORED], [205.58, 410.06]),
}
