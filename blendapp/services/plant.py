"""Scales and mixers: added, and removed where nothing rests on them."""

from __future__ import annotations

from blendapp.domain.mills import Asked, Synonym
from blendapp.domain.plant import Mixer, Scale
from blendapp.domain.problems import Refused
from blendapp.domain.records import Change, added, removed
from blendapp.domain.wording import _
from blendapp.services.mill import Edit, Mill


def add_scale(mill: Mill, name: str, step_kg: float) -> Edit:
    """Add a scale that shows multiples of step_kg. Raises Refused for a step that is not above 0 or a taken name."""
    new = Scale(mill.new_id("scale"), name.strip(), step_kg)
    return mill.apply(_("Add {name}").format(name=new.name), [added(new)])


def add_mixer(mill: Mill, name: str) -> Edit:
    """Add a mixer. Raises Refused for a taken name."""
    new = Mixer(mill.new_id("mixer"), name.strip())
    return mill.apply(_("Add {name}").format(name=new.name), [added(new)])


def remove_scale(mill: Mill, scale_id: int) -> Edit:
    """Remove a scale. Raises Refused where an ingredient is still weighed on it."""
    scale: Scale = mill.library.records["scale"][scale_id]
    weighed = [one.name for one in mill.library.ingredients if one.scale_id == scale_id]
    if weighed:
        text = _("{scale} still weighs {ingredients}; give those another scale first.")
        raise Refused(text.format(scale=scale.name, ingredients=", ".join(weighed)))
    return mill.apply(_("Remove {name}").format(name=scale.name), [removed(scale)])


def remove_mixer(mill: Mill, mixer_id: int) -> Edit:
    mixer: Mixer = mill.library.records["mixer"][mixer_id]
    return mill.apply(_("Remove {name}").format(name=mixer.name), [removed(mixer)])


def name_means(mill: Mill, source: str, name: str, ingredient_id: int) -> Edit:
    """Remember which ingredient a source means by a name, so that its next list is not asked about it."""
    old = next(
        (one for one in mill.library.all("synonym")
         if one.asked is Asked.INGREDIENT and one.source == source and one.name == name), None
    )
    new = Synonym(mill.new_id("synonym") if old is None else old.id, source, name, ingredient_id)
    what = _("“{name}” means {ingredient}").format(name=name, ingredient=mill.library.ingredient(ingredient_id).name)
    return mill.apply(what, [Change(old, new)])
