"""Why there is no mix, in sentences, and what each repair does. No Qt."""

from __future__ import annotations

import math

from blendapp.desk.table.look import fitting_decimals
from blendapp.domain.figures import decimals_of, write_measure
from blendapp.domain.notation import notation
from blendapp.domain.results import Conflict, LimitResult, Reach, Repair, Result, Side
from blendapp.domain.wording import _, plural


def limit_words(limit: LimitResult) -> str:
    """What a limit is called among others: "Lysine", "Calcium : available phosphorus", "Crude protein, dry matter"."""
    name = limit.name if limit.per is None else _("{name} : {per}").format(name=limit.name, per=limit.per)
    if limit.basis in (None, "as fed", "per day"):
        return name
    return _("{name}, {basis}").format(name=name, basis=_(limit.basis or ""))


def sentences(result: Result, conflict: Conflict) -> list[str]:
    """What each limit could reach alone, and which cannot hold together."""
    said = [reach_words(result, one) for one in conflict.reach]
    members = [limit_words(result.limits[index]) for index in conflict.members]
    if len(members) == 1:
        text = _("{name} cannot be met on its own, whatever is done with the other limits.")
        said += [] if conflict.reach else [text.format(name=members[0])]
    elif members:
        text = _("These cannot hold together, and without any one of them they can: {names}.")
        said.append(text.format(names=", ".join(members)))
    hopeless = [limit_words(result.limits[one.limit]) for one in conflict.repairs if one.to is None]
    if hopeless and len(hopeless) < len(conflict.repairs):
        text = plural("Changing only this does not help: {names}.",
                      "Changing only one of these does not help: {names}.", len(hopeless))
        said.append(text.format(names=", ".join(hopeless)))
    return said


def reach_words(result: Result, reach: Reach) -> str:
    """How far a side of a limit can be met within the ingredient limits: "Lysine can reach 0.91 %, asked 1.10 %"."""
    limit = result.limits[reach.limit]
    words = {"name": limit_words(limit), "unit": limit.unit, "asked": notation().write_short(reach.asked)}
    if reach.reachable is None:
        text = _("{name} cannot be reached at all; asked {asked} {unit}.")
    elif reach.bound is Side.MINIMUM:
        text = _("{name} can reach {reachable} {unit}, asked {asked}.")
        words["reachable"] = write_measure(reach.reachable)
    else:
        text = _("{name} cannot come below {reachable} {unit}, asked at most {asked}.")
        words["reachable"] = write_measure(reach.reachable)
    return text.format(**words).replace("  ", " ").replace(" ,", ",").replace(" .", ".")


def repaired(repair: Repair) -> tuple[float, int]:
    """The bound that a repair sets and its decimals: a short figure, rounded to the side that still helps."""
    assert repair.to is not None
    decimals = max(fitting_decimals(repair.frm, 0, 4), min(decimals_of(repair.to), 4))
    shown = repair.to * 10.0**decimals
    near = round(shown)
    if abs(shown - near) > 1e-8 * max(1.0, abs(shown)):
        near = math.floor(shown) if repair.bound is Side.MINIMUM else math.ceil(shown)
    return round(near / 10.0**decimals, decimals), decimals


def repair_words(result: Result, repair: Repair) -> str:
    """What a repair does: "Lower the minimum of Lysine from 1.10 to 0.91 %"."""
    limit = result.limits[repair.limit]
    to, decimals = repaired(repair)
    text = {
        (Side.MINIMUM, True): _("Lower the minimum of {name} from {frm} to {to} {unit}"),
        (Side.MINIMUM, False): _("Raise the minimum of {name} from {frm} to {to} {unit}"),
        (Side.MAXIMUM, True): _("Lower the maximum of {name} from {frm} to {to} {unit}"),
        (Side.MAXIMUM, False): _("Raise the maximum of {name} from {frm} to {to} {unit}"),
    }[repair.bound, to < repair.frm]
    return text.format(name=limit_words(limit), frm=notation().write_short(repair.frm),
                       to=notation().write(to, decimals), unit=limit.unit).strip()
