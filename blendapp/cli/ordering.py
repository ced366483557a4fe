"""What a call of `sheet` asks for becomes a batch: names are looked up, and every one that is not known is told."""

from __future__ import annotations

import argparse
import datetime
from collections.abc import Sequence
from dataclasses import replace

from blendapp.domain.batches import Batch, CleanOut
from blendapp.domain.library import Library
from blendapp.domain.problems import Place, Problem, Refused
from blendapp.domain.records import Record
from blendapp.domain.wording import _
from blendapp.services.mill import Mill

_CLEAN_OUTS = {
    "physical": CleanOut.PHYSICAL, "flush": CleanOut.FLUSH, "sequence": CleanOut.SEQUENCE, "none": CleanOut.NONE,
}


def ordered(mill: Mill, given: argparse.Namespace, on: datetime.date) -> Batch:
    """The batch of a call. Raises Refused for names that are not known and as make_batch does."""
    from blendapp.services.approved import approved_batch
    from blendapp.services.batch import make_batch
    from blendapp.services.formulate import formulas_named

    (formula,) = formulas_named(mill.library, [given.formula])
    problems: list[Problem] = []
    library = mill.library
    if given.site is not None:
        site = _named(library, "site", given.site, problems)
        library = library if site is None else library.at_site(site.id)
    mixer = None if given.mixer is None else _named(library, "mixer", given.mixer, problems)
    rework = _amounts(library, "--rework", given.rework, problems)
    fixed = _amounts(library, "--fix", given.fix, problems)
    if problems:
        raise Refused(problems)
    asked = {
        "rework": rework, "fixed": fixed, "mixer_id": None if mixer is None else mixer.id,
        "previous_feed": given.previous, "clean_out": _CLEAN_OUTS.get(given.clean_out),
    }
    if given.approved:
        batch = approved_batch(library, formula.id, given.batch_kg, on, **asked)
    else:
        batch = make_batch(library, formula.id, given.batch_kg, on, mill.composition, **asked)
    return replace(batch, paper=given.paper or batch.paper, mass_unit=given.mass or batch.mass_unit)


def _named(library: Library, kind: str, name: str, problems: list[Problem]) -> Record | None:
    found = library.named(kind, name)
    if found is None:
        texts = {
            "site": _("There is no site “{name}”; the mill has: {known}."),
            "mixer": _("There is no mixer “{name}”; the mill has: {known}."),
            "ingredient": _("There is no ingredient “{name}”."),
        }
        known = ", ".join(one.name for one in library.all(kind)) or _("none")
        problems.append(Problem(texts[kind].format(name=name, known=known), Place(record=name)))
    return found


def _amounts(
    library: Library, option: str, asked: Sequence[tuple[str, float]], problems: list[Problem]
) -> dict[int, float]:
    found: dict[int, float] = {}
    for name, amount in asked:
        ingredient = _named(library, "ingredient", name, problems)
        if ingredient is not None and ingredient.id in found:
            text = _("{option} names {name} twice; give it once.")
            problems.append(Problem(text.format(option=option, name=ingredient.name)))
        elif ingredient is not None:
            found[ingredient.id] = amount
    return found
