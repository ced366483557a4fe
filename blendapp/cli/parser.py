"""The grammar of the commands, with an example in the help of each."""

from __future__ import annotations

import argparse
import math
from collections.abc import Callable
from typing import NoReturn

from blendapp.domain.cautions import general_caution
from blendapp.domain.wording import _


class CallFault(Exception):
    """A call that does not fit the grammar, in one sentence."""


class _Parser(argparse.ArgumentParser):
    def error(self, message: str) -> NoReturn:
        text = _("{command}: {message}; see {command} --help.")
        raise CallFault(text.format(command=self.prog, message=message))


def _percent(text: str) -> float:
    value = _number(text)
    if value < 0:
        raise argparse.ArgumentTypeError(_("“{text}” is below 0; give 0 or more").format(text=text))
    return value


def _mass(text: str) -> float:
    value = _number(text)
    if value <= 0:
        raise argparse.ArgumentTypeError(_("“{text}” is not above 0; give a mass in kg").format(text=text))
    return value


def _number(text: str) -> float:
    try:
        value = float(text)
    except ValueError:
        value = math.nan
    if not math.isfinite(value):
        raise argparse.ArgumentTypeError(_("“{text}” is not a number; write it like 0.5").format(text=text))
    return value


def make_parser() -> argparse.ArgumentParser:
    """The parser of every command; parse_args raises CallFault instead of leaving."""
    parser = _Parser(
        prog="blendapp",
        description=_("Least-cost feed formulas, prices and batch sheets. Alone, or with a mill file, a window opens."),
        epilog=general_caution(),
        allow_abbrev=False,
    )
    commands = parser.add_subparsers(dest="command", required=True, parser_class=_Parser, metavar=_("COMMAND"))

    new = _command(commands, "new", _("make a mill file"), "blendapp new valley.mill --from valley.xlsx")
    new.add_argument("mill", metavar="MILL", help=_("the file to make; it must not exist"))
    new.add_argument("--from", dest="workbook", metavar="WORKBOOK", help=_("fill it from an exchange workbook"))

    formulate = _command(
        commands, "formulate", _("find the least-cost mix of formulas"), 'blendapp formulate valley.mill "Layer peak"'
    )
    formulate.add_argument("mill", metavar="MILL")
    formulate.add_argument("formulas", metavar="FORMULA", nargs="*", help=_("names of formulas; all, if none is given"))
    formulate.add_argument(
        "--near", type=_percent, default=0.5, metavar="PERCENT",
        help=_("near-optimal ranges: over all mixes at most this much dearer (0.5 unless said)"),
    )
    formulate.add_argument("--prove", action="store_true", help=_("prove each optimum in exact fractions as well"))

    prices = _command(
        commands, "prices", _("read a price list and show what becomes of each row"),
        "blendapp prices valley.mill monday.xlsx --apply --effect effect.xlsx",
    )
    prices.add_argument("mill", metavar="MILL")
    prices.add_argument("list", metavar="LIST", help=_("a workbook or a delimited text"))
    prices.add_argument("--apply", action="store_true", help=_("record every accepted row"))
    prices.add_argument("--effect", metavar="FILE", help=_("write what the prices do to every formula: .xlsx or .csv"))
    _of_a_list(prices)
    prices.add_argument("--supplier", metavar="NAME", help=_("whose prices they are; remembered for the source"))
    prices.add_argument("--site", metavar="NAME", help=_("for which site they hold; remembered for the source"))

    composition = _command(
        commands, "composition", _("read a list of analyses and show what becomes of each sample"),
        "blendapp composition valley.mill laboratory.xlsx --apply",
    )
    composition.add_argument("mill", metavar="MILL")
    composition.add_argument("list", metavar="LIST", help=_("a workbook or a delimited text, one row a sample"))
    composition.add_argument(
        "--apply", action="store_true", help=_("record every accepted sample, and their means as the composition")
    )
    _of_a_list(composition)

    lists = _command(
        commands, "lists", _("show the lists that were applied, of prices and of analyses, or one of them"),
        "blendapp lists valley.mill 7 --roll-back",
    )
    lists.add_argument("mill", metavar="MILL")
    lists.add_argument("number", metavar="NUMBER", nargs="?", type=int, help=_("show the rows of this one"))
    lists.add_argument("--roll-back", action="store_true", help=_("withdraw what that list brought"))

    sheet = _command(
        commands, "sheet", _("make the batches of an order and their sheet"),
        'blendapp sheet valley.mill "Layer peak" --batch-kg 2000 -o layer.pdf --mixer "Mixer 1" --rework "Fines=2"',
    )
    sheet.add_argument("mill", metavar="MILL")
    sheet.add_argument("formula", metavar="FORMULA")
    sheet.add_argument("--batch-kg", type=_mass, required=True, metavar="KG", help=_("mass of the order"))
    sheet.add_argument("-o", dest="pdf", required=True, metavar="PDF", help=_("the sheet to write"))
    sheet.add_argument(
        "--accept", metavar="REASON", help=_("why limits that the weighing breaks, or no clean-out, are accepted")
    )
    sheet.add_argument("--by", metavar="NAME", help=_("who accepts them; a person of the mill where it has any"))
    _of_a_batch(sheet)

    export = _command(
        commands, "export", _("write the exchange workbook"), "blendapp export valley.mill valley.xlsx"
    )
    export.add_argument("mill", metavar="MILL")
    export.add_argument("workbook", metavar="WORKBOOK")
    return parser


def _of_a_batch(sheet: argparse.ArgumentParser) -> None:
    """What may be said of a batch besides its mass."""
    sheet.add_argument(
        "--approved", action="store_true", help=_("the approved version in its approved proportions, not the draft")
    )
    sheet.add_argument("--site", metavar="NAME", help=_("where it is made; else where the mill works"))
    sheet.add_argument("--mixer", metavar="NAME", help=_("the mixer to use; else the smallest that takes the batch"))
    sheet.add_argument(
        "--rework", type=_share_of, action="append", default=[], metavar="NAME=PERCENT",
        help=_("what comes back into the batch, in percent of it; may be given several times"),
    )
    sheet.add_argument(
        "--fix", type=_mass_of, action="append", default=[], metavar="NAME=KG",
        help=_("the mass of a line of one batch; the rest is made around it; may be given several times"),
    )
    sheet.add_argument(
        "--clean-out", choices=("physical", "flush", "sequence", "none"), metavar="HOW",
        help=_("what is done to the mixer before: physical, flush, sequence or none"),
    )
    sheet.add_argument(
        "--previous", metavar="TEXT", help=_("what went through the mixer before; else by its last sheet")
    )
    sheet.add_argument("--paper", choices=("A4", "letter"), metavar="SIZE", help=_("A4 or letter; else the mill's own"))
    sheet.add_argument("--mass", choices=("kg", "lb"), metavar="UNIT", help=_("kg or lb on paper; else the mill's own"))
    sheet.add_argument(
        "--page", choices=("sheet", "master", "blank"), default="sheet", metavar="PAGE",
        help=_("sheet unless said, master (formula record) or blank (record to fill in); only a sheet takes a number"),
    )


def _share_of(text: str) -> tuple[str, float]:
    return _of_name(text, _percent)


def _mass_of(text: str) -> tuple[str, float]:
    return _of_name(text, _fixed_mass)


def _fixed_mass(text: str) -> float:
    value = _number(text)
    if value < 0:
        raise argparse.ArgumentTypeError(_("“{text}” is below 0; give a mass in kg").format(text=text))
    return value


def _of_name(text: str, read: Callable[[str], float]) -> tuple[str, float]:
    """An ingredient's name, which may itself hold "=", and a number."""
    name, sign, number = text.rpartition("=")
    if not sign or not name.strip():
        raise argparse.ArgumentTypeError(_("“{text}” names nothing; write it like Fines=2").format(text=text))
    return name.strip(), read(number)


def _of_a_list(command: argparse.ArgumentParser) -> None:
    command.add_argument("--sheet", metavar="NAME", help=_("read this sheet only; else every visible one"))
    command.add_argument(
        "--source", default="", metavar="NAME", help=_("whom it is from; else as its name, title or folder tell")
    )
    command.add_argument(
        "--answer", action="append", default=[], metavar="QUESTION=ANSWER",
        help=_("answer a question as the list shows it, such as \"unit: ton=short ton\"; may be given several times"),
    )


def _command(
    commands: argparse._SubParsersAction[_Parser], name: str, what: str, example: str
) -> argparse.ArgumentParser:
    made = commands.add_parser(
        name, help=what, description=what[0].upper() + what[1:] + ".", allow_abbrev=False,
        epilog=_("Example: {example}").format(example=example),
    )
    made.add_argument("--json", action="store_true", help=_("print one JSON object and nothing else"))
    return made
