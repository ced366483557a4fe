"""A batch made at a site where the scales that its ingredients have do not stand."""

from __future__ import annotations

from typing import Any

import pytest

from blendapp.domain.batches import Batch
from blendapp.domain.library import Library
from blendapp.domain.plant import Scale, Site
from blendapp.services.batch import make_batch
from tests.mills import TODAY, Maker

BIG, SMALL, HAND, METER = 1, 2, 3, 4
AWAY_BIG, AWAY_SMALL, AWAY_HAND, AWAY_METER = 5, 6, 7, 8
SHARES = {"Maize": (93.772, BIG), "Limestone": (4.128, SMALL), "Salt": (0.15, SMALL), "Oil": (1.9, METER),
          "Vitamins": (0.05, HAND)}


def mill(without: tuple[int, ...] = (), density: float | None = 0.92) -> Library:
    """Four scales at North, which the ingredients have, and four at South, which are like them but finer or coarser."""
    make = Maker(site_id=1)
    make.put(Site(1, "North"))
    make.put(Site(2, "South"))
    for scale in (
        Scale(BIG, "Big scale", 5.0, 20.0, 2000.0, site_id=1),
        Scale(SMALL, "Small scale", 0.5, 1.0, 200.0, site_id=1),
        Scale(HAND, "Hand scale", 0.001, 0.001, 15.0, hand_add=True, site_id=1),
        Scale(METER, "Fat meter", None, site_id=1, step_l=0.5, least_l=2.0, greatest_l=150.0),
        Scale(AWAY_BIG, "South big", 2.0, 10.0, 3000.0, site_id=2),
        Scale(AWAY_SMALL, "South small", 0.1, 0.5, 100.0, site_id=2),
        Scale(AWAY_HAND, "South hand", 0.002, 0.002, 15.0, hand_add=True, site_id=2),
        Scale(AWAY_METER, "South meter", None, site_id=2, step_l=0.25, least_l=2.0, greatest_l=150.0),
    ):
        if scale.id not in without:
            make.put(scale)
    feed = make.formula()
    for name, (share, scale_id) in SHARES.items():
        make.ingredient(name, 100.0, scale_id=scale_id, density_kg_per_l=density if name == "Oil" else None)
        make.limit(feed, "ingredient", name, share, share)
    return make.library


def at_south(library: Library, kg: float = 1000.0) -> Batch:
    batch = make_batch(library.at_site(2), 1, kg, TODAY)
    assert batch.cause is None
    return batch


def scales(batch: Batch) -> dict[str, str]:
    return {line.ingredient: line.scale for line in batch.lines}


def test_each_line_goes_to_the_scale_that_is_most_like_its_own() -> None:
    assert scales(at_south(mill())) == {
        "Maize": "South big", "Limestone": "South small", "Salt": "South small", "Oil": "South meter",
        "Vitamins": "South hand",
    }


def test_the_batch_says_which_ingredients_are_weighed_in_place_of_their_own_scale() -> None:
    said = [text for text in at_south(mill()).cautions if "in place of" in text]
    assert said == [
        "On South big in place of Big scale, which is not at this site: Maize.",
        "On South small in place of Small scale, which is not at this site: Limestone, Salt.",
        "On South meter in place of Fat meter, which is not at this site: Oil.",
        "On South hand in place of Hand scale, which is not at this site: Vitamins.",
    ]
    at_home = make_batch(mill(), 1, 1000.0, TODAY)
    assert not [text for text in at_home.cautions if "in place of" in text]
    assert scales(at_home)["Salt"] == "Small scale"


@pytest.mark.parametrize(("without", "kg", "name", "scale"), [
    ((), 2500.0, "Limestone", "South big"),  # 103.2 kg are more than the small one holds, and 2 kg within its 2 %
    ((AWAY_SMALL,), 1000.0, "Limestone", "South big"),  # coarser than its own, but of the same kind
    ((AWAY_SMALL,), 1000.0, "Salt", "South hand"),  # of those that are left only this one weighs 1.5 kg
    ((AWAY_METER,), 1000.0, "Oil", "South small"),  # steps of 0.46 kg at home: 0.1 kg keeps them, 2 kg do not
    ((AWAY_HAND,), 1500.0, "Vitamins", "South small"),
])
def test_another_kind_of_scale_stands_in_only_where_none_of_its_kind_takes_the_share(
    without: tuple[int, ...], kg: float, name: str, scale: str
) -> None:
    assert scales(at_south(mill(without), kg))[name] == scale


def test_a_liquid_of_unknown_density_is_weighed_where_its_meter_does_not_stand() -> None:
    line = next(one for one in at_south(mill(density=None)).lines if one.ingredient == "Oil")
    assert (line.scale, line.target_l) == ("South small", None)


def test_a_meter_doses_nothing_whose_own_scale_weighs() -> None:
    library = mill()
    batch: Any = at_south(library)
    assert [line.ingredient for line in batch.lines if line.target_l is not None] == ["Oil"]
