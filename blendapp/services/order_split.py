"""An order becomes equal batches that a mixer can hold and fill, and one mixer takes them."""

from __future__ import annotations

import math
from collections.abc import Sequence

from blendapp.domain.library import Library
from blendapp.domain.notation import notation
from blendapp.domain.plant import Mixer
from blendapp.domain.problems import Refused
from blendapp.domain.wording import _

_EDGE_KG = 1e-9


def mixers_for(library: Library, mixer_id: int | None) -> list[Mixer]:
    """The mixers that may take a batch where the mill works: the chosen one alone, else all. Raises Refused."""
    here = library.mixers
    if mixer_id is None:
        return here
    chosen = [mixer for mixer in here if mixer.id == mixer_id]
    if not chosen:
        known: Mixer | None = library.records["mixer"].get(mixer_id)
        text = _("The mixer {name} is not of this site; choose one of {known}.")
        raise Refused(text.format(
            name="" if known is None else known.name, known=", ".join(m.name for m in here) or _("none")
        ))
    return chosen


def split_order(mixers: Sequence[Mixer], order_kg: float) -> int | None:
    """How many equal batches an order becomes: the fewest that one mixer can hold and fill; None if none can."""
    if not mixers:
        return 1
    found = []
    for mixer in mixers:
        count = 1 if mixer.greatest_kg is None else max(1, math.ceil(order_kg / mixer.greatest_kg - _EDGE_KG))
        if order_kg / count >= (mixer.least_kg or 0.0) - _EDGE_KG:
            found.append(count)
    return min(found, default=None)


def totals_held(mixers: Sequence[Mixer], batch_kg: float) -> tuple[float | None, float | None]:
    """Between which totals a batch of this mass stays in the mixers that take it; None where nothing bounds it."""
    taking = [m for m in mixers if _holds(m, batch_kg)]
    least = min((m.least_kg or 0.0 for m in taking), default=0.0)
    open_end = not taking or any(m.greatest_kg is None for m in taking)
    return least or None, None if open_end else max(m.greatest_kg or 0.0 for m in taking)


def mixer_taking(mixers: Sequence[Mixer], batch_kg: float, total_kg: float) -> Mixer | None:
    """The smallest mixer that holds a batch, as ordered and as weighed; None in a mill without mixers."""
    taking = [m for m in mixers if _holds(m, batch_kg) and _holds(m, total_kg)]
    return min(taking, key=lambda m: (math.inf if m.greatest_kg is None else m.greatest_kg, m.id), default=None)


def _holds(mixer: Mixer, mass_kg: float) -> bool:
    above = (mixer.least_kg or 0.0) <= mass_kg + _EDGE_KG
    return above and (mixer.greatest_kg is None or mass_kg <= mixer.greatest_kg + _EDGE_KG)


def nearest_orders(mixers: Sequence[Mixer], order_kg: float) -> list[float]:
    """For an order that no equal split fits, the greatest smaller one and the least greater one that fit."""
    below, above = [], []
    for mixer in mixers:
        least, greatest = mixer.least_kg or 0.0, mixer.greatest_kg
        count = 0 if greatest is None else math.floor(order_kg / greatest + _EDGE_KG)
        if count and greatest is not None and least <= greatest:
            below.append(count * greatest)
        above.append((count + 1) * least)
    return [*([max(below)] if below else []), min(above)]


def no_split(mixers: Sequence[Mixer], order_kg: float) -> str:
    """Why an order has no equal batches, with the nearest orders that have."""
    kg = notation().write_short
    text = _("No equal batches of {order} kg fit a mixer: {mixers}. Order {orders} kg.")
    span = _("{name} holds {least} to {greatest} kg")
    said = [
        span.format(
            name=m.name, least=kg(m.least_kg or 0.0), greatest=_("any") if m.greatest_kg is None else kg(m.greatest_kg)
        )
        for m in mixers
    ]
    orders = _(" or ").join(map(kg, nearest_orders(mixers, order_kg)))
    return text.format(order=kg(order_kg), mixers="; ".join(said), orders=orders)


def mixers_elsewhere(library: Library, mixers: Sequence[Mixer], order_kg: float) -> str:
    """A sentence on the other mixers of the mill that take an order, each with its site; "" where none does."""
    tried = {mixer.id for mixer in mixers}
    every: list[Mixer] = [mixer for mixer in library.all("mixer") if mixer.id not in tried]
    taking = [mixer for mixer in every if split_order([mixer], order_kg) is not None]
    if not taking:
        return ""
    sites = library.records["site"]
    at = _("{name} at {site}")
    names = [
        at.format(name=mixer.name, site=sites[mixer.site_id].name) if mixer.site_id in sites else mixer.name
        for mixer in taking
    ]
    return _("It would fit {mixers}.").format(mixers=_(" or ").join(names))
