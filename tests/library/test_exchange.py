"""The library out and in again: nothing is lost, nothing is approved by a file, every refused row has its line."""

from __future__ import annotations

import json
from pathlib import Path
from typing import Any

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from server import library, storage
from server.__main__ import main
from server.errors import DocumentError
from server.library import exporting, importing
from server.library.import_files import read_file
from server.storage import Session
from tests.library.evidence import ANN, BO, add_bond_on, approved_value
from tests.library.samples import add_bond
from tests.library.test_chain import MOISTURE


@pytest.fixture
def full(session: Session) -> Session:
    value = approved_value(session)
    add_bond_on(session, value, chain=[MOISTURE])
    library.edit(session, "B-001", note="second", made_by=ANN.name)
    library.exclude(session, "T-001", 7, cause="closed late", prevented_by="timer", by=ANN)
    library.add(session, group="lots", name="=lot", values={"number": "24-117"}, note="-1 °C", made_by=ANN.name)
    return session


@pytest.fixture
def other(tmp_path: Path) -> Any:
    engine = storage.engine(tmp_path / "other.db")
    storage.migrate(engine)
    with storage.reading(engine) as opened:
        yield opened
    engine.dispose()


def text_of(session: Session) -> str:
    return "".join(exporting.export_lines(session))


def content(session: Session) -> dict[str, list[dict[str, Any]]]:
    """Every revision without what belongs to this book: who entered it when, and what became of it here."""
    own = ("made_by", "created_at", "reason", "status", "acts", "answers")
    return {
        record["key"]: [{k: v for k, v in each.items() if k not in own} for each in record["revisions"]]
        for record in json.loads(text_of(session))["records"]
    }


def apply(session: Session, text: str) -> importing.Plan:
    return importing.apply(session, text, by=BO, name="file.json")


def test_an_export_comes_in_whole_with_its_revisions(full: Session, other: Session) -> None:
    made = apply(other, text_of(full))
    assert made.refused == []
    assert content(other) == content(full)
    assert {line.act for line in importing.plan(other, text_of(full), by=BO).lines} == {"unchanged"}


def test_no_approval_comes_in_with_a_file(full: Session, other: Session) -> None:
    apply(other, text_of(full))
    for record in library.search(other, limit=500).records:
        for revision in library.revisions(other, record.key):
            assert revision.status == {"sets": "tested", "lots": "quarantined"}.get(record.group, "draft")
            assert revision.made_by == BO.name  # who brought it in answers for it, and does not approve it
    value = library.get(other, "V-001")
    assert "entered there by Ann Example" in value.reason
    assert "approved there by Bo Builder" in value.reason


def test_a_plan_changes_nothing_and_apply_does_what_it_said(full: Session, other: Session) -> None:
    text = text_of(full)
    planned = importing.plan(other, text, by=BO)
    assert library.search(other).total == 0
    assert storage.lines(other) == []
    assert apply(other, text).lines == planned.lines


def test_a_changed_file_makes_a_draft_beside_the_approved_revision(full: Session) -> None:
    text = text_of(full).replace('"name": "R2 rolling shear"', '"name": "R2, renamed"')
    made = apply(full, text)
    (line,) = [line for line in made.lines if line.act == "change"]
    assert (line.key, line.revision) == ("V-001", 2)
    assert "changes name" in line.text
    assert "approved revision 1 stays in force" in line.text
    value = library.get(full, "V-001")
    assert (value.name, value.status, value.in_force) == ("R2, renamed", "draft", 1)


def test_an_old_revision_that_reads_otherwise_is_refused(full: Session) -> None:
    document = json.loads(text_of(full))
    bond = next(record for record in document["records"] if record["key"] == "B-001")
    bond["revisions"][0]["name"] = "another"
    made = importing.plan(full, json.dumps(document), by=BO)
    assert ["a saved revision is never changed" in line.text for line in made.refused] == [True]


def test_a_file_taken_before_somebody_else_saved_is_refused(full: Session) -> None:
    text = exporting.export_csv(full)["records.csv"]
    library.edit(full, "B-001", note="meanwhile", made_by=ANN.name)
    made = importing.plan(full, text.replace("second", "from the table"), by=BO)
    assert "revision 3 was saved here since" in made.refused[0].text


def test_the_tables_come_in_too_and_formulas_stay_text(full: Session, other: Session) -> None:
    tables = exporting.export_csv(full)
    assert "'=lot" in tables["records.csv"]
    made = importing.apply(other, tables["records.csv"].replace("T-001 rev 1", "T-001 rev 1"), by=BO)
    # the value stands on revision 1 of its set; a table holds the newest alone, so it comes in as revision 1
    assert made.refused == []
    assert library.get(other, "L-001").name == "=lot"
    assert library.get(other, "L-001").note == "-1 °C"
    assert library.get(other, "B-001").chain[0].name == "moisture"
    for name in ("records.csv", "coupons.csv"):
        again = importing.plan(full, tables[name], by=BO)
        assert {line.act for line in again.lines} == {"unchanged"}, name


def test_coupons_of_a_table_are_refused_row_by_row(full: Session) -> None:
    rows = exporting.export_csv(full)["coupons.csv"].split("\n")
    column = rows[0].split(",").index("stress")
    for line, cell in ((2, "abc"), (4, "-3"), (9, "2 kg")):
        cells = rows[line - 1].split(",")
        rows[line - 1] = ",".join([*cells[:column], cell, *cells[column + 1 :]])
    made = importing.plan(full, "\n".join(rows), by=BO)
    assert [(line.line, "stress" in line.text) for line in made.refused] == [(2, True), (4, True), (9, True)]


TABLE = """group,key,name,source,values.shear_strength,values.colour,details.product,links.value:shear_strength
bonds,B-1,good,s,4 MPa,,R2,
bonds,B-2,,s,4 MPa,,,
bonds,B 3,x,s,4 MPa,,,
glues,B-4,x,s,4 MPa,,,
bonds,B-5,x,s,4 kg,,,
bonds,B-6,x,s,4 MPa,red,,
bonds,B-7,x,s,,,,V-404 rev 1
bonds,B-8,x,s,4 MPa,,,,,spare
bonds,B-9,x,s,{"a",,,
bonds,,x,s,4 MPa,,,
bonds,B-11,x,s,4 MPa,,,V-404
bonds,B-12,also good,s,5 MPa,,,
"""


def test_ten_faulty_rows_are_each_refused_by_line_and_the_good_ones_come_in(session: Session) -> None:
    made = importing.apply(session, TABLE, by=ANN)
    assert [line.line for line in made.refused] == list(range(3, 13))
    words = [
        "name",
        "cannot be a key",
        "no group",
        "mass",
        "colour",
        "V-404",
        "cells under",
        "not JSON",
        "key",
        "V-404",
    ]
    for line, word in zip(made.refused, words, strict=True):
        assert word in line.text, line
    assert sorted(record.key for record in library.search(session).records) == ["B-1", "B-12"]
    told = list(importing.summary(made))
    assert told[-1] == "Imported: 2 added, 0 changed, 0 unchanged, 10 refused."


def test_rows_may_stand_on_rows_further_down(session: Session) -> None:
    table = (
        "group,key,name,source,links.value:shear_strength,values.property,values.origin,values.value\n"
        "bonds,B-1,bond,s,V-1 rev 1,,,\n"
        "values,V-1,value,EN x,,bond shear,published,4 MPa\n"
    )
    made = importing.apply(session, table, by=ANN)
    assert made.refused == []
    assert library.get(session, "B-1").pins["shear_strength"].key == "V-1"


@pytest.mark.parametrize(
    ("text", "words"),
    [
        ("", "the column group and key"),
        ("{", "line 1: the file is not JSON"),
        ('{"format": "bondwright-library/1",\n"records": [\n{"group": 1},\n{oops}]}', "line 4"),
        ('{"format": "other/1", "records": []}', "this program reads"),
        ("group,key,flavour\n", "no column known"),
        ("group,key,key\n", "stands there twice"),
        ('group,key,name\nbonds,B-1,"x\n', "the file is not CSV"),
    ],
)
def test_a_file_that_cannot_be_read_says_where(session: Session, text: str, words: str) -> None:
    with pytest.raises(DocumentError, match=words):
        importing.plan(session, text, by=ANN)


def test_records_of_nonsense_are_refused_one_by_one(session: Session) -> None:
    records: list[Any] = [1, {}, {"group": "bonds", "key": "B-1", "revisions": []}]
    records += [{"group": "bonds", "key": "B-2", "name": 5}, {"group": "bonds", "key": "B-3", "name": "x", "values": 4}]
    records += [{"group": "bonds", "key": "B-4", "name": "x", "values": {}, "links": {"product": 7}}]
    lines = ",\n".join(map(json.dumps, records))
    made = importing.plan(session, f'{{"format": "{exporting.FORMAT}", "records": [\n{lines}]}}', by=ANN)
    assert [line.line for line in made.refused] == [2, 3, 4, 5, 6, 7]


@settings(max_examples=40, deadline=None)
@given(st.text(max_size=120))
def test_whatever_file_comes_is_read_or_refused(text: str) -> None:
    try:
        items = read_file(text)
    except DocumentError as error:
        said = str(error)
    else:
        said = str(items)
    assert said


def test_at_the_command_line(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    folder = tmp_path / "shop"
    folder.mkdir()
    engine = storage.engine(folder / "bondwright.sqlite3")
    storage.migrate(engine)
    with storage.reading(engine) as session:
        add_bond(session)
    engine.dispose()
    data, out = ["--data", str(folder)], tmp_path / "out"
    assert main(["export", str(out), *data]) == 0
    assert sorted(each.name for each in out.iterdir()) == ["coupons.csv", "library.json", "records.csv"]
    assert main(["export", str(tmp_path / "one.json"), *data]) == 0
    fresh = ["--data", str(tmp_path / "fresh")]
    assert main(["import", str(tmp_path / "one.json"), *fresh]) == 0
    assert "Nothing was changed" in capsys.readouterr().out
    assert main(["import", str(tmp_path / "one.json"), "--apply", *fresh]) == 0
    assert "Imported: 1 added" in capsys.readouterr().out
    (tmp_path / "bad.csv").write_text(TABLE, encoding="utf-8")
    assert main(["import", str(tmp_path / "bad.csv"), *fresh]) == 1
    assert "line 6: refused B-5" in capsys.readouterr().out
    (tmp_path / "worse.csv").write_bytes(b"\xff\xfe")
    assert main(["import", str(tmp_path / "worse.csv"), *fresh]) == 2
    assert main(["import", str(tmp_path / "none.csv"), *fresh]) == 2
