from __future__ import annotations

import json
import threading
from pathlib import Path
from typing import Any

import pytest
from sqlalchemy import Engine, text

from server import checks, documents, jobs, library, sheets, storage
from server.errors import DocumentError, JointError
from server.jobs import saving
from server.jobs.content import bytes_hash, content_hash
from server.library import NotFoundError
from server.sheets import SheetData
from server.storage import Session
from tests.jobs.samples import NOON, quick_sheet, save, start_job
from tests.library.samples import add_bond, change, document


def count(session: Session) -> int:
    return int(session.execute(text("SELECT count(*) FROM check_revisions")).scalar_one())


def test_a_saved_check_comes_back_whole(session: Session) -> None:
    add_bond(session)
    jobs.set_shop(session, name="Invented Joinery")
    job = start_job(session, drawing="D-1 B")
    raw = document()
    saved = save(session, job, raw, mark="RB1", made_by="Anna", reason="first")
    assert saved == jobs.revision(session, saved.id)
    assert saved == jobs.revision_of(session, saved.check_id)
    assert saved.document == raw
    expected = checks.run(library.resolve(session, documents.read(raw)))
    assert saved.result == json.loads(json.dumps(expected))
    assert saved.values_used == saved.result["values_used"]
    assert saved.values_used["adhesives"]["glue"]["record"] == "B-001"
    assert (saved.revision, saved.verdict, saved.engine) == (1, "pass", expected["engine"])
    assert saved.heading == {
        "shop_name": "Invented Joinery",
        "shop_address": "",
        "job_number": "J-001",
        "job_title": "Roof beams",
        "customer": "Invented Barns",
        "drawing": "D-1 B",
        "check_number": 1,
        "mark": "RB1",
        "revision": 1,
        "title": "Two planks",
        "paper": "A4",
        "display": "SI",
        "made_by": "Anna",
        "reason": "first",
        "saved_at": "2026-12-01T12:00:00Z",
    }


def test_the_document_may_come_as_text(session: Session) -> None:
    job = start_job(session)
    raw = document(shear_strength="4.2 MPa")
    assert save(session, job, json.dumps(raw)).document == raw
    assert save(session, job, json.dumps(raw).encode()).document == raw


def test_the_hash_is_over_everything_and_printed_on_the_sheet(session: Session) -> None:
    saved = save(session, start_job(session), mark="B1")
    pdf = jobs.pdf_bytes(session, saved.id)
    assert saved.sha256 == content_hash(vars(saved))
    assert pdf == f"sheet B1 revision 1 {saved.sha256}".encode()
    assert saved.pdf_sha256 == bytes_hash(pdf)
    for part in ("heading", "document", "values_used", "result", "engine"):
        assert content_hash({**vars(saved), part: "other"}) != saved.sha256


def test_the_order_of_pieces_is_kept_and_part_of_the_hash(session: Session) -> None:
    job = start_job(session)
    raw = document(shear_strength=4.2)
    turned = document(shear_strength=4.2)
    turned["section"]["pieces"] = dict(reversed(raw["section"]["pieces"].items()))
    one, two = save(session, job, raw), save(session, job, turned)
    assert list(two.document["section"]["pieces"]) == ["upper", "lower"]
    assert content_hash(vars(one) | {"document": turned}) != one.sha256


def test_the_sheet_gets_what_it_has_to_say(session: Session) -> None:
    drawn: list[SheetData] = []

    def draw(sheet: SheetData) -> bytes:
        drawn.append(sheet)
        return b"x"

    jobs.set_shop(session, name="Invented Joinery", address="1 Mill Lane\n\nNowhere")
    job = start_job(session, paper="Letter", display="US", drawing="D-1")
    saved = save(session, job, mark="RB1", made_by="Anna", draw=draw)
    [sheet] = drawn
    assert sheet == SheetData(
        document=saved.document,
        result=sheet.result,
        shop="Invented Joinery",
        address=("1 Mill Lane", "Nowhere"),
        job="J-001",
        customer="Invented Barns",
        title="Two planks",
        drawing="D-1",
        mark="RB1",
        revision=1,
        date="2026-12-01",
        paper="Letter",
        display="US",
        prepared="Anna",
        content_hash=saved.sha256,
        engine=saved.engine,
        saved_at=int(NOON.timestamp()),
    )


def test_an_old_revision_never_changes(session: Session) -> None:
    """Not when the record, the job, the shop or the program does: nothing recalculates or redraws."""
    add_bond(session)
    job = start_job(session)
    old = save(session, job, document())
    pdf = jobs.pdf_bytes(session, old.id)
    change(session, "B-001", status="approved", values={"shear_strength": "0.1 MPa"})
    jobs.edit(session, job.id, title="other", customer="other", paper="Letter")
    jobs.set_shop(session, name="other")
    save(session, job, document(), check_id=old.check_id, mark="other")
    again = jobs.revision(session, old.id)
    kept = {"mark", "newest"}  # the check's own mark and the number of its newest revision are of today
    assert {k: v for k, v in vars(again).items() if k not in kept} == {
        k: v for k, v in vars(old).items() if k not in kept
    }
    assert jobs.pdf_bytes(session, old.id) == pdf
    assert jobs.altered(session, old.id) is None


def test_reading_never_runs_or_draws(session: Session, monkeypatch: pytest.MonkeyPatch) -> None:
    saved = save(session, start_job(session))

    def never(*_: object) -> Any:
        raise AssertionError("calculated")

    monkeypatch.setattr(checks, "run", never)
    monkeypatch.setattr(documents, "read", never)
    assert jobs.revision(session, saved.id) == saved
    assert jobs.pdf_bytes(session, saved.id)
    assert jobs.checks_of(session, saved.job_id)[0].revision_id == saved.id
    assert jobs.export_revision(session, saved.id)


def test_checks_and_revisions_are_numbered(session: Session) -> None:
    job, other = start_job(session), start_job(session)
    first = save(session, job)
    second = save(session, job, mark="RB2")
    third = save(session, job, check_id=first.check_id)
    assert save(session, other).check_number == 1
    assert [(s.check_number, s.mark, s.revision) for s in (first, second, third)] == [
        (1, "C1", 1),
        (2, "RB2", 1),
        (1, "C1", 2),
    ]
    lines = jobs.checks_of(session, job.id)
    assert [(line.number, line.mark, line.revision, line.revision_id) for line in lines] == [
        (1, "C1", 2, third.id),
        (2, "RB2", 1, second.id),
    ]
    assert [(line.revision, line.newest) for line in jobs.revisions_of(session, first.check_id)] == [(2, 2), (1, 2)]
    assert jobs.revision_of(session, first.check_id, 1).id == first.id


def test_what_is_not_there_is_told(session: Session) -> None:
    job, other = start_job(session), start_job(session)
    saved = save(session, job)
    for number in (0, -1, 99, 10**30):
        with pytest.raises(NotFoundError, match="no saved check"):
            jobs.revision(session, number)
        with pytest.raises(NotFoundError, match="no saved check"):
            jobs.pdf_bytes(session, number)
        with pytest.raises(NotFoundError, match="no check"):
            jobs.revisions_of(session, number)
        with pytest.raises(NotFoundError, match="revisions 1 to 1"):
            jobs.revision_of(session, saved.check_id, number)
        with pytest.raises(NotFoundError, match="no check with"):
            save(session, job, check_id=number)
        with pytest.raises(NotFoundError, match="no job"):
            jobs.save(session, job_id=number, raw=document(shear_strength=1), draw=quick_sheet)
    with pytest.raises(NotFoundError, match="no check with"):
        save(session, other, check_id=saved.check_id)
    assert count(session) == 1


@pytest.mark.parametrize(
    ("change", "path"),
    [
        ({"raw": b"{"}, ""),
        ({"raw": {"kind": "member"}}, "basis"),
        ({"raw": document(record="B-404")}, "adhesives.glue.record"),
        ({"mark": "m" * 61}, "mark"),
        ({"made_by": "a\nb"}, "made_by"),
        ({"reason": "x" * 5001}, "reason"),
    ],
)
def test_bad_input_saves_nothing(session: Session, change: dict[str, Any], path: str) -> None:
    job = start_job(session)
    with pytest.raises(DocumentError) as caught:
        save(session, job, **change)
    assert path in {fault.path for fault in caught.value.faults}
    assert count(session) == 0
    assert jobs.checks_of(session, job.id) == []


def test_a_sheet_that_cannot_be_drawn_saves_nothing(session: Session) -> None:
    def broken(sheet: SheetData) -> bytes:
        raise JointError("No glyph for that.")

    job = start_job(session)
    with pytest.raises(JointError, match="No glyph"):
        save(session, job, draw=broken)
    assert count(session) == 0
    assert jobs.checks_of(session, job.id) == []


def test_what_the_fonts_lack_is_named_by_its_field(session: Session) -> None:
    job = start_job(session)
    raw = document(shear_strength=4.2)
    raw["note"] = "for the circus \U0001f3aa"
    with pytest.raises(DocumentError) as caught:
        save(session, job, raw, draw=sheets.pdf)
    [fault] = caught.value.faults
    assert fault.path == "note"
    assert "U+1F3AA" in fault.message
    with pytest.raises(DocumentError, match="made_by"):
        save(session, job, made_by="\U0001f3aa")
    assert count(session) == 0


def test_the_lock_is_not_held_while_checking_and_drawing(session: Session, book: Engine) -> None:
    """Somebody else saves in the middle of each, and so gets the revision number first."""
    job = start_job(session)
    first = save(session, job)
    others: list[int] = []

    def draw(sheet: SheetData) -> bytes:
        if len(others) < 1:
            others.append(0)
            with storage.reading(book) as other:
                others[0] = save(other, job, check_id=first.check_id).revision
        return quick_sheet(sheet)

    mine = save(session, job, check_id=first.check_id, draw=draw)
    assert (others, mine.revision) == ([2], 3)
    assert jobs.pdf_bytes(session, mine.id).startswith(b"sheet C1 revision 3 ")  # drawn anew with its true number


def test_a_save_that_is_overtaken_every_time_still_ends(session: Session, book: Engine) -> None:
    job = start_job(session)
    first = save(session, job)
    drawn: list[bool] = []

    def draw(sheet: SheetData) -> bytes:
        drawn.append(session.is_writing)
        if not session.is_writing:
            with storage.reading(book) as other:
                save(other, job, check_id=first.check_id)
        return quick_sheet(sheet)

    mine = save(session, job, check_id=first.check_id, draw=draw)
    assert drawn == [False] * saving._TRIES + [True]
    assert mine.revision == 2 + saving._TRIES


@pytest.mark.parametrize("same_check", [True, False], ids=["one check", "new checks"])
def test_eight_saving_at_once_all_succeed(session: Session, book: Engine, same_check: bool) -> None:
    job = start_job(session)
    check_id = save(session, job).check_id if same_check else None
    saved: list[jobs.SavedRevision] = []
    failures: list[Exception] = []
    ready = threading.Barrier(8)

    def work() -> None:
        try:
            ready.wait()
            for _ in range(3):
                with storage.reading(book) as mine:
                    saved.append(save(mine, job, check_id=check_id))
        except Exception as error:
            failures.append(error)

    threads = [threading.Thread(target=work) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    assert failures == []
    session.rollback()  # look at the present
    numbers = sorted(one.revision if same_check else one.check_number for one in saved)
    first = 2 if same_check else 1
    assert numbers == list(range(first, first + 24))
    for one in saved:
        assert jobs.altered(session, one.id) is None
        assert jobs.pdf_bytes(session, one.id).endswith(one.sha256.encode())


def test_the_trail_tells_of_every_save(session: Session) -> None:
    saved = save(session, start_job(session), made_by="Anna")
    line = storage.lines(session, subject="job J-001")[0]
    assert (line.who, line.what, line.detail["sha256"]) == ("Anna", "check saved", saved.sha256)


def test_where_a_record_is_used(session: Session) -> None:
    add_bond(session)
    job = start_job(session)
    first = save(session, job, document(), mark="RB1")
    change(session, "B-001", status="approved", note="n")
    second = save(session, job, document(), check_id=first.check_id)
    save(session, job)  # typed values: no record
    found = library.where_used(session, "b-001")
    assert [(use.check_revision_id, use.record_revision, use.n, use.newest) for use in found] == [
        (second.id, 2, 2, True),
        (first.id, 1, 1, False),
    ]
    assert (found[0].name, found[0].job_number, found[0].mark, found[0].verdict) == ("glue", "J-001", "RB1", "pass")
    assert [use.check_revision_id for use in library.where_used(session, "B-001", revision=1)] == [first.id]
    assert library.where_used(session, "B-002") == []
    assert library.where_used(session, "\ud800") == []
    assert library.where_used(session, "B-001", revision=10**30, offset=10**30) == []


def test_an_altered_revision_is_noticed(session: Session, book: Engine) -> None:
    saved = save(session, start_job(session))
    path = Path(str(book.url.database))
    import sqlite3

    with sqlite3.connect(path) as raw:  # somebody who first takes the guards away
        raw.execute("DROP TRIGGER check_revisions_update")
        raw.execute("UPDATE check_revisions SET result = replace(result, '\"pass\"', '\"fail\"')")
    session.rollback()
    assert "altered" in str(jobs.altered(session, saved.id))
