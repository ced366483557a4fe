"""Draw the icon anew: `.venv/bin/python packaging/make_icon.py` writes blendapp.svg and blendapp.png beside this file.

The icon is the program's own drawing, a rail at its working wall: the line, the band of what is permitted, fading
at its open side, the wall that stands at its end, and the answer's mark leaning on it.
"""

from __future__ import annotations

import os
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
SIDE_PX = 256

PAPER, EDGE, LINE, BAND, INK, WALL = "#fcfbf7", "#dcdad3", "#8b9290", "#b4c3b9", "#171a1b", "#b23f16"

SVG = f"""<svg xmlns="http://www.w3.org/2000/svg" width="{SIDE_PX}" height="{SIDE_PX}" viewBox="0 0 64 64">
  <title>blendapp</title>
  <defs>
    <linearGradient id="open" x1="0" x2="1">
      <stop offset="0.25" stop-color="{BAND}"/>
      <stop offset="1" stop-color="{BAND}" stop-opacity="0"/>
    </linearGradient>
  </defs>
  <rect x="2.5" y="2.5" width="59" height="59" rx="13" fill="{PAPER}" stroke="{EDGE}"/>
  <rect x="23" y="25" width="33" height="14" fill="url(#open)"/>
  <path d="M8 32H56" stroke="{LINE}" stroke-width="2" stroke-linecap="round"/>
  <path d="M23 13V51" stroke="{WALL}" stroke-width="5" stroke-linecap="round"/>
  <circle cx="23" cy="32" r="8.5" fill="{INK}" stroke="{PAPER}" stroke-width="2.5"/>
</svg>
"""


def main() -> int:
    os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
    from PySide6.QtCore import QByteArray, Qt
    from PySide6.QtGui import QGuiApplication, QImage, QPainter
    from PySide6.QtSvg import QSvgRenderer

    (HERE / "blendapp.svg").write_text(SVG, "utf-8", newline="\n")
    app = QGuiApplication(sys.argv[:1])
    image = QImage(SIDE_PX, SIDE_PX, QImage.Format.Format_ARGB32)
    image.fill(Qt.GlobalColor.transparent)
    painter = QPainter(image)
    QSvgRenderer(QByteArray(SVG.encode())).render(painter)
    painter.end()
    written = image.save(str(HERE / "blendapp.png"))
    app.quit()
    return 0 if written else 1


if __name__ == "__main__":
    sys.exit(main())
