"""The library's evidence over HTTP: coupon sets, values, questions, approval, the evidence page."""

from __future__ import annotations

import html
import re
from collections.abc import Iterator
from pathlib import Path

import pytest
from fastapi import FastAPI
from fastapi.testclient import TestClient

from server import library, people, storage
from server.app import create_app
from server.settings import Settings
from server.web.inputs import decoded
from tests.checks.coupon_sets import ROLLING_SHEAR
from tests.web.conftest import ADDRESS

SET = {
    "name": "Rolling shear, web to flange",
    "units": "SI",
    "way": "stress MPa",
    "property": "bond shear",
    "all.lot": "24-117",
    "statistic.distribution": "lognormal",
    "statistic.coverage": "0.95",
    "statistic.confidence": "0.75",
    "statistic.scatter": "unknown",
    "details.surface_a_material": "softwood plywood",
    "reason": "",
}
ROWS = {f"coupons[{i}].reading": str(stress) for i, stress in enumerate(ROLLING_SHEAR)}
BROKE = {f"coupons[{i}].substrate": "20" if i == 7 else "100" for i in range(12)} | {"coupons[7].adhesive": "80"}
EXCLUDED = {
    "excluded[0].number": "8",
    "excluded[0].cause": "closed after 19 min",
    "excluded[0].stop": "clock at 10 min",
}
PASTED = "stress MPa\tAF\tSF\n" + "\n".join(
    f"{stress}\t{80 if i == 7 else 0}\t{20 if i == 7 else 100}" for i, stress in enumerate(ROLLING_SHEAR)
)


def text_of(answer: object) -> str:
    return re.sub(r"\s+", " ", re.sub(r"<[^>]+>", " ", answer.text))  # type: ignore[attr-defined]


@pytest.fixture
def coupon_set(client: TestClient) -> str:
    """The address of the demo's set of 12, the low one in it."""
    answer = client.post("/library/new/sets", data=SET | ROWS | BROKE)
    assert answer.status_code == 303, text_of(answer)
    return str(answer.headers["location"])


class TestSet:
    def test_the_form_opens_with_a_dozen_rows(self, client: TestClient) -> None:
        text = client.get("/library/new/sets").text
        assert 'name="coupons[11].reading"' in text
        assert "Paste from a spreadsheet" in text

    def test_a_set_is_kept_and_shown_with_the_low_one_flagged(self, client: TestClient, coupon_set: str) -> None:
        shown = client.get(coupon_set)
        text = text_of(shown)
        assert "no. 8 apart" in text
        assert "Stands apart from the others" in text
        assert "1.275 MPa characteristic value" in text  # the demo's 1.28, log-normal with all 12
        assert "Look for the cause" in text

    def test_an_excluded_coupon_shows_both_answers(self, client: TestClient, coupon_set: str) -> None:
        form = client.get(f"{coupon_set}/edit?exclude=8").text
        assert 'name="excluded[0].number" value="8"' in form
        answer = client.post(
            f"{coupon_set}/edit", data=SET | ROWS | BROKE | EXCLUDED | {"based_on": "1", "reason": "cause found"}
        )
        assert answer.status_code == 303, text_of(answer)
        text = text_of(client.get(coupon_set))
        assert "Without no. 8 With every coupon" in text
        assert "1.584 MPa 1.275 MPa" in text
        assert "closed after 19 min" in text
        assert "clock at 10 min" in text
        assert "kept as it was" in client.get(f"{coupon_set}?revision=1").text

    def test_a_new_revision_needs_its_reason(self, client: TestClient, coupon_set: str) -> None:
        answer = client.post(f"{coupon_set}/edit", data=SET | ROWS | BROKE | EXCLUDED | {"based_on": "1"})
        assert answer.status_code == 422
        assert "reason is empty" in answer.text
        assert 'value="closed after 19 min"' in answer.text

    @pytest.mark.parametrize(
        ("wrong", "box", "words"),
        [
            ({"coupons[2].reading": "strong"}, "coupons[2].reading", "Coupon 3, reading"),
            ({"coupons[2].adhesive": "30"}, "coupons[2].adhesive", "total 130"),
            ({"all.date_bonded": "03/04/25"}, "all.date_bonded", "year-month-day"),
            ({"all.date_bonded": "2026-03-03", "all.date_tested": "2026-03-02"}, "all.date_tested", "before the day"),
            ({"excluded[0].number": "40", "excluded[0].cause": "x"}, "excluded[0].number", "not the number"),
            ({"excluded[0].number": "3"}, "excluded[0].cause", "write it"),
            ({"statistic.coverage": "5"}, "statistic.coverage", "0.95"),
            ({"property": "blessing"}, "property", "blessing"),
            ({"name": ""}, "name", "empty"),
            ({"links.product": "A-999"}, "links.product", "A-999"),
            ({"way": "load kN"}, "all.area", "needs the bonded area"),
        ],
    )
    def test_a_refused_form_comes_back_as_typed_with_its_message(
        self, client: TestClient, wrong: dict[str, str], box: str, words: str
    ) -> None:
        answer = client.post("/library/new/sets", data=SET | ROWS | BROKE | wrong)
        assert answer.status_code == 422
        assert f'href="#f-{box}"' in answer.text
        assert f'id="f-{box}"' in answer.text
        assert words in answer.text
        assert 'value="1.92"' in answer.text
        assert "No record fits" in client.get("/library?q=rolling").text

    def test_a_change_from_an_older_revision_is_refused(self, client: TestClient, coupon_set: str) -> None:
        late = SET | ROWS | BROKE | {"reason": "again"}
        assert client.post(f"{coupon_set}/edit", data=late | {"based_on": "1"}).status_code == 303
        answer = client.post(f"{coupon_set}/edit", data=late | {"based_on": "1"})
        assert answer.status_code == 422
        assert "was changed meanwhile" in answer.text

    def test_a_fasteners_coupons_are_loads(self, client: TestClient) -> None:
        loads = [412, 388, 455, 367, 430, 402, 441, 379, 418, 395]
        rows = {f"coupons[{i}].reading": str(load) for i, load in enumerate(loads)}
        made = {"name": "Screws", "units": "US", "way": "load lbf", "property": "fastener shear"}
        answer = client.post("/library/new/sets", data=made | rows)
        assert answer.status_code == 303, text_of(answer)
        text = text_of(client.get(answer.headers["location"]))
        assert "lbf characteristic value" in text
        assert "Mean 408.7 lbf" in text
        assert "MPa" not in text


class TestTyping:
    def test_the_answer_follows_while_typing(self, client: TestClient) -> None:
        answer = client.post("/library/form/sets/preview", data=SET | ROWS | EXCLUDED)
        assert answer.status_code == 200
        assert "Both answers" in answer.text
        assert "<svg" in answer.text
        row = re.search(r'id="ask-7" hx-swap-oob="true">(.*?)</span>\n?', answer.text, re.DOTALL)
        assert row is not None
        assert "Coupon 8 is excluded" in row[1]
        assert "What now stops it" not in answer.text.split("ask-7")[0][-400:]

    def test_a_question_stands_under_its_row(self, client: TestClient) -> None:
        typed = SET | {f"coupons[{i}].reading": text for i, text in enumerate(["1.8", "1.9", "18.5", "1.85"])}
        answer = client.post("/library/form/sets/preview", data=typed).text
        assert "a slip of unit, decimal or size?" in answer.split('id="ask-2"')[1].split('id="ask-3"')[0]

    def test_a_fault_stands_under_its_row_and_the_page_stays(self, client: TestClient) -> None:
        answer = client.post("/library/form/sets/preview", data=SET | ROWS | {"coupons[4].reading": "x"})
        assert answer.status_code == 200
        assert 'class="message"' in answer.text.split('id="ask-4"')[1].split('id="ask-5"')[0]

    def test_nothing_typed_waits_in_words(self, client: TestClient) -> None:
        assert "follow while you type" in client.post("/library/form/sets/preview", data=SET).text

    def test_pasted_rows_fill_the_grid(self, client: TestClient) -> None:
        answer = client.post("/library/form/sets", data=SET | {"paste": PASTED, "do": "take"})
        assert "12 coupons taken over" in answer.text
        assert 'name="coupons[7].reading" value="1.12"' in answer.text
        assert 'name="coupons[7].adhesive" value="80"' in answer.text

    def test_an_uploaded_file_does_the_same(self, client: TestClient) -> None:
        for data in (PASTED.encode(), ("\ufeff" + PASTED.replace("\t", ";")).encode()):
            answer = client.post(
                "/library/form/sets", data=SET | {"do": "take"}, files={"file": ("set.csv", data, "text/csv")}
            )
            assert "12 coupons taken over" in answer.text

    def test_lines_that_cannot_be_read_are_named_and_nothing_is_taken(self, client: TestClient) -> None:
        bad = PASTED.replace("1.66", "one").replace("1.97", "ten")
        answer = client.post("/library/form/sets", data=SET | {"paste": bad, "do": "take"})
        assert "Nothing was taken over. 2 lines need another look" in answer.text
        assert "Line 5" in answer.text
        assert "Line 8" in answer.text
        assert "one\t" in answer.text  # what was pasted is still there

    def test_more_rows_and_columns_keep_what_is_typed(self, client: TestClient) -> None:
        answer = client.post("/library/form/sets", data=SET | ROWS | {"rows": "12", "do": "rows"}).text
        assert 'name="coupons[17].reading"' in answer
        assert 'name="coupons[7].reading" value="1.12"' in answer
        answer = client.post("/library/form/sets", data=SET | ROWS | {"column.lot": "yes", "do": "columns"}).text
        assert 'name="coupons[0].lot"' in answer

    def test_more_coupons_than_the_grid_takes_are_refused_in_words(self, client: TestClient) -> None:
        many = "stress MPa\n" + "\n".join("1.8" for _ in range(201))
        answer = client.post("/library/form/sets", data=SET | {"paste": many, "do": "take"})
        assert "the grid, which takes 200" in answer.text

    @pytest.mark.parametrize("key", ["T-999", "B 1", "%00"])
    def test_a_missing_set_is_missing(self, client: TestClient, key: str) -> None:
        assert client.post(f"/library/form/sets?key={key}", data=SET).status_code == 404

    def test_a_spreadsheets_own_letters_are_read(self) -> None:
        assert decoded("20 °C".encode("cp1252")) == "20 °C"
        assert decoded("20 °C".encode("utf-16")) == "20 °C"
        assert decoded(b"\xef\xbb\xbf20") == "20"


class TestValue:
    @pytest.fixture
    def value(self, client: TestClient, coupon_set: str) -> str:
        form = client.get("/library/new/values?set=T-001")
        assert 'value="T-001 rev 1"' in form.text
        boxes = dict(re.findall(r'<input type="[a-z]+" id="[^"]*" name="([^"]+)" value="([^"]*)"', form.text))
        answer = client.post("/library/new/values", data=boxes | {"property": "bond shear", "origin": "coupon set"})
        assert answer.status_code == 303, text_of(answer)
        return str(answer.headers["location"])

    def test_it_is_found_from_the_set_with_its_conditions(self, client: TestClient, value: str) -> None:
        text = text_of(client.get(value))
        assert "Bond shear 1.275 MPa" in text
        assert "softwood plywood" in text
        assert "From coupon set T-001 rev 1" in text

    def test_it_says_what_keeps_it_from_approval(self, client: TestClient, value: str) -> None:
        text = text_of(client.get(value))
        assert "What still stands against it" in text
        assert "Not answered yet: Coupon 8 lies farther" in text
        answer = client.post(f"{value}/approve", data={"note": "seen"})
        assert answer.status_code == 422
        assert "seen</textarea>" in answer.text

    def test_a_question_is_answered_where_it_is_asked(self, client: TestClient, value: str) -> None:
        for question in re.findall(r'name="question" value="(\w+)"', client.get(value).text):
            address = "/library/T-001/revisions/1/answers"
            empty = client.post(address, data={"question": question, f"answer-{question}": " ", "back": "V-001"})
            assert empty.status_code == 422
            assert f'id="f-answer-{question}-message"' in empty.text
            done = client.post(address, data={"question": question, f"answer-{question}": "seen", "back": "V-001"})
            assert done.headers["location"] == f"/library/V-001#q-{question}"
        assert "Not answered yet" not in text_of(client.get(value))

    def test_sent_for_approval_it_waits_on_the_front_page(self, client: TestClient, value: str) -> None:
        assert client.post(f"{value}/put-forward", data={"revision": "1"}).status_code == 303
        assert "provisional" in client.get(value).text
        front = text_of(client.get("/library"))
        assert "Waiting for approval V-001 rev 1" in front

    def test_it_is_held_and_taken_back_with_a_reason(self, client: TestClient, value: str) -> None:
        refused = client.post(f"{value}/state", data={"status": "on hold", "reason": ""})
        assert refused.status_code == 422
        assert "write why" in refused.text
        assert client.post(f"{value}/state", data={"status": "on hold", "reason": "bad lot"}).status_code == 303
        assert "bad lot" in client.get(value).text
        assert client.post(f"{value}/state", data={"status": "draft", "reason": "lot was good"}).status_code == 303

    def test_a_data_sheet_value_stays_indicative(self, client: TestClient) -> None:
        sheet = {"name": "From the can", "property": "bond shear", "origin": "data sheet", "value": "18", "units": "SI"}
        assert client.post("/library/new/values", data=sheet).status_code == 422  # no source
        made = client.post("/library/new/values", data=sheet | {"source": "Supplier, 2026-01 (invented)"})
        text = text_of(client.get(made.headers["location"]))
        assert "18 MPa" in text
        assert "compares adhesives" in text

    @pytest.mark.parametrize(
        ("wrong", "box"),
        [
            ({"value": "99"}, "value"),
            ({"thickness_least": "0.1"}, "thickness_most"),
            ({"service_lowest": "cold", "service_highest": "50"}, "service_lowest"),
            ({"links.set": ""}, "links.set"),
            ({"links.set": "T-777"}, "links.set"),
            ({"property": "pull-off"}, "links.set"),
            ({"glass_transition": "x"}, "glass_transition"),
        ],
    )
    def test_nonsense_is_refused_beside_its_box(
        self, client: TestClient, coupon_set: str, wrong: dict[str, str], box: str
    ) -> None:
        good = {"name": "V", "property": "bond shear", "origin": "coupon set", "links.set": "T-001", "units": "SI"}
        answer = client.post("/library/new/values", data=good | wrong)
        assert answer.status_code == 422
        assert f'id="f-{box}-message"' in answer.text, text_of(answer)
        assert client.post("/library/new/values", data=good).status_code == 303

    def test_the_evidence_page_is_handed_out(self, client: TestClient, value: str) -> None:
        answer = client.get(f"{value}/revisions/1/evidence.pdf")
        assert answer.headers["content-type"] == "application/pdf"
        assert answer.content.startswith(b"%PDF")
        assert answer.content == client.get(f"{value}/revisions/1/evidence.pdf").content
        assert client.get("/library/T-001/revisions/1/evidence.pdf").status_code == 404
        assert client.get(f"{value}/revisions/2/evidence.pdf").status_code == 404
        none = client.get(f"{value}/revisions/1/evidence-as-approved.pdf")
        assert none.status_code == 404
        assert "one is kept when a value is approved" in text_of(none)


PLAIN = {
    "products": {"maker": "Brackwater", "parts": "2", "thickness_least": "0.05", "thickness_most": "0.3"},
    "preparations": {"steps": "plane\nbond within 24 h", "time_window": "24 h"},
    "cures": {"temperature": "20", "time": "12 h under pressure", "days_before_load": "7"},
    "lots": {"number": "24-117", "maker_expiry": "2027-01-31"},
}


class TestPlainRecords:
    @pytest.mark.parametrize("group", PLAIN)
    def test_it_is_added_shown_and_revised(self, client: TestClient, group: str) -> None:
        form = client.get(f"/library/new/{group}")
        assert form.status_code == 200
        boxes = {"name": f"A record of {group}", "units": "SI"} | PLAIN[group]
        answer = client.post(f"/library/new/{group}", data=boxes)
        assert answer.status_code == 303, text_of(answer)
        where = answer.headers["location"]
        shown = text_of(client.get(where))
        for text in PLAIN[group].values():
            assert text.split("\n")[0] in shown
        filled = client.get(f"{where}/edit").text
        assert f'value="A record of {group}"' in filled
        again = client.post(f"{where}/edit", data=boxes | {"based_on": "1", "note": "seen again"})
        assert again.status_code == 303, text_of(again)
        assert "seen again" in client.get(where).text

    def test_a_bond_pins_a_value_and_multiplies_its_chain_once(self, client: TestClient, coupon_set: str) -> None:
        value = {"name": "V", "property": "bond shear", "origin": "coupon set", "links.set": "T-001", "units": "SI"}
        client.post("/library/new/values", data=value)
        client.post("/library/new/products", data={"name": "Brackwater R2", "units": "SI"})
        bond = {
            "name": "Web to flange",
            "units": "SI",
            "links.value:shear_strength": "V-001 rev 1",
            "links.product": "A-001",
            "thickness": "0.1",
            "chain[0].name": "moisture",
            "chain[0].value": "0.85",
            "chain[0].source": "own tests",
            "chain[0].evidence": "T-004 against T-001",
            "chain[1].name": "long term",
            "chain[1].value": "0.6",
            "chain[1].source": "EN 1995-1-1",
            "chain[1].evidence": "k_mod, permanent",
        }
        made = client.post("/library/new/bonds", data=bond)
        assert made.status_code == 303, text_of(made)
        text = text_of(client.get(made.headers["location"]))
        assert "1.275 MPa × 0.85 (moisture) × 0.6 (long term) = 0.6503 MPa" in text
        assert "V-001 rev 1" in text
        assert "A-001 rev 1 Brackwater R2" in text
        twice = client.post("/library/new/bonds", data=bond | {"chain[1].name": "moisture"})
        assert twice.status_code == 422
        assert 'id="f-chain[1].name-message"' in twice.text
        typed = client.post("/library/new/bonds", data=bond | {"shear_strength": "1.2"})
        assert 'id="f-shear_strength-message"' in typed.text
        form = client.get("/library/B-001/edit").text
        assert 'name="chain[1].name" value="long term"' in form
        assert 'value="V-001 rev 1"' in form


class TestRules:
    def test_they_are_shown_and_set(self, client: TestClient) -> None:
        assert 'value="10"' in client.get("/library/form/rules").text
        new = {"provisional_from": "3", "approved_from": "12", "adhesive_share": "20 %"}
        assert client.post("/library/form/rules", data=new).status_code == 303
        assert 'value="12"' in client.get("/library/form/rules").text

    @pytest.mark.parametrize("wrong", [{"approved_from": "2"}, {"adhesive_share": "x"}, {"provisional_from": "1e9"}])
    def test_nonsense_is_refused(self, client: TestClient, wrong: dict[str, str]) -> None:
        good = {"provisional_from": "5", "approved_from": "10", "adhesive_share": "25"}
        answer = client.post("/library/form/rules", data=good | wrong)
        assert answer.status_code == 422
        assert f'id="f-{next(iter(wrong))}-message"' in answer.text


def ten_faulty_rows() -> str:
    """A table of products: one good row, then ten that each break something."""
    good = ["products", "A-100", "Good resin", "draft", "2", "-10 degC"]
    wrong = [
        ["nonsense", "A-101", "X", "draft", "2", ""],
        ["products", "a b/c", "X", "draft", "2", ""],
        ["products", "A-103", "", "draft", "2", ""],
        ["products", "A-104", "X", "blessed", "2", ""],
        ["products", "A-105", "X", "draft", "nine", ""],
        ["products", "A-106", "X", "draft", "77", ""],
        ["products", "A-107", "X", "draft", "2", "hot"],
        ["products", "A-108", "X", "draft", "2", "4 kg"],
        ["", "A-109", "X", "draft", "2", ""],
        ["products", "", "X", "draft", "two", ""],
    ]
    head = "group,key,name,status,values.parts,values.glass_transition"
    return "\n".join([head, *(",".join(row) for row in [good, *wrong])]) + "\n"


class TestExchange:
    def planned(self, answer: object) -> dict[str, str]:
        text = answer.text  # type: ignore[attr-defined]
        return {"planned": re.findall(r'name="planned" value="(\w+)"', text)[0], "name": "t.csv"}

    def test_each_faulty_row_is_named_and_nothing_changes_before_it_is_wanted(self, client: TestClient) -> None:
        file = {"file": ("t.csv", ten_faulty_rows().encode(), "text/csv")}
        plan = client.post("/library/form/exchange/plan", files=file)
        assert plan.status_code == 200
        assert "10 rows are refused" in plan.text, text_of(plan)
        named = [int(line) for line in re.findall(r"<li>Line (\d+)", plan.text)]
        assert named == list(range(3, 13))
        assert client.get("/library/A-100").status_code == 404
        done = client.post("/library/form/exchange/apply", data=self.planned(plan) | {"text": ten_faulty_rows()})
        assert "1 added" in text_of(done)
        assert client.get("/library/A-100").status_code == 200

    def test_a_plan_that_no_longer_holds_is_shown_again(self, client: TestClient) -> None:
        plan = client.post("/library/form/exchange/plan", data={"text": ten_faulty_rows()})
        made = {"name": "Taken meanwhile", "key": "A-100", "units": "SI"}
        assert client.post("/library/new/products", data=made).status_code == 303
        late = client.post("/library/form/exchange/apply", data=self.planned(plan) | {"text": ten_faulty_rows()})
        assert late.status_code == 422
        assert "changed since" in late.text
        assert "Taken meanwhile" in client.get("/library/A-100").text

    def test_what_goes_out_comes_in_unchanged(self, client: TestClient, coupon_set: str) -> None:
        out = client.get("/library/form/exchange/library.json")
        assert "attachment" in out.headers["content-disposition"]
        back = client.post("/library/form/exchange/plan", data={"text": out.text})
        assert "0 to add, 0 to give a new revision" in text_of(back)
        for name in ("records.csv", "coupons.csv"):
            assert "T-001" in client.get(f"/library/form/exchange/tables/{name}").text
        assert client.get("/library/form/exchange/tables/people.csv").status_code == 404

    @pytest.mark.parametrize("text", ["", "  ", "{", "[]", "nonsense", "a,b\n1,2"])
    def test_what_is_no_library_is_refused_in_words(self, client: TestClient, text: str) -> None:
        answer = client.post("/library/form/exchange/plan", data={"text": text})
        assert answer.status_code in (200, 422)
        assert 'class="faults"' in answer.text


class TestTwoPeople:
    @pytest.fixture
    def house(self, tmp_path: Path) -> Iterator[dict[str, TestClient]]:
        app = create_app(Settings(data=tmp_path, sign_in=True))
        engine = app.state.records.engine
        clients = {}
        with storage.reading(engine) as session:
            people.add(session, name="Kay", sign_in_name="kay", roles=people.ROLES)
            for name, roles in (("ann", [people.PREPARES, people.APPROVES]), ("bo", [people.APPROVES])):
                member, _ = people.add(session, name=name.title(), sign_in_name=name, roles=roles)
                made = TestClient(app, base_url=ADDRESS, follow_redirects=False)
                made.headers["cookie"] = f"bondwright-8300={people.start(session, member.id)}"
                made.headers["origin"] = ADDRESS
                clients[name] = made
        yield clients
        for made in clients.values():
            made.close()

    def test_one_enters_and_another_approves(self, house: dict[str, TestClient]) -> None:
        ann, bo = house["ann"], house["bo"]
        made = ann.post("/library/new/sets", data=SET | ROWS | BROKE | EXCLUDED)
        assert made.status_code == 303, text_of(made)
        value = {"name": "V", "property": "bond shear", "origin": "coupon set", "links.set": "T-001", "units": "SI"}
        assert ann.post("/library/new/values", data=value).status_code == 303
        assert ann.post("/library/V-001/put-forward", data={"revision": "1"}).status_code == 303
        own = ann.post("/library/V-001/approve", data={"revision": "1"})
        assert own.status_code == 422
        assert "another person approves" in own.text
        assert bo.post("/library/new/values", data=value).status_code == 403
        page = bo.get("/library/V-001")
        assert "Nothing stands against its approval" in page.text, text_of(page)
        assert bo.post("/library/V-001/approve", data={"revision": "1", "note": "faces seen"}).status_code == 303
        text = text_of(bo.get("/library/V-001"))
        assert "Approved by Bo" in text
        assert "faces seen" in text
        assert "Ann" in text


class TestLotStates:
    def test_a_lot_is_released_and_opened_and_what_is_wrong_is_said_beside_its_box(self, client: TestClient) -> None:
        client.post("/library/new/lots", data={"name": "R2", "number": "24-117", "maker_expiry": "2999-01-31"})
        page = client.get("/library/L-001").text
        assert "status-quarantined" in page
        assert "Release it" in page
        assert client.post("/library/L-001/approve", data={"revision": "1"}).status_code == 303
        assert "status-released" in client.get("/library/L-001").text
        refused = client.post("/library/L-001/state", data={"status": "opened", "reason": "job 7", "on": "3/4/26"})
        assert refused.status_code == 422
        assert "year-month-day" in text_of(refused)
        assert 'value="3/4/26"' in refused.text
        done = client.post("/library/L-001/state", data={"status": "opened", "reason": "job 7", "on": "2026-04-03"})
        assert done.status_code == 303
        assert "2026-04-03" in client.get("/library/L-001").text
        refused = client.post("/library/L-001/state", data={"status": "extended", "reason": "retest"})
        assert "name the coupon set of the retest" in text_of(refused)


class TestBeyondTheGrid:
    """The grid takes 200 coupons, a document 2000: what does not fit is refused by name, never dropped."""

    @pytest.fixture
    def large(self, client: TestClient) -> str:
        app = client.app
        assert isinstance(app, FastAPI)
        values = {"property": "bond shear", "coupons": [{"stress": round(5 + 0.01 * i, 2)} for i in range(201)]}
        with storage.reading(app.state.records.engine) as session:
            library.add(session, group="sets", name="Large", values=values, made_by="Ann")
        return "/library/T-001"

    def test_a_larger_set_is_not_changed_in_the_grid_and_a_coupon_is_excluded_beside_it(
        self, client: TestClient, large: str
    ) -> None:
        for answer in (client.get(f"{large}/edit"), client.post(f"{large}/edit", data={"name": "x", "reason": "y"})):
            assert answer.status_code == 422
            assert "coupons: T-001 rev 1 has 201 of them; the grid takes 200" in text_of(answer)
        for wrong, box in (({"number": "202", "cause": "c"}, "number"), ({"number": "8"}, "cause"), ({}, "number")):
            refused = client.post(f"{large}/exclude", data={"revision": "1"} | wrong)
            assert refused.status_code == 422
            assert f'id="f-{box}-message"' in refused.text
        done = client.post(f"{large}/exclude", data={"number": "201", "cause": "cut askew", "revision": "1"})
        assert done.status_code == 303
        assert "cut askew" in client.get(large).text

    def test_more_rows_than_the_grid_has_are_refused_with_what_to_do(self, client: TestClient) -> None:
        pasted = "stress MPa\n" + "\n".join(str(5 + i / 100) for i in range(201))
        answer = client.post("/library/form/sets", data={"do": "take", "paste": pasted, "way": "stress MPa"})
        assert "201 coupons are too many for the grid, which takes 200. Bring a larger set" in text_of(answer)
        boxes = {"name": "x", "property": "bond shear", "way": "stress MPa", "coupons[250].reading": "5"}
        refused = client.post("/library/new/sets", data=boxes)
        assert refused.status_code == 422
        assert "Coupon 251 is beyond the grid" in text_of(refused)


NONSENSE = (
    "<script>alert(1)</script>",
    "-4",
    "1e400",
    "9" * 1000,
    "2026-02-30",
    "T-999 rev 99999999999",
    "=1+1",
    "\u202e4",
)
NEEDED = {
    "values": {"property": "bond shear", "origin": "published"},
    "sets": {"property": "bond shear", "way": "stress MPa", "coupons[0].reading": "5"},
}


class TestNonsenseEverywhere:
    @pytest.mark.parametrize("group", library.ALL)
    def test_every_box_of_a_form_takes_nonsense_without_losing_it(self, client: TestClient, group: str) -> None:
        names = re.findall(r'<(?:input|textarea|select)[^>]* name="([^"]+)"', client.get(f"/library/new/{group}").text)
        names = [each for each in dict.fromkeys(names) if not re.match(r"coupons\[[1-9]", each)]
        assert len(names) > 8
        for text in NONSENSE:
            answer = client.post(f"/library/new/{group}", data=dict.fromkeys(names, text) | {"units": "SI"})
            assert answer.status_code == 422 or group == "preparations", text  # which are plain words
            assert answer.status_code == 303 or text in html.unescape(answer.text)
            assert "Traceback" not in answer.text
        for name in names[:: max(len(names) // 6, 1)]:  # and some of them alone
            alone = {"name": "N", **NEEDED.get(group, {}), name: "1e400"}
            assert client.post(f"/library/new/{group}", data=alone).status_code in (303, 422), name

    @pytest.mark.parametrize("text", NONSENSE)
    def test_no_act_and_no_question_of_the_api_stumbles(self, client: TestClient, text: str) -> None:
        client.post("/library/new/lots", data={"name": "R2", "number": "24-117"})
        boxes = (
            "revision",
            "status",
            "reason",
            "note",
            "outside_checker",
            "checked_on",
            "on",
            "until",
            "retest",
            "number",
        )
        for act in ("approve", "put-forward", "state", "exclude", "revisions/1/answers"):
            answer = client.post(f"/library/L-001/{act}", data=dict.fromkeys(boxes, text))
            assert answer.status_code in (404, 422), act
        for address in ("/api/records", "/api/records/L-001", "/library", "/library/L-001"):
            asked = dict.fromkeys(("q", "group", "status", "adherend", "property", "start", "limit", "revision"), text)
            assert client.get(address, params=asked).status_code in (200, 404), address
