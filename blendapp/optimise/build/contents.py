"""What is weighed for a batch where that is more than the mix of its formula."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

import numpy as np

from blendapp.domain.ingredients import Ingredient
from blendapp.optimise.program import Array


@dataclass(frozen=True)
class Contents:
    """amounts: of everything that is weighed, by ingredient identifier, in the amounts of the formula.

    counted_as: of a weighed ingredient, the parts (sum 1) of it that limits on ingredients count as an ingredient of
    the formula: {salt: {salt: 0.7, premix: 0.3}} where three tenths of the salt stand in place of an opened premix.
    What is not named counts as itself. Nutrient limits count every weighed ingredient with its own composition.
    """

    amounts: Mapping[int, float]
    counted_as: Mapping[int, Mapping[int, float]] = field(default_factory=dict)

    @property
    def ids(self) -> set[int]:
        """Of everything that needs a column: what is weighed, and what it counts as."""
        return {*self.amounts, *(key for parts in self.counted_as.values() for key in parts)}

    def matrix(self, ingredients: tuple[Ingredient, ...]) -> Array | None:
        """Shape (n, n): matrix @ x are the amounts as limits on ingredients count them; None where these are x."""
        if not self.counted_as:
            return None
        at = {ingredient.id: column for column, ingredient in enumerate(ingredients)}
        found = np.eye(len(ingredients))
        for key, parts in self.counted_as.items():
            found[at[key], at[key]] = 0.0
            for counts_as, part in parts.items():
                found[at[counts_as], at[key]] = part
        return found
