"""A sheet as PDF: the composed sheet set by typst, the same bytes for the same sheet wherever and whenever it is drawn.

Templates and fonts come from the package alone: no system fonts, no files outside the templates, no clock. What people
typed travels as JSON and is set as it stands. The file is PDF/A-2b, for an archive that must open it in twenty years.
"""

from __future__ import annotations

import json
import re
import threading
from collections.abc import Mapping
from functools import lru_cache
from typing import Any, Final

import typst

from server import paths
from server.errors import JointError
from server.sheets.composition import KINDS, Drawings, SheetData, compose
from server.sheets.diagrams import diagram_svg, flow_svg, slip_svg
from server.sheets.evidence import EvidenceData, compose_evidence
from server.sheets.loads_drawing import loads_svg
from server.sheets.section_drawing import section_svg
from server.sheets.setting_out_page import compose_setting_out
from server.sheets.stress_drawing import stress_svg
from server.sheets.traveller import compose_traveller

DRAWINGS = Drawings(section_svg, loads_svg, diagram_svg, flow_svg, slip_svg, stress_svg)
STANDARD: Final = "a-2b"
_UNSHOWN = re.compile(r'the text `"(.*?)"` could not be displayed')
_PROBE = b"""
#set text(font: ("Libertinus Serif", "New Computer Modern Math", "DejaVu Sans Mono"))
#json(bytes(sys.inputs.sheet)).text
"""


class UnprintableError(JointError):
    """A text holds characters that the sheet's fonts do not have."""

    def __init__(self, characters: list[str], where: str) -> None:
        listed = ", ".join(_described(each) for each in characters)
        super().__init__(
            f"{where} cannot be printed: the sheet's fonts have no {listed}. Use Latin, Greek or Cyrillic letters and "
            "common signs, and print again."
        )
        self.characters = tuple(characters)


def _described(character: str) -> str:
    codes = " ".join(f"U+{ord(each):04X}" for each in character)
    return f"“{character}” ({codes})" if character.isprintable() else codes


class _Setter:
    """One compiler kept warm: fonts are read once, and what does not change is not set again."""

    def __init__(self) -> None:
        self._compiler = typst.Compiler(ignore_system_fonts=True)
        self._lock = threading.Lock()

    def pdf(self, files: dict[str, bytes], data: dict[str, Any], timestamp: int) -> bytes:
        """Set ``data`` by the templates in ``files``; raises typst.TypstError."""
        text = json.dumps(data, ensure_ascii=False, sort_keys=True)
        with self._lock:
            made = self._compiler.compile(
                input=files,  # type: ignore[type-var]  # a dict of sources is taken; the stub does not say so
                format="pdf",
                sys_inputs={"sheet": text},
                pdf_standards=STANDARD,
                timestamp=timestamp,
                pdf_tags=True,
            )
        if not isinstance(made, bytes):
            raise JointError("The sheet could not be drawn: no file came back. Try again.")
        return made


@lru_cache(maxsize=1)
def _setter() -> _Setter:
    return _Setter()


@lru_cache(maxsize=1)
def _templates() -> dict[str, bytes]:
    folder = paths.data_folder("templates") / "sheet"
    found = {each.name: each.read_bytes() for each in sorted(folder.glob("*.typ"))}
    return found


def _sources(main: str) -> dict[str, bytes]:
    """The templates, with the one called ``main`` as the file that is set."""
    found = dict(_templates())
    return {**found, "main": found.pop(main)}


def pdf(sheet: SheetData) -> bytes:
    """The sheet as a PDF file.

    Raises
    ------
    UnprintableError
        Where a text holds a character that the fonts do not have; it names the text and the character.
    JointError
        Where the sheet cannot be set for another reason.
    """
    kind = sheet.result.get("kind", "member")
    if kind not in KINDS:
        raise JointError(f"There is no PDF for checks of kind {str(kind)[:40]!r} yet; leave the PDF out.")
    return _set("sheet.typ", compose(sheet, DRAWINGS), sheet.saved_at)


def setting_out_pdf(sheet: SheetData) -> bytes:
    """The setting-out page of a check as a PDF file; raises as ``pdf`` does, and where nothing is set out."""
    return _set("setting_out.typ", compose_setting_out(sheet), sheet.saved_at)


def traveller_pdf(sheet: SheetData) -> bytes:
    """The traveller of a glue-up as a PDF file; raises as ``pdf`` does, and where the check is no glue-up."""
    return _set("traveller.typ", compose_traveller(sheet), sheet.saved_at)


def evidence_pdf(page: EvidenceData) -> bytes:
    """The evidence page of a value as a PDF file; raises as ``pdf`` does."""
    return _set("evidence.typ", compose_evidence(page), page.made_at)


def _set(main: str, data: dict[str, Any], timestamp: int) -> bytes:
    try:
        return _setter().pdf(_sources(main), data, timestamp)
    except typst.TypstError as error:
        missing = _missing_characters(error)
        if missing:
            raise UnprintableError(missing, _where(data, missing)) from None
        raise JointError(
            f"The sheet could not be drawn ({error.message}). This is a fault of the program; keep the check and "
            "report it."
        ) from error


def unprintable(text: str) -> list[str]:
    """The characters of a text that the sheet's fonts do not have, each once, in the order in which they stand."""
    return [each for each in dict.fromkeys(text) if not _printable(each)]


def unprintable_boxes(boxes: Mapping[str, str]) -> dict[str, str]:
    """What to say beside each box of a form whose text the sheet could not print later."""
    found = {name: unprintable(text) for name, text in boxes.items() if not text.isascii()}
    return {
        name: f"The sheet's fonts have no “{'”, “'.join(characters[:5])}”; use other letters or signs here."
        for name, characters in found.items()
        if characters
    }


@lru_cache(maxsize=4096)
def _printable(character: str) -> bool:
    if character.isascii() and (character.isprintable() or character in "\n\t"):
        return True
    if "\ud800" <= character <= "\udfff":
        return False
    try:
        _setter().pdf({"main": _PROBE}, {"text": f"a{character}"}, 0)
    except typst.TypstError as error:
        if _missing_characters(error):
            return False
        raise
    return True


def _missing_characters(error: typst.TypstError) -> list[str]:
    found = _UNSHOWN.findall(f"{error.message}\n{error.diagnostic}")
    return [re.sub(r"\\u\{([0-9a-fA-F]+)\}", lambda m: chr(int(m[1], 16)), each) for each in dict.fromkeys(found)]


def _where(data: object, characters: list[str]) -> str:
    """The first text that holds one of the characters, quoted."""
    for text in _texts(data):
        if any(character in text for character in characters):
            short = text if len(text) <= 60 else text[:57] + "…"
            return f"“{short}”"
    return "A text of this sheet"


def _texts(data: object) -> list[str]:
    if isinstance(data, str):
        return [] if data.startswith("<svg") else [data]
    if isinstance(data, dict):
        return [text for each in data.values() for text in _texts(each)]
    if isinstance(data, list):
        return [text for each in data for text in _texts(each)]
    return []
