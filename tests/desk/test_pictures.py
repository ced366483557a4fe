"""The pictures: made without a display, light and dark, at both scales."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtGui import QImage

from blendapp.desk import pictures


def test_the_bench_is_pictured_light_and_dark_at_both_scales(tmp_path: Path) -> None:
    assert pictures.main([str(tmp_path), "--only", "bench"]) == 0
    shown = {}
    for scheme in ("light", "dark"):
        for scale in (1, 2):
            image = QImage(str(tmp_path / f"03-bench-{scheme}-{scale}00.png"))
            assert (image.width(), image.height()) == (1440 * scale, 900 * scale)
            shown[scheme, scale] = image
    corner = {scheme: shown[scheme, 1].pixelColor(5, 450).lightness() for scheme in ("light", "dark")}
    assert corner["light"] > 200
    assert corner["dark"] < 60
    # Something stands in each zone: many more than a few colours.
    colours = {shown["light", 1].pixel(x, y) for x in range(0, 1440, 3) for y in range(200, 800, 3)}
    assert len(colours) > 40
