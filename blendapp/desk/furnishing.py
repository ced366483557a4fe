"""Plant for the pictures: what the sample mill's workbook cannot hold yet, entered as a person would enter it."""

from __future__ import annotations

import datetime
from functools import partial

from blendapp.desk.work import Work
from blendapp.services import edits, mixing, plant


def furnish(work: Work) -> None:
    """Give the open mill two sites, a liquid meter, bins with lots, suppliers and steps; only once."""
    library = work.library
    if library.records["bin"]:
        return
    work.do(lambda mill: plant.add_site(mill, "Riverside"))
    work.do(lambda mill: plant.add_site(mill, "Hill yard"))
    work.do(lambda mill: plant.add_supplier(mill, "Marsh & Sons", "grain, from the farm"))
    work.do(lambda mill: plant.add_supplier(mill, "North Quay Meals"))
    work.do(lambda mill: plant.add_meter(mill, "Oil meter", 0.5))
    river, hill = (one.id for one in library.all("site"))
    meter = library.named("scale", "Oil meter")
    assert meter is not None
    work.do(lambda mill: edits.change(mill, meter, least_l=1.0, greatest_l=250.0))
    for at, scale in enumerate(library.scales):
        if not scale.by_volume:
            work.do(partial(edits.change, record=scale, site_id=hill if at == 2 else river))
    oil = library.named("ingredient", "Soya oil")
    if oil is not None:
        work.do(lambda mill: edits.change(mill, oil, scale_id=meter.id, density_kg_per_l=0.92))
    day = datetime.date(2026, 11, 23)
    names = [one.name for one in library.ingredients]
    for at, name in enumerate(names[:6]):
        found = library.named("ingredient", name)
        assert found is not None
        work.do(partial(
            plant.add_lot, ingredient_id=found.id, name=f"{26000 + 17 * at}", received=day + datetime.timedelta(at),
            mass_kg=24000.0 + 500 * at))
    lots = {one.ingredient_id: one for one in library.all("lot")}
    for at, name in enumerate([*names[:6], names[0]]):
        found = library.named("ingredient", name)
        assert found is not None
        lot = lots.get(found.id)
        work.do(partial(
            plant.add_bin, name=f"Bin {at + 1}", ingredient_id=found.id,
            lot_id=None if lot is None or at % 3 == 2 else lot.id, site_id=river))
    for text, minutes, setting in (
        ("Weigh the coarse materials into the mixer", None, ""),
        ("Mix dry", 2.0, "28 rpm"), ("Add the hand-adds through the hatch", None, ""),
        ("Dose the oil", 1.5, "nozzle 3"), ("Mix", 4.0, "28 rpm"),
        ("Empty, and look whether the mixer is empty", 1.0, ""),
    ):
        work.do(partial(mixing.add_step, formula_id=None, text=text, minutes=minutes, setting=setting))
