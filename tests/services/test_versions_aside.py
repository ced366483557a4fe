"""A draft and an approval worked out on a library of their own, and put on record only where nothing has changed."""

from __future__ import annotations

from collections.abc import Callable

import pytest

from blendapp.domain.library import Library
from blendapp.domain.mills import VersionState
from blendapp.domain.problems import Refused
from blendapp.services import edits, people, versions
from blendapp.services.mill import Mill
from tests.mills import TODAY
from tests.services.approving import ANN_WORD, BEN_WORD, MAIZE, MASH, feed_library, staffed

pytestmark = pytest.mark.usefixtures("quick_hashing")


@pytest.fixture
def mill(opened: Callable[[Library], Mill]) -> Mill:
    found = opened(feed_library())
    staffed(found)
    return found


def worked_draft(mill: Mill) -> versions.WorkedDraft:
    ann = mill.library.named("person", "Ann")
    return versions.work_out_draft(mill.library.copy(), MASH, ann.id, ANN_WORD, TODAY)


def worked_approval(mill: Mill, draft_id: int) -> versions.WorkedApproval:
    ben = mill.library.named("person", "Ben")
    return versions.work_out_approval(mill.library.copy(), draft_id, ben.id, BEN_WORD, on=TODAY)


def test_what_is_worked_out_on_a_copy_leaves_the_mill_alone_until_it_is_recorded(mill: Mill) -> None:
    entries = len(mill.store.entries())
    worked = worked_draft(mill)
    assert mill.library.all("version") == []
    assert len(mill.store.entries()) == entries
    draft = versions.record_draft(mill, worked)
    approval = worked_approval(mill, draft.id)
    assert mill.library.all("version") == [draft]
    approved = versions.record_approval(mill, approval)
    assert (approved.state, approved.approved_by) == (VersionState.APPROVED, "Ben")
    assert versions.standing(mill.library, MASH, TODAY).text == "version 1"


@pytest.mark.parametrize("change", [
    lambda mill: edits.set_bound(mill, 1, "minimum", 18.5),
    lambda mill: edits.set_price(mill, MAIZE, 150.0, TODAY),
    lambda mill: edits.set_value(mill, MAIZE, 1, 8.0),
    lambda mill: people.change_person(mill, mill.library.named("person", "Ann").id, active=False),
], ids=["a limit", "a price", "an analysis", "the person"])
def test_a_draft_is_refused_where_anything_it_rests_on_changed_meanwhile(
    mill: Mill, change: Callable[[Mill], object]
) -> None:
    worked = worked_draft(mill)
    change(mill)
    with pytest.raises(Refused, match="changed"):
        versions.record_draft(mill, worked)
    assert mill.library.all("version") == []


def test_an_approval_is_refused_where_the_formula_or_its_draft_changed_meanwhile(mill: Mill) -> None:
    draft = versions.record_draft(mill, worked_draft(mill))
    approval = worked_approval(mill, draft.id)
    edits.set_bound(mill, 1, "minimum", 18.5)
    with pytest.raises(Refused, match="was changed while it was worked out"):
        versions.record_approval(mill, approval)
    versions.record_draft(mill, worked_draft(mill))
    with pytest.raises(Refused, match="prepared again or approved meanwhile"):
        versions.record_approval(mill, approval)
    (one,) = mill.library.all("version")
    assert one.state is VersionState.DRAFT


def test_of_two_approvals_worked_out_at_once_only_the_first_is_recorded(mill: Mill) -> None:
    draft = versions.record_draft(mill, worked_draft(mill))
    first, second = worked_approval(mill, draft.id), worked_approval(mill, draft.id)
    versions.record_approval(mill, first)
    with pytest.raises(Refused, match="approved meanwhile"):
        versions.record_approval(mill, second)
    assert [one.state for one in mill.library.all("version")] == [VersionState.APPROVED]
