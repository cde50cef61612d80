"""The command line: exit statuses, what goes to which stream, what is written, and what is refused in words."""

from __future__ import annotations

import io
import json
import os
import random
import re
import subprocess
import sys
from collections import Counter
from collections.abc import Mapping, Sequence
from pathlib import Path
from typing import Any

import pytest

from server.__main__ import LARGEST_FILE, main
from tests.checks.test_coupons import any_document

ROOT = Path(__file__).parents[1]
DEMOS = ROOT / "seed_data" / "checks"
STATUS = {"pass": 0, "fail": 1, "not-proven": 1, "wrong": 2}
VERDICT = {"pass": "pass", "fail": "fail", "not-proven": "not proven"}

NAMED = re.compile(r"bondwright: (coupons|statistic|title|display|note|kin|kind|format)\b.*: .{10}")

COUPONS = {
    "format": "bondwright/1", "kind": "coupons", "title": "Block shear, birch on spruce",
    "coupons": [{"stress": stress} for stress in (5.1, 6.2, 5.6, 5.9, 6.4, 5.0, 5.8, 6.1)],
    "statistic": {"distribution": "normal", "coverage": 0.95, "confidence": 0.75, "scatter": "unknown"},
}  # fmt: skip


@pytest.fixture(autouse=True)
def elsewhere(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> Path:
    """Run where no shop is, so that nothing lands in the checkout."""
    monkeypatch.chdir(tmp_path)
    return tmp_path


def told(capsys: pytest.CaptureFixture[str], arguments: Sequence[str]) -> tuple[int, str, str]:
    """Exit status, standard output and standard error of one command."""
    status = main(arguments)
    out, err = capsys.readouterr()
    assert "Traceback" not in out + err
    return status, out, err


def written(folder: Path, document: Mapping[str, Any]) -> str:
    (folder / "check.json").write_text(json.dumps(document), encoding="utf-8")
    return "check.json"


def demo() -> dict[str, Any]:
    found: dict[str, Any] = json.loads((DEMOS / "pass.json").read_text("utf-8"))
    return found


def test_a_reader_that_has_seen_enough_gets_no_traceback() -> None:
    command = [sys.executable, "-m", "server", "check", str(DEMOS / "pass.json"), "--json"]
    with subprocess.Popen(command, stdout=subprocess.PIPE, stderr=subprocess.PIPE, cwd=ROOT) as run:
        assert run.stdout is not None
        assert run.stderr is not None
        run.stdout.read(10)
        run.stdout.close()
        assert run.stderr.read() == b""


class TestDemoDocuments:
    @pytest.mark.parametrize("name", STATUS)
    def test_they_end_with_0_1_1_2(self, tmp_path: Path, name: str) -> None:
        """As a shell sees it: another process, an empty home, and only JSON on standard output."""
        surroundings = {"PATH": os.environ["PATH"], "HOME": str(tmp_path), "PYTHONPATH": str(ROOT)}
        command = [sys.executable, "-m", "server", "check", str(DEMOS / f"{name}.json"), "--json"]
        done = subprocess.run(command, capture_output=True, cwd=tmp_path, env=surroundings, timeout=120, check=False)
        assert done.returncode == STATUS[name], done.stderr.decode()
        if name == "wrong":
            assert done.stdout == b""
            assert done.stderr.decode().strip().splitlines()
            return
        assert done.stderr == b""
        result = json.loads(done.stdout)
        assert (result["format"], result["verdict"]) == ("bondwright/1", VERDICT[name])
        assert list(tmp_path.iterdir()) == []

    def test_the_wrong_one_names_a_field_on_every_line(self, capsys: pytest.CaptureFixture[str]) -> None:
        status, out, err = told(capsys, ["check", str(DEMOS / "wrong.json")])
        assert (status, out) == (2, "")
        for line in err.splitlines():
            assert line.startswith("bondwright: ")
            assert ": " in line.removeprefix("bondwright: ")
        assert "basis" in err

    @pytest.mark.parametrize("name", VERDICT)
    def test_the_sheet_in_the_terminal_begins_with_the_verdict(
        self, capsys: pytest.CaptureFixture[str], name: str
    ) -> None:
        status, out, err = told(capsys, ["check", str(DEMOS / f"{name}.json")])
        assert (status, err) == (STATUS[name], "")
        assert out.startswith(VERDICT[name].upper())
        assert max(len(line) for line in out.splitlines()) <= 120


class TestOutput:
    def test_json_is_the_result_and_nothing_else(self, capsys: pytest.CaptureFixture[str]) -> None:
        from server import checks, documents

        _, out, err = told(capsys, ["check", str(DEMOS / "pass.json"), "--json"])
        assert err == ""
        assert json.loads(out) == checks.run(documents.read(demo()))

    @pytest.mark.parametrize("more", [[], ["--json"]])
    def test_the_pdf_is_written_beside_the_answer(
        self, capsys: pytest.CaptureFixture[str], tmp_path: Path, more: list[str]
    ) -> None:
        status, out, err = told(capsys, ["check", str(DEMOS / "fail.json"), "--pdf", "sheet.pdf", *more])
        assert (status, err) == (1, "")
        assert (tmp_path / "sheet.pdf").read_bytes().startswith(b"%PDF-")
        assert out.startswith("{" if more else "FAIL")

    def test_the_same_sheet_has_the_same_bytes(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        for name in ("one.pdf", "two.pdf"):
            told(capsys, ["check", str(DEMOS / "not-proven.json"), "--pdf", name])
        assert (tmp_path / "one.pdf").read_bytes() == (tmp_path / "two.pdf").read_bytes()

    def test_a_wrong_document_writes_no_pdf(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        assert told(capsys, ["check", str(DEMOS / "wrong.json"), "--pdf", "sheet.pdf"])[0] == 2
        assert not (tmp_path / "sheet.pdf").exists()

    def test_a_pdf_that_cannot_be_written_is_said(self, capsys: pytest.CaptureFixture[str]) -> None:
        status, _, err = told(capsys, ["check", str(DEMOS / "pass.json"), "--pdf", "no/such/folder/sheet.pdf"])
        assert status == 2
        assert "cannot be written" in err

    def test_inch_pound_display_prints_inch_pound(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        out = told(capsys, ["check", written(tmp_path, demo() | {"display": "US"})])[1]
        assert "psi" in out
        assert " MPa" not in out.partition("Working")[0]

    def test_standard_input_is_read_as_a_file(
        self, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
    ) -> None:
        stream = io.TextIOWrapper(io.BytesIO((DEMOS / "pass.json").read_bytes()))
        monkeypatch.setattr(sys, "stdin", stream)
        status, out, _ = told(capsys, ["check", "-", "--json"])
        assert (status, json.loads(out)["verdict"]) == (0, "pass")


class TestOtherKinds:
    def test_coupons_are_checked_like_members(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        status, out, err = told(capsys, ["check", written(tmp_path, COUPONS), "--json"])
        result = json.loads(out)
        assert (status, err, result["kind"], result["verdict"]) == (0, "", "coupons", "pass")
        assert result["n"] == 8
        assert result["mean"] == pytest.approx(sum(c["stress"] for c in COUPONS["coupons"]) / 8)
        assert told(capsys, ["check", "check.json"])[1].startswith("PASS")

    def test_coupon_documents_with_nonsense_end_with_2_and_name_the_field_or_give_finite_numbers(
        self, capsys: pytest.CaptureFixture[str], tmp_path: Path
    ) -> None:
        chance, ended = random.Random(41), Counter[int]()
        for _ in range(60):
            arguments = ["check", written(tmp_path, any_document(chance)), "--json"]
            status, out, err = told(capsys, arguments)
            ended[status] += 1
            if status == 2:
                assert out == ""
                assert all(NAMED.match(line) for line in err.splitlines()), err
            else:
                verdict = json.loads(out, parse_constant=pytest.fail)["verdict"]
                assert verdict == ("pass" if status == 0 else "not proven")
        assert min(ended[0], ended[1], ended[2]) > 5

    def test_one_coupon_alone_is_not_proven(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        status, out, _ = told(capsys, ["check", written(tmp_path, COUPONS | {"coupons": [{"stress": 5}]}), "--json"])
        assert (status, json.loads(out)["verdict"]) == (1, "not proven")

    @pytest.mark.parametrize("kind", ["raft", "", None, 7, ["member"]])
    def test_a_kind_nobody_knows_is_refused_by_name(
        self, capsys: pytest.CaptureFixture[str], tmp_path: Path, kind: object
    ) -> None:
        status, out, err = told(capsys, ["check", written(tmp_path, demo() | {"kind": kind})])
        assert (status, out) == (2, "")
        assert err.startswith("bondwright: kind: ")


class TestRefused:
    def test_a_missing_file(self, capsys: pytest.CaptureFixture[str]) -> None:
        status, out, err = told(capsys, ["check", "nowhere.json", "--json"])
        assert (status, out) == (2, "")
        assert err.count("\n") == 1
        assert "nowhere.json cannot be read" in err

    def test_a_folder_is_no_file(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        assert "cannot be read" in told(capsys, ["check", str(tmp_path)])[2]

    @pytest.mark.parametrize("text", [b"", b"hello", b'{"format": ', b"[]", b"\xff\xfe\x00", b"null"])
    def test_what_is_not_json_of_a_document(
        self, capsys: pytest.CaptureFixture[str], tmp_path: Path, text: bytes
    ) -> None:
        (tmp_path / "odd.json").write_bytes(text)
        status, out, err = told(capsys, ["check", "odd.json", "--json"])
        assert (status, out) == (2, "")
        assert err.startswith("bondwright: ")
        assert err.count("\n") == 1

    def test_a_file_without_end(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        (tmp_path / "large.json").write_bytes(b" " * (LARGEST_FILE + 1))
        assert "larger than 1024 KiB" in told(capsys, ["check", "large.json"])[2]

    def test_every_fault_has_its_line(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        document = demo() | {"colour": "red"}
        document["member"]["length"] = "4 kg"
        document["basis"] = {"method": "allowable"}
        status, _, err = told(capsys, ["check", written(tmp_path, document)])
        assert status == 2
        for field in ("colour: ", "member.length: ", "basis.safety_factor: "):
            assert f"bondwright: {field}" in err

    def test_a_reference_without_a_library_is_said(self, capsys: pytest.CaptureFixture[str], tmp_path: Path) -> None:
        document = demo()
        name = next(iter(document["adhesives"]))
        document["adhesives"][name] = {"record": "B-001"}
        status, _, err = told(capsys, ["check", written(tmp_path, document)])
        assert status == 2
        assert f"bondwright: adhesives.{name}" in err
        assert list(tmp_path.iterdir()) == [tmp_path / "check.json"]

    @pytest.mark.parametrize(
        "arguments", [[], ["weave"], ["check"], ["check", "a.json", "--jsno"], ["serve", "--port", "many"]]
    )
    def test_a_command_that_is_none_ends_with_2_and_the_usage(
        self, capsys: pytest.CaptureFixture[str], arguments: list[str]
    ) -> None:
        with pytest.raises(SystemExit) as ended:
            main(arguments)
        assert ended.value.code == 2
        out, err = capsys.readouterr()
        assert out == ""
        assert "usage: bondwright" in err

    @pytest.mark.parametrize("command", ["serve", "demo"])
    def test_the_network_is_refused_while_nobody_signs_in(
        self, capsys: pytest.CaptureFixture[str], command: str
    ) -> None:
        status, _, err = told(capsys, [command, "--host", "0.0.0.0", "--port", "0"])
        assert status == 2
        assert "0.0.0.0" in err

    def test_a_copy_of_records_that_are_not_there(self, capsys: pytest.CaptureFixture[str]) -> None:
        status, _, err = told(capsys, ["backup", "copy.db"])
        assert status == 2
        assert "There are no records in shop" in err
