"""A table within a sheet of a list: where its headings stand, and what each column holds."""

from __future__ import annotations

from dataclasses import dataclass, field

from blendapp.domain.list_rows import ColumnRole


@dataclass
class ListTable:
    """heading_row: from 0, None where the columns were told by their content alone. name: the column of the names."""

    heading_row: int | None
    roles: dict[int, ColumnRole] = field(default_factory=dict)
    headings: dict[int, str] = field(default_factory=dict)
    name: int | None = None
    first_heading_row: int | None = None
    last_heading_row: int | None = None

    @property
    def first_row(self) -> int:
        """The first row below the headings."""
        last = self.heading_row if self.last_heading_row is None else self.last_heading_row
        return 0 if last is None else last + 1

    @property
    def heading_rows(self) -> range:
        """The rows that the headings take; none where the columns were told by their content."""
        if self.heading_row is None:
            return range(0)
        return range(self.heading_row if self.first_heading_row is None else self.first_heading_row, self.first_row)

    def first(self, role: ColumnRole) -> int | None:
        """The first column of a role."""
        return next((index for index, found in sorted(self.roles.items()) if found is role), None)
