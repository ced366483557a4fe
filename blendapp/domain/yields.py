"""What a batch gives: less than what was weighed by what is lost, and by the water that goes or comes."""

from __future__ import annotations

from collections.abc import Iterable

from blendapp.domain.ingredients import Ingredient

# A line as it was weighed: what of, and how many kg.
Weighed = tuple[Ingredient, float]


def dry_matter_percent(weighed: Iterable[Weighed]) -> float | None:
    """Dry matter of a mix in %, None where that of one of its ingredients is not known."""
    mass = dry = 0.0
    for ingredient, kg in weighed:
        if ingredient.dry_matter_percent is None:
            return None
        mass += kg
        dry += kg * ingredient.dry_matter_percent
    return dry / mass if mass else None


def without_dry_matter(weighed: Iterable[Weighed]) -> list[str]:
    """Names of the ingredients whose dry matter is not known, each once."""
    return list(dict.fromkeys(i.name for i, kg in weighed if kg and i.dry_matter_percent is None))


def part_left(
    loss_percent: float | None, mix_dry_matter_percent: float | None, product_dry_matter_percent: float | None
) -> float | None:
    """The part of what was weighed that leaves as feed, None where the dry matter of the mix is needed and not known.

    The dry matter that is not lost stays: 1,000 kg of a mix of 86 % dry matter hold 860 kg of it; after a loss of 1 %
    851.4 kg are left, and in a product of 88 % dry matter these are 967.5 kg:
    1,000 x (1 - 1/100) x 86/88. Without a dry matter of the product no water goes or comes; without a loss none is
    taken off.
    """
    left = 1.0 - (loss_percent or 0.0) / 100
    if not product_dry_matter_percent:
        return left
    if mix_dry_matter_percent is None:
        return None
    return left * mix_dry_matter_percent / product_dry_matter_percent
