"""Workbooks made by code, and a small mill to alter."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import openpyxl

Rows = list[list[Any]]


def write_sheets(path: Path, sheets: dict[str, Rows]) -> Path:
    """A workbook of plain cells; text that begins with = is a formula without a stored value."""
    workbook = openpyxl.Workbook()
    workbook.remove(workbook.worksheets[0])
    for name, rows in sheets.items():
        sheet = workbook.create_sheet(name)
        for row in rows:
            sheet.append(row)
    workbook.save(path)
    return path


def small_mill() -> dict[str, Rows]:
    """Two ingredients, two nutrients, one blend: nothing about it is odd."""
    return {
        "Mill": [["Item", "Value"], ["Name", "Larkwater"], ["Currency", "USD"]],
        "Nutrients": [
            ["Nutrient", "Unit", "Never negative", "Key", "Note"],
            ["Crude protein", "%", "yes", "crude protein", None],
            ["Energy", "MJ/kg", "yes", None, None],
        ],
        "Ingredients": [
            ["Ingredient", "Class", "Dry matter %", "Price", "Price per", "Basis", "Note", "Crude protein (%)",
             "Energy (MJ/kg)"],
            ["Maize", "Cereals", 87, 200, "t", "as fed", None, 8.5, 14.2],
            ["Soybean meal", "Proteins", 89, 400, "t", "as fed", None, 46, 13.1],
        ],
        "Formulas": [
            ["Formula", "Amounts", "Animal", "Stage", "Batch kg", "Admits", "Note"],
            ["Layer", "blend", "poultry", "lay", 2000, "listed", None],
        ],
        "Limits": [
            ["Formula", "Kind", "Name", "Per", "Minimum", "Maximum", "Unit", "Basis"],
            ["Layer", "ingredient", "Maize", None, None, None, None, None],
            ["Layer", "ingredient", "Soybean meal", None, 5, 40, None, None],
            ["Layer", "nutrient", "Crude protein", None, 16, None, None, None],
        ],
    }
