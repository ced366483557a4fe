"""What is not chosen is as plain to see as what is, in the light scheme and in the dark one."""

from __future__ import annotations

from collections.abc import Iterator

import pytest
from PySide6.QtGui import QColor
from PySide6.QtWidgets import QApplication, QCheckBox
from pytestqt.qtbot import QtBot

from blendapp.desk.theme import dress, tokens

LEAST_CONTRAST = 3.0
"""Of what marks a control against its ground: WCAG 2.1, 1.4.11."""


@pytest.fixture(params=[False, True], ids=["light", "dark"])
def scheme(request: pytest.FixtureRequest, qapp: QApplication) -> Iterator[bool]:
    dress(qapp, dark=request.param)
    yield request.param
    dress(qapp, dark=False)


def luminance(colour: QColor) -> float:
    """Relative luminance as WCAG 2.1 defines it."""
    parts = [part / 12.92 if part <= 0.04045 else ((part + 0.055) / 1.055) ** 2.4
             for part in (colour.redF(), colour.greenF(), colour.blueF())]
    return 0.2126 * parts[0] + 0.7152 * parts[1] + 0.0722 * parts[2]


def contrast(one: QColor, other: QColor) -> float:
    light, dark = sorted((luminance(one), luminance(other)), reverse=True)
    return (light + 0.05) / (dark + 0.05)


def test_the_edge_of_an_empty_box_stands_out_and_a_chosen_box_is_filled(qtbot: QtBot, scheme: bool) -> None:
    assert tokens().dark is scheme
    looks = []
    for chosen in (False, True):
        box = QCheckBox("")
        qtbot.addWidget(box)
        box.setChecked(chosen)
        box.resize(40, 30)
        looks.append(box.grab().toImage())
    ground = tokens().colour("ground")
    middle = looks[0].height() // 2
    across = [[image.pixelColor(x, middle) for x in range(image.width())] for image in looks]
    edge = max(across[0], key=lambda one: contrast(one, ground))
    assert contrast(edge, ground) >= LEAST_CONTRAST
    apart = [contrast(empty, filled) for empty, filled in zip(*across, strict=True)]
    assert sum(one >= LEAST_CONTRAST for one in apart) >= 10
