"""What stands on the bench while no mill file is open."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QPushButton, QVBoxLayout, QWidget

from blendapp.desk.files import Files
from blendapp.desk.theme import GAP_PX, MARGIN_PX, large_font
from blendapp.domain.wording import _


class Welcome(QWidget):
    """Open, make, or go on with a mill file."""

    def __init__(self, files: Files) -> None:
        super().__init__()
        self.files = files
        self.column = QVBoxLayout(self)
        self.column.setContentsMargins(MARGIN_PX, MARGIN_PX * 3, MARGIN_PX, MARGIN_PX)
        self.column.setSpacing(GAP_PX)
        title = QLabel(_("No mill file is open"))
        title.setFont(large_font())
        words = QLabel(_(
            "A mill file holds ingredients, prices, formulas and records, all in one place. Everything you change is "
            "stored at once and can be undone."
        ))
        words.setObjectName("quiet")
        words.setWordWrap(True)
        words.setFixedWidth(460)
        self.column.addWidget(title)
        self.column.addWidget(words)
        self.column.addSpacing(GAP_PX * 2)
        self.buttons: list[QPushButton] = []
        for text, run, kind in (
            (_("Open a mill file…"), files.open, "first"),
            (_("Make one from a workbook…"), files.new_from, "plain"),
            (_("Make an empty one…"), files.new, "plain"),
        ):
            button = QPushButton(text)
            button.setObjectName(kind)
            button.setFixedWidth(260)
            button.clicked.connect(lambda _checked=False, run=run: run())
            self.column.addWidget(button)
            self.buttons.append(button)
        self.recent = QVBoxLayout()
        self.recent.setSpacing(2)
        self.column.addSpacing(GAP_PX * 2)
        self.column.addLayout(self.recent)
        self.column.addStretch(1)
        files.recent_changed.connect(self.fill)
        self.fill()

    def fill(self) -> None:
        """List the mill files opened last."""
        while self.recent.count():
            item = self.recent.takeAt(0)
            widget = item.widget() if item is not None else None
            if widget is not None:
                widget.deleteLater()
        paths = self.files.recent()
        if paths:
            head = QLabel(_("Opened last"))
            head.setObjectName("quiet")
            self.recent.addWidget(head)
        for path in paths:
            button = QPushButton(path.stem)
            button.setToolTip(str(path))
            button.setObjectName("left")
            button.clicked.connect(lambda _checked=False, path=path: self.files.open_path(path))
            self.recent.addWidget(button, 0, Qt.AlignmentFlag.AlignLeft)
