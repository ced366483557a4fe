"""Scenes of lists that arrive: prices with much to ask, analyses, and what prices do once they are taken."""

from __future__ import annotations

import tempfile
from pathlib import Path
from typing import TYPE_CHECKING

from blendapp.desk.bench import Bench
from blendapp.desk.prices.asking import FIGURE, NAMES, RATE
from blendapp.domain.list_rows import Fate
from blendapp.domain.mills import ListAbout

if TYPE_CHECKING:
    from blendapp.desk.studio import Studio

MESSY = """North Quay Meals: prices of the week
Valid from 2026-12-07 and subject to confirmation

Product,Price,,Unit,Valid to,Remarks
,USD,freight,,,
Maize,203.50,12.50,t,2026-12-31,
Wheat fd,196.00,12.50,t,2026-12-31,new crop
Soya bean ml 48,455.00,12.50,t,,
Barley,call,,t,,
Limestone,2.60,0.30,cwt,,in bags
Rapeseed meal,#N/A,,t,,
Soya oil,1040.00,22.00,ton,,
Sunflower meal,271.00,12.50,t,,
Sunflower meal,265.00,12.50,t,,second lot
DL-methionine,EUR 2750,,t,,
Salt,980.00,8.00,t,,
Pallets,12.00,,t,,
Total,,,,,
"""
RESULTS = """Tidewater Laboratory

Sample,Material,Date,Dry matter,Crude protein,Lysine,Calcium,Ash
,,,%,%,g/kg,%,%
M-101,Maize,2026-11-03,87.1,8.4,2.5,0.03,1.3
M-102,Maize,2026-11-10,86.8,8.1,2.4,0.02,1.2
S-031,Soya ml 48,2026-11-04,88.9,46.9,29.1,0.31,6.4
W-014,Wheat,2026-11-12,87.5,n.d.,3.0,0.04,1.6
L-002,Limestone,2026-11-15,99.6,,,37.9,
"""


def prices(studio: Studio, bench: Bench, price_list: Path) -> None:
    """Questions of each kind, at three sizes of the window; a long answered list; analyses; what prices do."""
    with tempfile.TemporaryDirectory() as folder:
        messy, results = Path(folder, "North Quay 2026-12-01.csv"), Path(folder, "Tidewater 2026-11.csv")
        messy.write_text(MESSY, encoding="utf-8")
        results.write_text(RESULTS, encoding="utf-8")
        _questions(studio, bench, messy)
        _analyses(studio, bench, results)
    if not price_list.is_file():
        return
    _read(studio, bench, price_list, ListAbout.PRICES)
    studio.take(bench.frame, "20-price-list")
    if bench.prices.reading is not None and bench.prices.reading.count(Fate.ACCEPTED):
        bench.prices.apply()
        studio.settle()
        studio.settle(lambda: not bench.effect.running)
        studio.take(bench.frame, "21-what-the-new-prices-do")
        bench.to_bench()
        studio.settle()
        studio.take(bench.frame, "21-prices-taken")
        bench.work.undo()


def _read(studio: Studio, bench: Bench, path: Path, about: ListAbout) -> None:
    bench.arrivals.choose(about, path)
    studio.settle(lambda: not bench.prices.reader.running)


def _questions(studio: Studio, bench: Bench, path: Path) -> None:
    panel, size = bench.prices.questions, bench.frame.size()
    _read(studio, bench, path, ListAbout.PRICES)
    studio.take(bench.frame, "20-questions")
    for width, height in ((1100, 700), (1920, 1080)):
        bench.frame.resize(width, height)
        studio.settle()
        studio.take(bench.frame, f"20-questions-{width}")
    bench.frame.resize(size)
    seen: set[str] = set()
    for _turn in range(30):
        one = panel.current
        if one is None:
            break
        if one.typed in (NAMES, RATE) and one.typed not in seen:
            (panel.field if one.typed == NAMES else panel.rate.rate).setText("wh" if one.typed == NAMES else "1.08")
            panel.narrow(panel.field.text())
            studio.settle()
            studio.take(bench.frame, f"20-a-question-of-{one.typed}")
            panel.field.clear()
            panel.narrow("")
        seen.add(one.typed)
        if one.typed == FIGURE:
            panel.field.setText(getattr(one.row, "entered", "").split(" ")[0])
        panel.choices.step(1)
        panel.enter()
        studio.settle(lambda: not bench.prices.reader.running)
    studio.take(bench.frame, "20-all-answered")


def _analyses(studio: Studio, bench: Bench, path: Path) -> None:
    _read(studio, bench, path, ListAbout.COMPOSITION)
    studio.take(bench.frame, "20-analyses")
    for _turn in range(12):
        if bench.prices.questions.current is None:
            break
        bench.prices.questions.choices.step(1)
        bench.prices.questions.enter()
        studio.settle(lambda: not bench.prices.reader.running)
    studio.take(bench.frame, "20-analyses-answered")
