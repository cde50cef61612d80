"""The library over HTTP: records listed, found, added, revised, shown with what they were."""

from __future__ import annotations

import pytest
from fastapi.testclient import TestClient

from server import jobs, storage
from tests.web.approving import approve
from tests.web.test_api import changed

BOND = {
    "name": "Brackwater R2 on birch ply",
    "key": "",
    "status": "draft",
    "units": "SI",
    "shear_strength": "1.28",
    "thickness": "0.2 mm",
    "peel_strength": "145 psi",
    "duration_factors": "permanent 0.6, medium-term 0.8",
    "source": "Report MF-26-03 (invented)",
    "details.product": "Brackwater R2",
    "details.test_method": "rolling shear blocks",
}
MATERIAL = {"name": "Softwood C24", "status": "draft", "units": "SI", "kind": "timber", "E": "11000", "bending": "24"}
FASTENER = {"name": "Ring nail", "status": "draft", "units": "SI", "shear_resistance": "380", "diameter": "2.7"}
GROUPS = {"bonds": BOND, "materials": MATERIAL, "fasteners": FASTENER}


@pytest.fixture
def bond(client: TestClient) -> str:
    """The address of one bond."""
    made = client.post("/library/new/bonds", data=BOND).headers["location"]
    approve(client, "B-001")
    return made


def revise(client: TestClient, bond: str, **changes: str) -> int:
    return client.post(f"{bond}/edit", data=BOND | {"based_on": "1"} | changes).status_code


class TestAdd:
    @pytest.mark.parametrize("group", GROUPS)
    def test_a_record_is_added_and_shown(self, client: TestClient, group: str) -> None:
        assert client.get(f"/library/new/{group}").status_code == 200
        answer = client.post(f"/library/new/{group}", data=GROUPS[group])
        assert answer.status_code == 303
        text = client.get(answer.headers["location"]).text
        assert GROUPS[group]["name"] in text
        assert "No saved check stands on it yet" in text

    def test_values_are_kept_as_typed_with_their_unit(self, client: TestClient, bond: str) -> None:
        text = client.get(bond).text
        for shown in ("1.28 MPa", "0.2 mm", "145 psi", "permanent 0.6, medium-term 0.8", "Report MF-26-03"):
            assert shown in text

    def test_a_shop_in_inch_pound_units_types_them_bare(self, client: TestClient) -> None:
        client.post("/shop", data={"name": "Ottermoor", "paper": "Letter", "display": "US"})
        form = client.get("/library/new/bonds").text
        assert 'name="units" value="US"' in form
        assert '<span class="unit">psi</span>' in form
        answer = client.post("/library/new/bonds", data=BOND | {"units": "US", "shear_strength": "180"})
        assert "180 psi" in client.get(answer.headers["location"]).text

    def test_a_bad_entry_keeps_the_typed_text_and_saves_nothing(self, client: TestClient) -> None:
        wrong = {
            "name": "",
            "shear_strength": "4 kg",
            "thickness": "-1",
            "status": "approved",
            "details.cure": "24 h <at> 20",
        }
        answer = client.post("/library/new/bonds", data=BOND | wrong)
        assert answer.status_code == 422
        assert "4 entries need another look" in answer.text
        assert 'value="4 kg"' in answer.text
        assert "is a mass, not a stress" in answer.text
        assert 'id="f-thickness-message"' in answer.text
        assert 'id="f-status-message"' in answer.text
        assert 'value="24 h &lt;at&gt; 20"' in answer.text
        assert "Brackwater" not in client.get("/library").text

    def test_a_fault_in_a_folded_part_opens_it(self, client: TestClient) -> None:
        assert '<details class="fold">' in client.get("/library/new/bonds").text
        answer = client.post("/library/new/bonds", data=BOND | {"duration_factors": "permanent"})
        assert answer.status_code == 422
        assert '<details class="fold" open>' in answer.text
        assert 'id="f-duration_factors-message"' in answer.text
        assert "Brackwater" not in client.get("/library").text

    @pytest.mark.parametrize(
        ("box", "text"),
        [
            ("shear_strength", "nan"),
            ("shear_strength", "1e999"),
            ("shear_strength", "strong"),
            ("shear_strength", "9" * 4000),
            ("peel_strength", "6.8 N/mm"),
            ("thickness", "0"),
            ("duration_factors", "permanent -1"),
            ("factors", "wet, wet"),
            ("status", "blessed"),
            ("key", "a b/c"),
        ],
    )
    def test_nonsense_is_refused_beside_its_box(self, client: TestClient, box: str, text: str) -> None:
        answer = client.post("/library/new/bonds", data=BOND | {box: text})
        assert answer.status_code == 422
        assert f'id="f-{box}-message"' in answer.text
        assert "Brackwater" not in client.get("/library").text

    def test_a_taken_key_is_refused(self, client: TestClient, bond: str) -> None:
        answer = client.post("/library/new/materials", data=MATERIAL | {"key": "b-001"})
        assert answer.status_code == 422
        assert "is taken" in answer.text

    def test_an_unknown_group_is_missing(self, client: TestClient) -> None:
        for answer in (client.get("/library/new/rivets"), client.post("/library/new/rivets", data=BOND)):
            assert answer.status_code == 404
            assert "bonds, fasteners, materials" in answer.text


class TestRevise:
    def test_the_form_comes_filled(self, client: TestClient, bond: str) -> None:
        form = client.get(f"{bond}/edit").text
        assert 'value="1.28"' in form
        assert 'value="145 psi"' in form
        assert 'value="permanent 0.6, medium-term 0.8"' in form
        assert 'name="based_on" value="1"' in form
        assert "Save revision 2" in form

    def test_a_change_makes_a_new_revision_and_keeps_the_old(self, client: TestClient, bond: str) -> None:
        assert revise(client, bond, shear_strength="1.58", status="draft", reason="coupon 8 set aside") == 303
        text = client.get(bond).text
        assert "1.58 MPa" in text
        assert "coupon 8 set aside" in text
        assert "take <a" in text  # a reference without a revision still takes the approved one
        old = client.get(f"{bond}?revision=1").text
        assert "1.28 MPa" in old
        assert "1.58 MPa" not in old
        assert "kept as it was" in old

    def test_saving_the_form_as_it_came_changes_no_value(self, client: TestClient, bond: str) -> None:
        before = client.get("/api/records/B-001").json()["entry"]
        assert revise(client, bond) == 303
        after = client.get("/api/records/B-001").json()["entry"]
        assert after | {"revision": 1, "status": "approved"} == before

    def test_a_change_from_an_older_revision_is_refused(self, client: TestClient, bond: str) -> None:
        assert revise(client, bond, shear_strength="1.58") == 303
        answer = client.post(f"{bond}/edit", data=BOND | {"based_on": "1", "shear_strength": "9.99"})
        assert answer.status_code == 422
        assert "was changed meanwhile" in answer.text
        assert 'value="9.99"' in answer.text
        assert "9.99" not in client.get(bond).text

    def test_a_bad_entry_makes_no_revision(self, client: TestClient, bond: str) -> None:
        assert revise(client, bond, shear_strength="4 kg") == 422
        assert client.get("/api/records/B-001").json()["revision"] == 1

    @pytest.mark.parametrize("key", ["B-999", "%00", "..", "a%20b", "x" * 300, "B-001;"])
    def test_a_missing_record_says_so(self, client: TestClient, bond: str, key: str) -> None:
        for answer in (
            client.get(f"/library/{key}", follow_redirects=True),
            client.get(f"/library/{key}/edit", follow_redirects=True),
            client.post(f"/library/{key}/edit", data=BOND),
        ):
            assert answer.status_code in ((200, 404, 405) if key == ".." else (404,))

    @pytest.mark.parametrize("revision", ["2", "0", "999999999"])
    def test_a_missing_revision_says_which_there_are(self, client: TestClient, bond: str, revision: str) -> None:
        answer = client.get(f"{bond}?revision={revision}")
        assert answer.status_code == 404
        assert "it has revisions 1 to 1" in answer.text


class TestUse:
    def test_a_record_says_which_checks_stand_on_it(self, client: TestClient, bond: str) -> None:
        client.post("/jobs", data={"number": "26-014", "title": "Planks", "paper": "A4", "display": "SI"})
        document = changed("adhesives/glue", {"record": "B-001"})
        with storage.reading(client.app.state.records.engine) as session:  # type: ignore[attr-defined]
            saved = jobs.save(session, job_id=1, raw=document, mark="B7")
        text = client.get(bond).text
        assert "No saved check" not in text
        assert f'<a href="/checks/{saved.check_id}/revisions/1">B7</a>' in text
        assert '<a href="/jobs/1">26-014</a>' in text
        assert 'class="word">Pass<' in text


class TestList:
    def test_it_finds_by_words_group_and_state(self, client: TestClient, bond: str) -> None:
        client.post("/library/new/materials", data=MATERIAL)
        assert "M-001" not in client.get("/library?q=brackwater").text
        assert "B-001" in client.get("/library?q=rolling").text
        assert "B-001" not in client.get("/library?group=materials").text
        only_drafts = client.get("/library?status=draft").text
        assert "M-001" in only_drafts
        assert "B-001" not in only_drafts

    def test_nothing_found_is_said(self, client: TestClient, bond: str) -> None:
        assert "No record fits" in client.get("/library?q=zebra").text

    def test_an_empty_library_says_what_to_do(self, client: TestClient) -> None:
        text = client.get("/library").text
        assert "Nothing here yet" in text
        assert "Nothing here yet" in client.get("/library?group=bonds").text
        assert "/library/new/bonds" in text

    @pytest.mark.parametrize(
        "query", ['q="', "q=NEAR(", "group=x", "status=x", "start=-1", f"start={'9' * 30}", "q=%00", "q=%ff%fe"]
    )
    def test_no_address_breaks_it(self, client: TestClient, bond: str, query: str) -> None:
        assert client.get(f"/library?{query}").status_code == 200

    def test_many_records_come_in_pages(self, client: TestClient) -> None:
        for _ in range(51):
            client.post("/library/new/fasteners", data=FASTENER)
        first = client.get("/library").text
        assert "Records 1 to 50 of 51" in first
        assert "F-051" not in first
        assert "F-051" in client.get("/library?start=50").text
