"""Makes the sample mill, its price list and its laboratory's list, as workbooks, from the tables beside this script.

    python sample_data/make_sample.py [FOLDER]

The mill, its people, sites, suppliers, lots, prices, limits, premixes and drug are invented. In the composition tables
each cell is a value and the mark of its source in sources.csv; a blank cell is unknown, and "0 n" is a known absence.
"""

from __future__ import annotations

import csv
import datetime
import sys
from pathlib import Path

from openpyxl import Workbook
from openpyxl.styles import Font
from openpyxl.worksheet.worksheet import Worksheet

Row = list[object]

HERE = Path(__file__).resolve().parent
TABLES = HERE / "tables"
COMPOSITIONS = ("cereals", "byproducts", "proteins", "additives", "forages", "premixes")
LIMITS = ("poultry", "pig", "cattle", "sheep_horse")

# Sources give these per kg of dry matter, whatever the basis of the rest of the row.
PER_DRY_MATTER = ("NEL cattle", "ME ruminant", "DE horse")

# Headings of the columns that hold days.
DAYS = ("Received", "Date")

# mEq in 1 g, from the atomic masses 22.990, 39.098 and 35.453; chloride is an anion and counts against the others.
MEQ_PER_G = {"Sodium": 1000 / 22.990, "Potassium": 1000 / 39.098, "Chloride": -1000 / 35.453}

MILL: list[Row] = [
    ["Name", "Otterfold Mill"],
    ["Currency", "USD"],
    ["Ton means", None],
    ["Cwt means", "100 lb"],
    ["Site", "Larkwater"],
    ["Sheets in", "kg"],
    ["Paper", "A4"],
]

# Prices per these masses as prices per tonne (1 lb is 0.45359237 kg).
PER_T = {"t": 1.0, "cwt": 1000 / 45.359237, "kg": 1000.0}

ABOUT: list[Row] = [
    ["Otterfold Mill at Larkwater is invented, with its people, plant, suppliers, lots, prices, stock, limits, premixes"
     " and drug."],
    ["Mixing times and settings, tolerances, the loss and the dry matter of pellets: common practice, no source."],
    ["No feed should be made from these formulas: a qualified nutritionist must review any ration before it is fed."],
    ["Composition: see the columns Origin and Source of the sheet Values; Ingredients repeats the same values."],
    ["Values from named handbooks are from memory and may differ from the printed tables."],
    ["Values of one material come from several sources, so that its parts need not add up to its dry matter."],
    ["A blank value is unknown; 0 is a known absence."],
    ["Field peas have no price: they stay out of every mix until one is quoted."],
    ["Cane molasses has no analysis of copper, which matters in feed for sheep."],
    ["Nutritionist: Wren Abernook. Miller: Tobias Larch. Both invented."],
]


def table(name: str) -> list[dict[str, str]]:
    """The rows of one table as texts by heading."""
    with (TABLES / f"{name}.csv").open(encoding="utf-8", newline="") as file:
        return list(csv.DictReader(file))


def cell(text: str) -> object:
    """A number where the text is one, None where it is blank, else the text."""
    if not text:
        return None
    try:
        return whole(float(text))
    except ValueError:
        return text


def whole(number: float) -> float | int:
    """The number without a decimal part that says nothing."""
    return int(number) if number.is_integer() else number


def compositions() -> dict[str, dict[str, tuple[float, str]]]:
    """By ingredient and nutrient: the value, in the unit of nutrients.csv, and the mark of its source."""
    found: dict[str, dict[str, tuple[float, str]]] = {}
    for name in COMPOSITIONS:
        for row in table(f"composition_{name}"):
            nutrient = row.pop("Nutrient")
            for ingredient, text in row.items():
                values = found.setdefault(ingredient, {})
                if text:
                    amount, mark = text.split()
                    values[nutrient] = (float(amount), mark)
    for values in found.values():
        if all(name in values for name in MEQ_PER_G):
            balance = sum(values[name][0] * 10 * factor for name, factor in MEQ_PER_G.items())
            values["Electrolyte balance"] = (round(balance, 1) + 0.0, "x")
    for name, shares in made().items():
        known = set.intersection(*(set(found[part]) for part in shares))
        found[name] = {
            nutrient: (six(sum(share * found[part][nutrient][0] for part, share in shares.items())), "f")
            for nutrient in next(iter(found.values())) if nutrient in known
        }
    return found


def made() -> dict[str, dict[str, float]]:
    """By ingredient that a formula makes: the fractions of its parts, which the limits of the formula fix."""
    limits = [row for name in LIMITS for row in table(f"limits_{name}")]
    return {
        row["Ingredient"]: {
            limit["Name"]: float(limit["Minimum"]) / 100 for limit in limits
            if limit["Formula"] == row["Made by formula"]
        }
        for row in table("ingredients") if row["Made by formula"]
    }


def six(number: float) -> float:
    """To six figures."""
    return float(f"{number:.6g}")


def ingredient_table() -> list[dict[str, str]]:
    """The rows of ingredients.csv, those that a formula makes with the dry matter and the price of their parts."""
    rows = table("ingredients")
    by_name = {row["Ingredient"]: row for row in rows}
    for name, shares in made().items():
        dry = sum(share * float(by_name[part]["Dry matter %"]) for part, share in shares.items())
        price = sum(
            share * float(by_name[part]["Price"]) * PER_T[by_name[part]["Price per"]] for part, share in shares.items()
        )
        by_name[name] |= {"Dry matter %": str(six(dry)), "Price": str(round(price, 2)), "Price per": "t"}
    return rows


def ingredient_rows() -> list[Row]:
    """The sheet Ingredients: identity and price, then one column per nutrient."""
    units = {row["Nutrient"]: row["Unit"] for row in table("nutrients")}
    ingredients, contents = ingredient_table(), compositions()
    if strangers := set(contents) - {row["Ingredient"] for row in ingredients}:
        raise SystemExit(f"ingredients.csv lacks these of the composition tables: {sorted(strangers)}")
    columns = [f"{name} ({unit}{' DM' if name in PER_DRY_MATTER else ''})" for name, unit in units.items()]
    rows: list[Row] = [[*ingredients[0], *columns]]
    for row in ingredients:
        values = contents[row["Ingredient"]]
        rows.append([*map(cell, row.values()), *(whole(values[name][0]) if name in values else None for name in units)])
    return rows


def value_rows() -> list[Row]:
    """The sheet Values: every known value of composition with its source."""
    sources = {row["Mark"]: row for row in table("sources")}
    measured = {(row["Ingredient"], row["Nutrient"]): row for row in table("measured")}
    contents = compositions()
    rows: list[Row] = [["Ingredient", "Nutrient", "Value", "Unit", "Basis", "Origin", "Source", "Date", "n", "SD"]]
    for ingredient in table("ingredients"):
        for nutrient in table("nutrients"):
            key = (ingredient["Ingredient"], nutrient["Nutrient"])
            if key[1] not in contents[key[0]]:
                continue
            amount, mark = contents[key[0]][key[1]]
            basis = "dry matter" if key[1] in PER_DRY_MATTER else ingredient["Basis"]
            row: Row = [*key, whole(amount), nutrient["Unit"], basis, sources[mark]["Origin"], sources[mark]["Source"]]
            if analysis := measured.pop(key, None):
                row += [day(analysis["Date"]), cell(analysis["n"]), cell(analysis["SD"])]
            rows.append(row)
    if measured:
        raise SystemExit(f"measured.csv has analyses of values that the composition tables lack: {sorted(measured)}")
    return rows


def plain_rows(*names: str) -> list[Row]:
    """Tables of one shape, one under the other below one row of headings."""
    tables = [table(name) for name in names]
    return [
        list(tables[0][0]),
        *([day(text) if name in DAYS else cell(text) for name, text in row.items()] for rows in tables for row in rows),
    ]


def day(text: str) -> datetime.date | None:
    return datetime.date.fromisoformat(text) if text else None


def plant_rows(kind: str, *columns: str) -> list[Row]:
    """The sheet Scales or Mixers."""
    chosen = [row for row in table("plant") if row["Kind"] == kind]
    return [[kind, *columns], *([row["Name"], *(cell(row[name]) for name in columns)] for row in chosen)]


def write_sheet(sheet: Worksheet, rows: list[Row]) -> None:
    """Writes the rows below bold headings that stay in view, with columns as wide as they need."""
    for row in rows:
        sheet.append(row)
    for heading in sheet[1]:
        heading.font = Font(bold=True)
        longest = max(len(str(row[heading.column - 1] or "")) for row in rows if len(row) >= heading.column)
        sheet.column_dimensions[heading.column_letter].width = min(max(longest + 2, 8), 44)
    sheet.freeze_panes = "B2"


def mill_workbook() -> Workbook:
    """The exchange workbook of the sample mill."""
    book = Workbook()
    book.remove(book.active)
    sheets: dict[str, list[Row]] = {
        "Mill": [["Item", "Value"], *MILL],
        "Nutrients": plain_rows("nutrients"),
        "Ingredients": ingredient_rows(),
        "Values": value_rows(),
        "Scales": plant_rows("Scale", "Step kg", "Least kg", "Greatest kg", "Tolerance %", "Hand add", "Step l",
                             "Least l", "Greatest l", "Site"),
        "Mixers": plant_rows("Mixer", "Least kg", "Greatest kg", "Site"),
        "Formulas": plain_rows("formulas"),
        "Limits": plain_rows(*(f"limits_{name}" for name in LIMITS)),
        "Sites": plain_rows("sites"),
        "Suppliers": plain_rows("suppliers"),
        "Lots": plain_rows("lots"),
        "Lot values": plain_rows("lot_values"),
        "Bins": plain_rows("bins"),
        "Steps": plain_rows("steps"),
        "About": [["About this mill"], *ABOUT],
    }
    for name, rows in sheets.items():
        write_sheet(book.create_sheet(name), rows)
    return book


def price_workbook() -> Workbook:
    """A supplier's list with a footnote, a price on call, an unknown name and a bare ton among plain rows."""
    book = Workbook()
    book.active.title = "Prices"
    write_sheet(book.active, plain_rows("price_list"))
    return book


def laboratory_workbook() -> Workbook:
    """A laboratory's list: samples, one far off what is in use, a name that is not known, amounts that are none."""
    book = Workbook()
    book.active.title = "Results"
    write_sheet(book.active, plain_rows("laboratory"))
    return book


def main(folder: Path = HERE) -> None:
    """Writes the three workbooks into the folder."""
    mill_workbook().save(folder / "mill.xlsx")
    price_workbook().save(folder / "price_list.xlsx")
    laboratory_workbook().save(folder / "laboratory.xlsx")


if __name__ == "__main__":
    main(*map(Path, sys.argv[1:2]))
