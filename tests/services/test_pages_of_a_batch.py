"""The pages of a batch by name, and a batch that was stored and read back."""

from __future__ import annotations

import datetime
import json

import pytest

from blendapp.documents import page_text
from blendapp.domain.batches import Batch, BatchLine, BatchPage, CleanOut, Step, ToMake
from blendapp.services import sheets

BATCH = Batch(
    formula_id=1, formula="Layer peak", version="version 2", mill="Otterfold Mill", currency="EUR",
    made=datetime.date(2026, 4, 2), order_kg=3000, batches=2, batch_kg=1500,
    lines=(
        BatchLine(1, "Maize", "Big scale", 5, 1453.2, 1455, tolerance_kg=29.0, bins=("Bin 4, lot 12", "Bin 5")),
        BatchLine(2, "Soya oil", "Fat pump", 0.4575, 45.1, 45.2925, step_l=0.5, target_l=49.5, tolerance_kg=0.9),
    ),
    limits=(), nutrients=(), broken=(), cautions=("Keep dry.",), number=12, draft=False, approved_by="Ada Marsh",
    site="North", mixer="Paddle mixer", mixer_id=3, steps=(Step("Mix", 3.0, "32 rpm"),),
    to_make=(ToMake("Premix", 4, "Premix", 15.0),), previous_feed="Piglet (sheet 11, 2026-04-01)",
    clean_out=CleanOut.SEQUENCE, loss_percent=0.5, yield_kg=1492.79, mass_unit="lb", paper="letter",
)


@pytest.mark.parametrize(
    ("page", "kind"),
    [("sheet", "Batch sheet"), ("master", "Master formula record"), ("blank", "Blank batch record")],
)
def test_a_page_is_picked_by_its_name(page: str, kind: str) -> None:
    assert page in set(BatchPage)
    for text in page_text(sheets.batch_pdf(BATCH, page=page)):
        assert kind in text


def test_a_page_of_no_known_name_is_refused() -> None:
    with pytest.raises(ValueError, match="label"):
        sheets.batch_pdf(BATCH, page="label")


@pytest.mark.parametrize("page", list(BatchPage))
def test_a_batch_that_was_stored_gives_the_same_pages_when_it_is_read_back(page: BatchPage) -> None:
    stored = json.dumps(sheets.batch_to_plain(BATCH), ensure_ascii=False, allow_nan=False)
    again = sheets.batch_from_plain(json.loads(stored))
    assert again == BATCH
    assert sheets.batch_pdf(again, page=page) == sheets.batch_pdf(BATCH, page=page)
