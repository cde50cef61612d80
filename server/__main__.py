"""The command line: serve, demo, check, backup, restore."""

from __future__ import annotations

import argparse
import io
import json
import socket
import sys
from collections.abc import Mapping, Sequence
from dataclasses import replace
from pathlib import Path
from typing import TYPE_CHECKING, Literal

from server import ENGINE
from server.errors import DocumentError, JointError

if TYPE_CHECKING:  # each command imports what it needs: a check on the command line does not wait for the web
    from sqlalchemy import Engine

    from server import documents
    from server.settings import Settings

PASS, NOT_PASSED, WRONG = 0, 1, 2
LARGEST_FILE = 1024 * 1024
DATA = Path("shop")
DEMO_DATA = Path("shop/demo")


def main(arguments: Sequence[str] | None = None) -> int:
    """Run one command; what we expect and can explain is one clear line a fault, never a traceback."""
    options = _parser().parse_args(arguments)
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):  # a console that cannot show every sign still shows the sheet
            stream.reconfigure(errors="replace")
    try:
        return int(options.run(options))
    except DocumentError as error:
        for fault in error.faults:
            print(f"bondwright: {fault}", file=sys.stderr)
        return WRONG
    except JointError as error:
        print(f"bondwright: {error}", file=sys.stderr)
        return WRONG
    except KeyboardInterrupt:
        return NOT_PASSED


def _parser() -> argparse.ArgumentParser:
    parser = argparse.ArgumentParser(prog="bondwright", description="Checks the joints of built-up members.")
    commands = parser.add_subparsers(required=True, metavar="command")

    serve = commands.add_parser("serve", help="start the app with your own shop's records")
    _address(serve)
    _data(serve, DATA)
    serve.set_defaults(run=_serve)

    demo = commands.add_parser("demo", help="start the app with the demo shop")
    _address(demo)
    _data(demo, DEMO_DATA)
    demo.set_defaults(run=_demo)

    check = commands.add_parser("check", help="run one check document")
    check.add_argument("file", type=Path, help="a check document (JSON); - reads standard input")
    check.add_argument("--json", action="store_true", help="print the result document and nothing else")
    check.add_argument("--pdf", type=Path, metavar="OUT.pdf", help="also write the sheet as PDF")
    _data(check, DATA)
    check.set_defaults(run=_check)

    backup = commands.add_parser("backup", help="copy the shop's records while people work")
    backup.add_argument("target", type=Path)
    _data(backup, DATA)
    backup.set_defaults(run=_backup)

    restore = commands.add_parser("restore", help="put a copy of the shop's records back")
    restore.add_argument("source", type=Path)
    _data(restore, DATA)
    restore.set_defaults(run=_restore)
    return parser


def _address(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--host", default="127.0.0.1", help="address to listen on (this machine only, for now)")
    parser.add_argument("--port", type=int, default=8300, help="port (default 8300)")


def _data(parser: argparse.ArgumentParser, default: Path) -> None:
    parser.add_argument("--data", type=Path, default=default, metavar="FOLDER", help=f"records (default {default})")


def _serve(options: argparse.Namespace) -> int:
    from server.settings import Settings

    return _listen(Settings(data=options.data, host=options.host, port=options.port))


def _demo(options: argparse.Namespace) -> int:
    from server.jobs import demo
    from server.settings import Settings

    settings = Settings(data=options.data, host=options.host, port=options.port)
    demo.fill(_opened(settings))
    return _listen(settings)


def _listen(settings: Settings) -> int:
    """Serve until stopped; the address is printed once it answers."""
    import uvicorn

    from server.app import create_app

    class Announced(uvicorn.Server):
        async def startup(self, sockets: list[socket.socket] | None = None) -> None:
            await super().startup(sockets)
            if self.started:
                print(f"Bondwright is ready: {replace(settings, port=port).address}  (Ctrl+C stops it)", flush=True)

    door = _door(settings)
    port = int(door.getsockname()[1])
    config = uvicorn.Config(create_app(settings), log_level="warning", access_log=False)
    Announced(config).run(sockets=[door])
    return PASS


def _door(settings: Settings) -> socket.socket:
    family = socket.AF_INET6 if ":" in settings.host else socket.AF_INET
    door = socket.socket(family, socket.SOCK_STREAM)
    if sys.platform != "win32":  # there it would let two programs share one port
        door.setsockopt(socket.SOL_SOCKET, socket.SO_REUSEADDR, 1)
    try:
        door.bind((settings.host, settings.port))
    except OSError as error:
        door.close()
        raise JointError(
            f"Port {settings.port} of {settings.host} cannot be opened ({error.strerror}). Is the program running "
            "already? Stop it, or choose another port with --port."
        ) from error
    return door


def _opened(settings: Settings) -> Engine:
    """The shop's record book, made or brought up to date."""
    from server import storage

    try:
        settings.data.mkdir(parents=True, exist_ok=True)
    except OSError as error:
        raise JointError(
            f"The folder {settings.data} cannot be made ({error.strerror}); choose another with --data."
        ) from error
    engine = storage.engine(settings.records)
    storage.migrate(engine)
    return engine


def _check(options: argparse.Namespace) -> int:
    from server import checks, documents
    from server.settings import Settings

    document = _resolved(documents.read(_text(options.file)), Settings(data=options.data))
    result = checks.run(document)
    if options.pdf is not None:
        _write_pdf(options.pdf, document, result)
    if options.json:
        print(json.dumps(result, ensure_ascii=False, allow_nan=False))
    else:
        from server import sheets

        print(sheets.terminal(result))
    return PASS if result["verdict"] == "pass" else NOT_PASSED


def _text(file: Path) -> bytes:
    """The document's bytes, bounded; what cannot be read is said in words."""
    try:
        if str(file) == "-":
            data = sys.stdin.buffer.read(LARGEST_FILE + 1)
        else:
            with file.open("rb") as stream:
                data = stream.read(LARGEST_FILE + 1)
    except OSError as error:
        raise JointError(f"{file} cannot be read ({error.strerror}); give the path of a check document.") from error
    if len(data) > LARGEST_FILE:
        raise JointError(f"{file} is larger than {LARGEST_FILE // 1024} KiB; a check document is far smaller.")
    return data


def _resolved(document: documents.Document, settings: Settings) -> documents.Document:
    """Fill references from the shop's library, where the document has any and there is a library."""
    if not document.unresolved() or not settings.records.exists():
        return document
    from server import library, storage

    with storage.reading(_opened(settings)) as session:
        return library.resolve(session, document)


def _write_pdf(target: Path, document: documents.Document, result: Mapping[str, object]) -> None:
    from server import sheets

    display: Literal["SI", "US"] = "US" if result["display"] == "US" else "SI"
    sheet = sheets.SheetData(document=document.raw, result=result, display=display, engine=ENGINE)
    _write(target, sheets.pdf(sheet))


def _write(target: Path, data: bytes) -> None:
    try:
        target.write_bytes(data)
    except OSError as error:
        raise JointError(f"{target} cannot be written ({error.strerror}); choose another place.") from error


def _backup(options: argparse.Namespace) -> int:
    from server import storage
    from server.settings import Settings

    made = storage.backup(storage.engine(_book(Settings(data=options.data))), options.target)
    print(f"Copied to {made}")
    return PASS


def _restore(options: argparse.Namespace) -> int:
    from server import storage
    from server.settings import Settings

    settings = Settings(data=options.data)
    settings.data.mkdir(parents=True, exist_ok=True)
    kept = storage.restore(options.source, settings.records)
    print(f"Put back from {options.source}" + (f"; what was there is now {kept}" if kept else ""))
    return PASS


def _book(settings: Settings) -> Path:
    if not settings.records.exists():
        raise JointError(f"There are no records in {settings.data}; name the shop's folder with --data.")
    return settings.records


if __name__ == "__main__":
    sys.exit(main())
