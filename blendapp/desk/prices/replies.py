"""What a person has answered for a list, kept while the mill file is open: taken back, and given again. No Qt."""

from __future__ import annotations

from dataclasses import dataclass, field
from pathlib import Path

from blendapp.domain.list_rows import Answer, ListReading
from blendapp.domain.mills import ListAbout
from blendapp.domain.names import fold


@dataclass
class Replies:
    """One file that is looked at. answers: in the order in which they were given; back: those taken back, the last
    one last. digest: of the file that the answers were given for. taken_as: the record of the list once it is taken.
    edits: what was done to the mill from the page of the list, with how many answers there were before it.
    """

    path: Path
    about: ListAbout
    source: str = ""
    answers: list[Answer] = field(default_factory=list)
    back: list[Answer] = field(default_factory=list)
    digest: str = ""
    taken_as: int | None = None
    edits: list[tuple[int, str]] = field(default_factory=list)

    def give(self, answer: Answer) -> None:
        """Take an answer in; of two to the same question the later one holds."""
        self.answers.append(answer)
        self.back.clear()

    def is_edit_last(self, undo_text: str | None) -> bool:
        """Whether an edit of the mill was done after the last answer, and is what the mill would undo."""
        while self.edits and self.edits[-1][0] > len(self.answers):
            self.edits.pop()
        return bool(self.edits) and self.edits[-1] == (len(self.answers), undo_text)

    def take_back(self) -> Answer | None:
        """Take the last answer back."""
        if not self.answers:
            return None
        answer = self.answers.pop()
        self.back.append(answer)
        return answer

    def give_again(self) -> Answer | None:
        """Give the answer again that was taken back last."""
        if not self.back:
            return None
        answer = self.back.pop()
        self.answers.append(answer)
        return answer

    def is_of(self, reading: ListReading) -> bool:
        """Whether the answers were given for this very file; those about rows hold for no other."""
        return not self.digest or self.digest == reading.digest

    def forget_rows(self) -> None:
        """Keep only what holds for the source: the file has changed, and with it what was said of this list alone."""
        self.answers = [one for one in self.answers if one.asked.is_remembered]
        self.back.clear()

    def drop_unsettled(self, before: ListReading | None, after: ListReading) -> Answer | None:
        """Drop the last answer where it has changed nothing: its question stands for as many rows as before."""
        if not self.answers or before is None:
            return None
        answer = self.answers[-1]
        if not (asked := _rows_asking(after, answer)) or asked != _rows_asking(before, answer):
            return None
        return self.answers.pop()


def _rows_asking(reading: ListReading, answer: Answer) -> set[tuple[str, int]]:
    return {
        (row.sheet, row.row)
        for row in reading.rows
        for one in row.questions
        if one.asked is answer.asked and (
            (row.sheet, row.row) == (answer.sheet, answer.row) if one.asked.is_of_row
            else fold(one.about) == fold(answer.about)
        )
    }


class AllReplies:
    """The lists of one open mill file that were looked at."""

    def __init__(self) -> None:
        self._found: dict[tuple[Path, ListAbout], Replies] = {}

    def of(self, path: Path, about: ListAbout) -> Replies:
        """The replies to a file, empty where it was not looked at before."""
        key = (path.resolve(), about)
        return self._found.setdefault(key, Replies(path, about))

    def begin_anew(self, replies: Replies) -> Replies:
        """No answers yet, in place of those to a list that was taken."""
        key = (replies.path.resolve(), replies.about)
        self._found[key] = Replies(replies.path, replies.about, replies.source)
        return self._found[key]

    def clear(self) -> None:
        """Forget them all: another mill file is opened."""
        self._found.clear()
