"""What a handler asks for: the form as typed, the body as sent, a session to read or to write."""

from __future__ import annotations

import re
from collections.abc import Iterator
from typing import Annotated

from fastapi import Depends, Path, Request
from starlette.datastructures import ImmutableMultiDict

from server import storage
from server.settings import Settings
from server.web.records import Records
from server.web.who import made_by

_CONTROLS = re.compile(r"[\x00-\x08\x0b\x0c\x0e-\x1f\x7f]")

Id = Annotated[int, Path(ge=1, le=2**53)]
"""A row's number in an address; anything else is answered as missing."""


def settings_of(request: Request) -> Settings:
    """Return the settings the application was made with."""
    settings = request.app.state.settings
    assert isinstance(settings, Settings)
    return settings


def open_session(request: Request) -> Iterator[storage.Session]:
    """Open a session for one request. Rooms below save inside ``storage.write``, which is on disk when it returns."""
    records = request.app.state.records
    assert isinstance(records, Records)
    with storage.reading(records.engine) as session:
        yield session


async def read_form(request: Request) -> ImmutableMultiDict[str, str]:
    """Return the form's boxes exactly as typed (line ends as ``\\n``; characters nobody can type are dropped).

    ``made_by`` is no box to somebody who signed in: it is their name, whatever was sent.
    """
    limits = settings_of(request)
    async with request.form(max_files=0, max_fields=limits.max_fields, max_part_size=limits.max_body) as form:
        boxes = [(name, clean(value)) for name, value in form.multi_items() if isinstance(value, str)]
    if name := made_by(request):
        boxes = [(box, value) for box, value in boxes if box != "made_by"] + [("made_by", name)]
    return ImmutableMultiDict(boxes)


async def read_upload(request: Request) -> ImmutableMultiDict[str, str]:
    """Return the form's boxes as ``read_form`` does; an uploaded file stands as its text under its box's name."""
    limits = settings_of(request)
    boxes: list[tuple[str, str]] = []
    async with request.form(max_files=4, max_fields=limits.max_fields, max_part_size=limits.max_body) as form:
        for name, value in form.multi_items():
            if isinstance(value, str):
                boxes.append((name, clean(value)))
            elif value.filename:
                boxes += [(name, clean(decoded(await value.read()))), (f"{name}.name", clean(value.filename))]
    if name := made_by(request):
        boxes = [(box, value) for box, value in boxes if box != "made_by"] + [("made_by", name)]
    return ImmutableMultiDict(boxes)


def decoded(data: bytes) -> str:
    """Return the text of a file: UTF-8, or what a spreadsheet of a Western machine writes without asking."""
    for encoding in ("utf-8-sig", "utf-16") if data[:2] in (b"\xff\xfe", b"\xfe\xff") else ("utf-8-sig",):
        try:
            return data.decode(encoding)
        except UnicodeDecodeError:
            continue
    return data.decode("cp1252", errors="replace")


async def read_body(request: Request) -> bytes:
    """Return the body as sent; the size was limited on the way in."""
    return await request.body()


def clean(text: str) -> str:
    """Return typed text with plain line ends and without control characters."""
    return _CONTROLS.sub("", text.replace("\r\n", "\n").replace("\r", "\n"))


def whole(text: str) -> int | None:
    """Return a whole number from an address or a hidden box; None for anything else."""
    return int(text) if text.isascii() and text.isdecimal() and len(text) < 10 else None


FormValues = Annotated[ImmutableMultiDict[str, str], Depends(read_form)]
UploadValues = Annotated[ImmutableMultiDict[str, str], Depends(read_upload)]
Body = Annotated[bytes, Depends(read_body)]
DbSession = Annotated[storage.Session, Depends(open_session)]
