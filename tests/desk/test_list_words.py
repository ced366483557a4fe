"""No text of the page of a list goes past the catalogue; what is data stands as it is."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QSettings, Qt
from PySide6.QtWidgets import QApplication

from blendapp.desk.bench import Bench
from blendapp.desk.shell.frame import Frame
from blendapp.desk.start import make_app
from blendapp.domain.units import PRICE_PER
from tests.desk.arriving import Rows, read, wait, write
from tests.desk.conftest import Hands
from tests.desk.test_translation import UNITS, bare, looks_of, marked, texts_of

__all__ = ["marked"]  # the fixture of the translator
LIST: Rows = [["Feed", "USD"], ["Maize", 210], ["Grower", 430], ["Limestone", 40], ["Limestone", 41], ["Peas", "#N/A"]]


def test_no_text_of_the_page_of_a_list_goes_past_the_catalogue(
    marked: None, qapp: QApplication, tmp_path: Path, mill_file: Path, hands: Hands
) -> None:
    make_app([])
    frame = Frame()
    bench = Bench(frame, QSettings(str(tmp_path / "settings.ini"), QSettings.Format.IniFormat))
    frame.show()
    frame.activateWindow()
    bench.start(str(mill_file))
    read(bench, write(tmp_path / "Feed.xlsx", LIST, sheet="Feed"))
    page, seen = bench.prices, []
    for _turn in range(12):
        seen += texts_of(page)
        seen += looks_of(page.rows)
        seen += [(one.words, "choice") for one in page.questions.choices.rows.choices]
        seen += [(one.words, "other question") for one in page.questions.others.rows.choices]
        seen += [(thing.words, "saying") for thing in page.sayings(2, 0)]
        if page.questions.current is None:
            break
        hands.key(Qt.Key.Key_1)
        wait(bench)
    for column in range(2):
        seen += [(words, "role") for words in page.source.head.words(column)]
    known = {*UNITS, *PRICE_PER, "Feed.xlsx", "feed", "⟦question⟧", "Feed"}
    missed = sorted({(text, where) for text, where in seen if text not in known and bare(text.replace("feed", ""))})
    frame.close()
    frame.deleteLater()
    assert len(seen) > 200
    assert not missed, missed
