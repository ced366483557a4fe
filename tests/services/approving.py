"""A small mill with two persons who may approve, for tests of versions."""

from __future__ import annotations

from blendapp.domain.formulas import Animal
from blendapp.domain.ingredients import Tag
from blendapp.domain.library import Library
from blendapp.domain.mills import FormulaVersion, Person
from blendapp.domain.versions import Snapshot
from blendapp.services import people, versions
from blendapp.services.mill import Mill
from tests.mills import TODAY, Maker

ANN_WORD, BEN_WORD = "prepares feeds", "checks feeds too"


def feed_library() -> Library:
    """Maize and meal under protein and lysine; a second formula for sheep whose copper is a caution."""
    make = Maker()
    make.nutrient("Crude protein", never_negative=True)
    make.nutrient("Lysine", never_negative=True)
    make.nutrient("Ash", never_negative=True)
    make.ingredient("Maize", 200.0, {"Crude protein": 9.0, "Lysine": 0.26, "Ash": 1.3})
    make.ingredient("Soybean meal", 420.0, {"Crude protein": 46.0, "Lysine": 2.9, "Ash": 6.5})
    make.ingredient("Barley", 190.0, {"Crude protein": 11.0, "Lysine": 0.4, "Ash": 2.2})
    make.ingredient("Copper premix", 900.0, {"Crude protein": 0.0, "Lysine": 0.0, "Ash": 90.0},
                    tags=(Tag.ADDED_COPPER,))
    mash = make.formula("Mash", animal=Animal.PIG)
    make.limit(mash, "nutrient", "Crude protein", 18.0)
    make.limit(mash, "nutrient", "Lysine", 0.9)
    make.limit(mash, "ingredient", "Barley", None, 20.0)
    lamb = make.formula("Lamb", animal=Animal.SHEEP)
    make.limit(lamb, "nutrient", "Crude protein", 14.0)
    make.limit(lamb, "nutrient", "Ash", None, 5.0)
    make.limit(lamb, "ingredient", "Copper premix", 0.5, 0.5)
    make.limit(lamb, "ingredient", "Barley", 10.0)
    return make.library


MASH, LAMB = 1, 2
MAIZE, MEAL, BARLEY = 1, 2, 3


def staffed(mill: Mill) -> tuple[Person, Person]:
    """Ann, who prepares, and Ben, who approves, added to a mill."""
    found = []
    for name, capacity, word in (("Ann", "nutritionist", ANN_WORD), ("Ben", "production manager", BEN_WORD)):
        person = people.add_person(mill, name, capacity)
        people.set_password(mill, person.id, word)
        found.append(person)
    return found[0], found[1]


def approve(mill: Mill, formula_id: int = MASH, note: str = "") -> FormulaVersion:
    """Prepare by Ann and approve by Ben what stands, with a reason for every caution."""
    ann, ben = (mill.library.named("person", name) for name in ("Ann", "Ben"))
    draft = versions.prepare(mill, formula_id, ann.id, ANN_WORD, TODAY)
    result = Snapshot.decode(draft.snapshot).result
    assert result is not None
    reasons = {text: f"seen {n}" for n, text in enumerate(versions.to_acknowledge(result))}
    return versions.approve(mill, draft.id, ben.id, BEN_WORD, note=note, reasons=reasons, on=TODAY)
