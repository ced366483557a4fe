from __future__ import annotations

from blendapp.documents import letters
from blendapp.documents.flow import Block, paginate
from blendapp.documents.letters import REGULAR


def block(height: float, gap: float = 0.0, keep_next: bool = False, heads: tuple[Block, ...] = ()) -> Block:
    return Block(height, lambda pen, left, top: None, gap, keep_next, heads)


def test_a_block_that_does_not_fit_goes_whole_to_the_next_page_without_its_gap() -> None:
    pages = paginate([block(60), block(50, gap=10)], 100)
    assert [[p.top for p in page] for page in pages] == [[0], [0]]


def test_blocks_that_belong_together_move_together() -> None:
    title, line = block(20, keep_next=True), block(30)
    pages = paginate([block(60), title, line], 100)
    assert [len(page) for page in pages] == [1, 2]


def test_heads_stand_first_on_a_page_that_a_table_continues_on() -> None:
    head = block(10)
    row = block(40, heads=(head,))
    pages = paginate([row] * 5, 100)
    assert [[p.block is head for p in page] for page in pages] == [
        [False, False], [True, False, False], [True, False],
    ]
    assert [p.top for p in pages[1]] == [0, 10, 50]


def test_a_run_taller_than_a_page_is_still_placed_whole_blocks_at_a_time() -> None:
    pages = paginate([block(40, keep_next=True)] * 5, 100)
    assert [len(page) for page in pages] == [2, 2, 1]


def test_lines_never_exceed_the_width_and_lose_no_sign() -> None:
    text = "one-two three/four " + "x" * 200 + " end"
    lines = letters.wrapped(text, REGULAR, 10, 80)
    assert all(letters.width_of(line, REGULAR, 10) <= 80 for line in lines)
    assert "".join(lines).replace(" ", "") == text.replace(" ", "")


def test_a_long_word_breaks_after_its_hyphen() -> None:
    assert letters.wrapped("solvent-extracted", REGULAR, 10, 60) == ["solvent-", "extracted"]


def test_a_figure_stays_with_its_unit() -> None:
    for line in letters.wrapped("about twenty comes to 20.8\u00a0% of it", REGULAR, 10, 100):
        assert ("20.8" in line) == ("%" in line)


def test_a_typed_figure_stays_with_its_unit_and_keeps_its_own_space() -> None:
    lines = letters.wrapped("Sunflower meal 36 % protein, in bags of 25 kg each", REGULAR, 10, 75)
    assert len(lines) > 3
    assert any("36 %" in line for line in lines)
    assert any("25 kg" in line for line in lines)


def test_invisible_signs_go_and_a_letter_that_the_font_lacks_shows_its_code() -> None:
    assert letters.plain("  a\tb\u200b\u00adc \n 大 \x07") == "a bc ‹5927›"


def test_a_cut_text_ends_in_an_ellipsis_within_the_width() -> None:
    cut = letters.shortened("a very long name of a formula", REGULAR, 10, 60)
    assert cut.endswith("…")
    assert letters.width_of(cut, REGULAR, 10) <= 60
