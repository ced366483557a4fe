"""The lines of a batch by what they are weighed on, and the columns that each such group has on each page."""

from __future__ import annotations

import dataclasses
import itertools
from collections.abc import Sequence
from dataclasses import dataclass

from blendapp.documents.flow import Style
from blendapp.documents.letters import BOLD
from blendapp.documents.paper import MM
from blendapp.documents.phrases import with_unit
from blendapp.documents.rows import GUTTER, Column, Rows, Text
from blendapp.documents.sections import LABEL
from blendapp.documents.weighing_words import details, is_medicated
from blendapp.domain import figures
from blendapp.domain.batches import Batch, BatchLine, BatchPage
from blendapp.domain.notation import notation
from blendapp.domain.wording import _

NAME = Style(12, leading=15)
TARGET = Style(16, BOLD, leading=18)
BESIDE = Style(12, leading=18)
DETAIL = Style(10, leading=11.5)
_WEIGHED, _LOT, _INITIALS, _CHECK = 62.0, 60.0, 44.0, 44.0
# Figures of two groups stand under one another where that costs the names no more than this.
_MOST_SPARE = 40.0
# Names keep this width; places to write in give up to a quarter of theirs for it.
_LEAST_NAME = 110.0
_LEAST_ROOM = 0.75
# What may be weighed takes a second line beyond this.
_MOST_BAND = 88.0
# Nothing is written into a master record.
_LEAST_RECORD_ROW = 8.5 * MM


@dataclass(frozen=True)
class Group:
    """Lines of one scale or meter. unit: in which masses are shown; own_unit: in which this scale shows them.

    rounded: the decimals of masses that are not whole steps in `unit`, the same for all lines of the page, so that
    they add up.
    """

    lines: Sequence[BatchLine]
    unit: str
    own_unit: str
    rounded: int = 0

    @property
    def hand_add(self) -> bool:
        return self.lines[0].hand_add

    @property
    def medicated(self) -> bool:
        """Whether its lines carry a drug and stand apart for it; hand-adds stand apart already."""
        return not self.hand_add and is_medicated(self.lines[0])

    @property
    def second_check(self) -> bool:
        """Whether one person weighs and another checks."""
        return self.hand_add or self.medicated

    @property
    def by_volume(self) -> bool:
        return self.lines[0].step_l is not None

    @property
    def foreign(self) -> bool:
        """Whether its scale shows another unit than the page."""
        return not self.by_volume and self.own_unit != self.unit

    @property
    def volume_unit(self) -> str:
        return figures.unit_of_meter(self.lines[0].step_l or 1.0)[0]

    @property
    def title(self) -> str:
        first = self.lines[0]
        if first.step_l is not None:
            step = with_unit(figures.write_volume(first.step_l, first.step_l), self.volume_unit)
        else:
            step = with_unit(figures.write_mass(first.step_kg, first.step_kg, self.own_unit), self.own_unit)
        if first.hand_add:
            named, bare = _("Hand-adds on {scale}, in steps of {step}"), _("Hand-adds, in steps of {step}")
        elif self.medicated:
            named, bare = _("Medicated, on {scale}, in steps of {step}"), _("Medicated, in steps of {step}")
        else:
            named, bare = _("{scale}, in steps of {step}"), _("In steps of {step}")
        return (named if first.scale else bare).format(scale=first.scale, step=step)

    # -- figures of a line

    def mass(self, line: BatchLine) -> str:
        """The mass in the unit of the page."""
        return notation().write(self.mass_shown(line), self.decimals)

    def mass_shown(self, line: BatchLine) -> float:
        """The mass as it stands on the page, in its unit."""
        return round(figures.mass_in(line.target_kg, self.unit), self.decimals)

    @property
    def decimals(self) -> int:
        """The decimals of masses in the unit of the page.

        What a meter doses needs those of these very masses only: the step of a liquid seldom is a round mass.
        """
        steps = max(figures.decimals_of_mass(line.step_kg, self.unit) for line in self.lines)
        if not self.by_volume or self.unit != "kg":
            return max(steps, self.rounded) if _is_rounded(self.lines[0], self.unit) else steps
        return min(steps, max(figures.decimals_of_step(line.target_kg) for line in self.lines), 6)

    def target(self, line: BatchLine) -> str:
        """What the operator reads off the scale or sets at the meter."""
        if line.step_l is not None and line.target_l is not None:
            return with_unit(figures.write_volume(line.target_l, line.step_l), self.volume_unit)
        return self.mass(line)

    def band(self, line: BatchLine) -> list[str]:
        """"0.904 to 0.921 kg": what may be weighed, in steps of the scale and the unit that it shows; [] if not known.

        It lies around the share, not around the target, which is itself off by what a step leaves. A long one has two
        lines.
        """
        if line.tolerance_kg is None or not line.target_kg:
            return []
        band = figures.band_in_steps(line.share_kg, line.tolerance_kg, line.step_kg, line.target_kg)
        if line.step_l is not None:
            unit, texts = self.volume_unit, [figures.write_volume(n * line.step_l, line.step_l) for n in band]
        else:
            unit = self.own_unit
            texts = [figures.write_mass(n * line.step_kg, line.step_kg, unit) for n in band]
        least, most = texts
        if least == most:
            return [_("exactly {value}").format(value=with_unit(least, unit))]
        words = _("{least} to {greatest}").format(least=least, greatest=with_unit(most, unit))
        return DETAIL.wrap(words, max(_MOST_BAND, DETAIL.width(with_unit(most, unit))))


def in_order(lines: Sequence[BatchLine]) -> list[list[BatchLine]]:
    """The lines by scale, the coarsest scale first, then meters, medicated lines apart, hand-adds last.

    Else they keep their order.
    """
    groups: dict[tuple[bool, bool, bool, float, str], list[BatchLine]] = {}
    for line in lines:
        step = line.step_kg if line.step_l is None else line.step_l
        apart = not line.hand_add and is_medicated(line)
        groups.setdefault((line.hand_add, apart, line.step_l is not None, -step, line.scale), []).append(line)
    return [groups[key] for key in sorted(groups)]


def groups_of(batch: Batch) -> list[Group]:
    unit = batch.mass_unit
    rounded = figures.decimals_to_add_up([line.step_kg for line in batch.lines if _is_rounded(line, unit)], unit)
    return [Group(lines, unit, _own_unit(lines[0], unit), rounded) for lines in in_order(batch.lines)]


def _own_unit(line: BatchLine, unit: str) -> str:
    return figures.unit_of_scale(line.step_kg, unit) if line.step_l is None else unit


def _is_rounded(line: BatchLine, unit: str) -> bool:
    """Whether its mass in the unit of the page is not a whole step: another scale's, or a liquid's in pounds."""
    return _own_unit(line, unit) != unit or (line.step_l is not None and unit != "kg")


class Layout:
    """The columns of every group of a page, the first figure of all of them under one another."""

    def __init__(self, batch: Batch, page: BatchPage, groups: Sequence[Group], total: str, width: float) -> None:
        self._page = page
        self._master = page is BatchPage.MASTER
        self.width = width
        self._total_kg = batch.total_kg or 1.0
        self._number = LABEL.width(str(len(batch.lines))) + 2
        shown = [(group, line) for group in groups for line in group.lines]
        figure_widths = [TARGET.width(group.target(line)) for group, line in shown]
        bands = [(group, DETAIL.width(text)) for group, line in shown for text in group.band(line)]
        self._band = max([*(width for _group, width in bands), 54.0]) + 2
        under = [width for group, width in bands if not group.foreign and not self._master]
        self._target = max([*figure_widths, *under, TARGET.width(total), 52.0]) + 2
        tails = [self._tail(group) for group in groups]
        self._tail_width = max((_taken(tail) for tail in tails), default=0.0)

    def rows(self, group: Group) -> Rows:
        tail = self._tail(group)
        spare = self._tail_width - _taken(tail)
        if spare <= _MOST_SPARE or self._master:
            # The first place to write in takes what another group needs more; on the record, the last figure.
            takes = next((place for place, column in enumerate(tail) if column.write), len(tail) - 1)
            tail[takes] = dataclasses.replace(tail[takes], width=tail[takes].width + spare)
        fixed = self._number + self._target + 2 * GUTTER + _taken(tail)
        lacking = _LEAST_NAME - (self.width - fixed)
        if lacking > 0:
            tail = _narrower(tail, lacking)
        columns = (Column("", self._number), Column(_("Ingredient")), self._target_column(group), *tail)
        return Rows(columns, self.width, *([_LEAST_RECORD_ROW] if self._master else []))

    def cells(self, group: Group, number: int, line: BatchLine, running: str) -> list[list[Text]]:
        target = [(group.target(line), TARGET)]
        band: list[Text] = [(text, DETAIL) for text in group.band(line)]
        # What may be weighed stands under the figure that the scale shows.
        if not self._master and not group.foreign:
            target += band
        name = [(line.ingredient, NAME), *((words, DETAIL) for words in details(line, self._page))]
        tail: list[list[Text]] = [[] for _column in self._tail(group)]
        beside = self._beside(group, line, running)
        if beside:
            tail[0] = beside
        if self._master:
            tail[-2:] = [band, [(write_share(line.target_kg / self._total_kg), BESIDE)]]
        return [[(str(number), LABEL)], name, target, *tail]

    def has_running(self, group: Group) -> bool:
        """A running total helps on a scale that stands at it; on one that shows another unit it would mislead."""
        few = len(group.lines) < 2 or group.second_check or group.by_volume or group.foreign
        return not self._master and not few

    def _target_column(self, group: Group) -> Column:
        unit = group.volume_unit if group.by_volume else group.unit
        words = _("Amount {unit}") if self._master else _("Target {unit}")
        return Column(words.format(unit=unit), self._target, right=True)

    def _beside(self, group: Group, line: BatchLine, running: str) -> list[Text]:
        if group.by_volume:
            return [(group.mass(line), BESIDE)]
        if group.foreign:
            mass = figures.write_mass(line.target_kg, line.step_kg, group.own_unit)
            band: list[Text] = [] if self._master else [(text, DETAIL) for text in group.band(line)]
            return [(mass, BESIDE), *band]
        return [(running, BESIDE)] if self.has_running(group) else []

    def _tail(self, group: Group) -> list[Column]:
        """The columns after the target."""
        found = []
        if group.by_volume or group.foreign or self.has_running(group):
            found.append(self._beside_column(group))
        if self._master:
            share = Column(_("% of the total"), 62.0, right=True)
            return [*found, Column(_("May be weighed"), self._band, right=True), share]
        lot = _("Bin, lot") if self._page is BatchPage.BLANK else _("Lot")
        weighed = _("Dosed {unit}") if group.by_volume else _("Weighed {unit}")
        unit = group.volume_unit if group.by_volume else group.own_unit
        found += [Column(lot, _LOT, write=True), Column(weighed.format(unit=unit), _WEIGHED, write=True)]
        if group.second_check:
            weigher, checker = _("Weighed by"), _("Checked by")
            return [*found, Column(weigher, _CHECK, write=True), Column(checker, _CHECK, write=True)]
        return [*found, Column(_("Initials"), _INITIALS, write=True)]

    def _beside_column(self, group: Group) -> Column:
        if self.has_running(group):
            title, cells = _("Running {unit}").format(unit=group.unit), [[(text, BESIDE)] for text in running(group)]
        else:
            unit = group.unit if group.by_volume else group.own_unit
            title = _("That is {unit}").format(unit=unit)
            cells = [self._beside(group, line, "") for line in group.lines]
        widest = max(style.width(text) for cell in cells for text, style in cell)
        return Column(title, max(widest, 46.0) + 2, right=True)


def running(group: Group) -> list[str]:
    """The total of the lines of a scale up to each one, as they are shown."""
    totals = itertools.accumulate(group.mass_shown(line) for line in group.lines)
    return [notation().write(round(total, group.decimals), group.decimals) for total in totals]


def write_share(fraction: float) -> str:
    """A share in %, with three significant digits where three decimals are too few for them."""
    return notation().write(fraction * 100, figures.decimals_of(fraction * 100, 3, least=3))


def _narrower(tail: Sequence[Column], lacking: float) -> list[Column]:
    """The columns with less room to write in, where very wide figures leave too little for the names."""
    room = sum(column.width for column in tail if column.write)
    part = max(_LEAST_ROOM, 1 - lacking / room) if room else 1.0
    return [dataclasses.replace(c, width=c.width * part) if c.write else c for c in tail]


def _taken(tail: Sequence[Column]) -> float:
    return sum(column.width + GUTTER for column in tail)
