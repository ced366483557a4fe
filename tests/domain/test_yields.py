"""What a batch gives, by examples worked out by hand."""

from __future__ import annotations

import pytest

from blendapp.domain.ingredients import Ingredient
from blendapp.domain.yields import dry_matter_percent, part_left, without_dry_matter

MAIZE = Ingredient(1, "Maize", dry_matter_percent=86.0)
MOLASSES = Ingredient(2, "Molasses", dry_matter_percent=75.0)
HAY = Ingredient(3, "Hay")


@pytest.mark.parametrize(
    ("loss", "mix", "product", "kg"),
    [
        (None, None, None, 1000.0),
        (1.0, None, None, 990.0),
        (1.0, 86.0, 88.0, 967.5),  # 860 kg of dry matter, 851.4 after the loss, / 0.88
        (None, 84.0, 88.0, 954.545454545),  # dried: 45.45 kg of water leave
        (2.0, 90.0, 88.0, 1002.272727273),  # moistened: 882 kg of dry matter / 0.88
        (None, None, 88.0, None),
    ],
)
def test_1000_kg_give_what_is_not_lost_at_the_dry_matter_of_the_product(
    loss: float | None, mix: float | None, product: float | None, kg: float | None
) -> None:
    left = part_left(loss, mix, product)
    assert (left if left is None else 1000 * left) == (kg if kg is None else pytest.approx(kg))


def test_the_dry_matter_of_a_mix_is_that_of_its_kilograms_and_unknown_where_one_is() -> None:
    assert dry_matter_percent([(MAIZE, 900.0), (MOLASSES, 100.0)]) == pytest.approx(84.9)
    assert dry_matter_percent([(MAIZE, 900.0), (HAY, 100.0)]) is None
    assert dry_matter_percent([]) is None
    assert without_dry_matter([(MAIZE, 900.0), (HAY, 100.0), (HAY, 1.0)]) == ["Hay"]
