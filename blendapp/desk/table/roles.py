"""Qt's enumerations as plain integers: comparing them is what a table spends its time on."""

from __future__ import annotations

from PySide6.QtCore import Qt

DISPLAY = int(Qt.ItemDataRole.DisplayRole)
EDIT = int(Qt.ItemDataRole.EditRole)
TOOL_TIP = int(Qt.ItemDataRole.ToolTipRole)
ALIGNMENT = int(Qt.ItemDataRole.TextAlignmentRole)
ACCESSIBLE_TEXT = int(Qt.ItemDataRole.AccessibleTextRole)
ACCESSIBLE_DESCRIPTION = int(Qt.ItemDataRole.AccessibleDescriptionRole)

RIGHT = int(Qt.AlignmentFlag.AlignRight | Qt.AlignmentFlag.AlignVCenter)
LEFT = int(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)

HORIZONTAL = Qt.Orientation.Horizontal
SHOWN = Qt.ItemFlag.ItemIsSelectable | Qt.ItemFlag.ItemIsEnabled
TYPED = SHOWN | Qt.ItemFlag.ItemIsEditable
NO_FLAGS = Qt.ItemFlag.NoItemFlags
