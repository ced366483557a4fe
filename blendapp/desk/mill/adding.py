"""What adding a row to each of the mill's tables does. No Qt."""

from __future__ import annotations

from collections.abc import Callable
from typing import TYPE_CHECKING

from blendapp.domain.mills import Person
from blendapp.domain.plant import Lot
from blendapp.domain.problems import Refused
from blendapp.domain.records import added
from blendapp.domain.wording import _
from blendapp.services import edits, mixing, plant
from blendapp.services.mill import Edit, Mill

if TYPE_CHECKING:
    from blendapp.desk.work import Work

# A new step of a scale or a meter, until the person types their own.
NEW_STEP_KG, NEW_STEP_L = 1.0, 0.1


def adder(work: Work, table: str, kind: str, after: int | None) -> Callable[[Mill], Edit]:
    """The edit that adds to a table (see MillPane.tables) a record of a kind under a free name.

    What has a site stands where the mill works. after: the position of a new step, None is the end.
    """
    words = {
        "site": _("New site"), "supplier": _("New supplier"), "scale": _("New scale"), "meter": _("New liquid meter"),
        "mixer": _("New mixer"), "bin": _("New bin"), "lot": _("New lot"), "nutrient": _("New nutrient"),
        "person": _("New person"),
    }.get(table, _("New step"))
    name = words if kind == "mixing_step" else edits.free_name(work.library, kind, words)
    here = work.library.mill.site_id
    jobs: dict[str, Callable[[Mill], Edit]] = {
        "site": lambda mill: plant.add_site(mill, name),
        "supplier": lambda mill: plant.add_supplier(mill, name),
        "scale": lambda mill: plant.add_scale(mill, name, NEW_STEP_KG, here),
        "meter": lambda mill: plant.add_meter(mill, name, NEW_STEP_L, here),
        "mixer": lambda mill: plant.add_mixer(mill, name, here),
        "bin": lambda mill: plant.add_bin(mill, name, site_id=here),
        "lot": lambda mill: plant.add_lot(mill, _lot_of(mill), name, received=work.on),
        "nutrient": lambda mill: edits.add_nutrient(mill, name),
        "person": lambda mill: mill.apply(
            _("Add {name}").format(name=name), [added(Person(mill.new_id("person"), name))]),
        "general step": lambda mill: mixing.add_step(mill, None, name, at=after),
        "own step": lambda mill: mixing.add_step(mill, work.formula_id, name, at=after),
    }
    return jobs[table]


def _lot_of(mill: Mill) -> int:
    """The ingredient of a new lot, until the person types another: that of the lot before. Raises Refused."""
    lots: list[Lot] = mill.library.all("lot")
    first = next(iter(mill.library.ingredients), None)
    if first is None:
        raise Refused(_("The mill has no ingredient yet of which a lot could be."))
    return lots[-1].ingredient_id if lots else first.id
