"""The command line: serve, demo, check, backup, restore, export, import, person."""

from __future__ import annotations

import argparse
import io
import json
import os
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
AT_THE_MACHINE = "at the machine"  # who did it, in the trail, where nobody signed in


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
    except BrokenPipeError:  # whoever reads the answer has seen enough
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
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
    export = commands.add_parser("export", help="write the whole library as plain files (JSON, CSV)")
    export.add_argument("target", type=Path, help="a folder, or a file whose name ends in .json or .csv")
    _data(export, DATA)
    export.set_defaults(run=_export)

    bring = commands.add_parser("import", help="show what a library file would change; with --apply, change it")
    bring.add_argument("file", type=Path, help="a file that export wrote, or one like it (JSON or CSV)")
    bring.add_argument("--apply", action="store_true", help="import what is not refused")
    _data(bring, DATA)
    bring.set_defaults(run=_import)
    _person(commands)
    return parser


def _address(parser: argparse.ArgumentParser) -> None:
    parser.add_argument("--host", default="127.0.0.1", help="address to listen on (default: this machine only)")
    parser.add_argument("--port", type=int, default=8300, help="port (default 8300)")
    parser.add_argument("--sign-in", action="store_true", help="have people sign in (always so beyond this machine)")
    parser.add_argument(
        "--name", action="append", default=[], metavar="HOST", help="a host name people type to reach it (repeat it)"
    )


def _data(parser: argparse.ArgumentParser, default: Path) -> None:
    parser.add_argument("--data", type=Path, default=default, metavar="FOLDER", help=f"records (default {default})")


def _serve(options: argparse.Namespace) -> int:
    return _listen(_settings(options))


def _demo(options: argparse.Namespace) -> int:
    from server.jobs import demo

    settings = _settings(options)
    demo.fill(_opened(settings))
    return _listen(settings)


def _settings(options: argparse.Namespace) -> Settings:
    """What the options say; beyond this machine people sign in as soon as there are any."""
    from server import people, storage
    from server.settings import Settings, is_loopback

    sign_in = bool(options.sign_in)
    if not sign_in and not is_loopback(options.host):
        here = Settings(data=options.data)
        if here.records.exists():
            with storage.reading(_opened(here)) as session:
                sign_in = people.anybody(session)
    return Settings(data=options.data, host=options.host, port=options.port, sign_in=sign_in, names=tuple(options.name))


def _first_words(settings: Settings) -> str:
    """What the first person needs to get in; '' where there are people, or nobody signs in."""
    from server import people, storage

    if not settings.sign_in:
        return ""
    with storage.reading(_opened(settings)) as session:
        code = people.first_code(session)
    if code is None:
        return ""
    return (
        f"Nobody can sign in yet. Open {settings.address}first-person and enter this code within an hour: {code.code}"
    )


def _listen(settings: Settings) -> int:
    """Serve until stopped; the address is printed once it answers."""
    import uvicorn

    from server.app import create_app

    class Announced(uvicorn.Server):
        async def startup(self, sockets: list[socket.socket] | None = None) -> None:
            await super().startup(sockets)
            if self.started:
                print(f"Bondwright is ready: {settings.address}  (Ctrl+C stops it)", flush=True)
                if first_words:
                    print(first_words, flush=True)

    _opened(settings).dispose()  # a book that cannot be opened is said in words before anything listens
    door = _door(settings)
    settings = replace(settings, port=int(door.getsockname()[1]))
    first_words = _first_words(settings)
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


def _person(commands: argparse._SubParsersAction[argparse.ArgumentParser]) -> None:
    """The people, looked after at the machine itself: the way back in where nobody can sign in any more."""
    person = commands.add_parser("person", help="list, add, switch off or on, make a one-time code")
    acts = person.add_subparsers(required=True, metavar="act")
    for name, words, run in (
        ("list", "list everybody with their roles", _list_people),
        ("add", "add a person and make a one-time code", _add_person),
        ("code", "make a one-time code for a new password", _give_code),
        ("off", "let a person in no more", _switch_off),
        ("on", "let a person in again", _switch_on),
    ):
        act = acts.add_parser(name, help=words)
        if name != "list":
            act.add_argument("sign_in_name", help="the name the person signs in with, such as ann.e")
        if name == "add":
            act.add_argument("--name", required=True, help="the name as it is to stand on the sheets")
            act.add_argument(
                "--role",
                action="append",
                default=[],
                help="reads, prepares, checks, approves or 'keeps the book' (repeat it; the first person gets all)",
            )
        _data(act, DATA)
        act.set_defaults(run=run)


def _list_people(options: argparse.Namespace) -> int:
    from server import people, storage

    with storage.reading(_book_of(options)) as session:
        for each in people.members(session):
            state = "off" if each.off_at else "in use" if each.has_password else "no password yet"
            print(f"{each.sign_in_name:20} {each.name:30} {state:16} {', '.join(each.roles)}")
    return PASS


def _add_person(options: argparse.Namespace) -> int:
    from server import people, sheets, storage
    from server.settings import Settings

    with storage.reading(_opened(Settings(data=options.data))) as session:
        roles = options.role or (people.ROLES if not people.anybody(session) else ())
        _, code = people.add(
            session,
            name=options.name,
            sign_in_name=options.sign_in_name,
            roles=roles,
            by=AT_THE_MACHINE,
            unprintable=sheets.unprintable,
        )
    return _print_code(options.name, code.code, code.ends_at)


def _give_code(options: argparse.Namespace) -> int:
    from server import people, storage

    with storage.reading(_book_of(options)) as session:
        member = people.find(session, options.sign_in_name)
        code = people.give_code(session, member.id, by=AT_THE_MACHINE)
    return _print_code(member.name, code.code, code.ends_at)


def _print_code(name: str, code: str, ends_at: str) -> int:
    print(f"{name} signs in with this code, once, until {ends_at}: {code}")
    return PASS


def _switch_off(options: argparse.Namespace) -> int:
    from server import people, storage

    with storage.reading(_book_of(options)) as session:
        member = people.find(session, options.sign_in_name)
        people.switch_off(session, member.id, by=AT_THE_MACHINE)
    print(f"{member.name} is switched off and signed out everywhere.")
    return PASS


def _switch_on(options: argparse.Namespace) -> int:
    from server import people, storage

    with storage.reading(_book_of(options)) as session:
        member = people.find(session, options.sign_in_name)
        people.switch_on(session, member.id, by=AT_THE_MACHINE)
    print(f"{member.name} is switched on again.")
    return PASS


def _book_of(options: argparse.Namespace) -> Engine:
    """The record book that is there already."""
    from server.settings import Settings

    settings = Settings(data=options.data)
    _book(settings)
    return _opened(settings)


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
        print(json.dumps(result, ensure_ascii=False, allow_nan=False), flush=True)
    else:
        from server import sheets

        print(sheets.terminal(result))
    return PASS if result["verdict"] == "pass" else NOT_PASSED


def _text(file: Path, largest: int = LARGEST_FILE) -> bytes:
    """The document's bytes, bounded; what cannot be read is said in words."""
    try:
        if str(file) == "-":
            data = sys.stdin.buffer.read(largest + 1)
        else:
            with file.open("rb") as stream:
                data = stream.read(largest + 1)
    except OSError as error:
        raise JointError(f"{file} cannot be read ({error.strerror}); give the path of a check document.") from error
    if len(data) > largest:
        raise JointError(f"{file} is larger than {largest // 1024} KiB; such a file is far smaller.")
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


def _export(options: argparse.Namespace) -> int:
    """Write the library: a folder gets all files, a file name says which of them."""
    from server import storage
    from server.library import exporting

    target: Path = options.target
    with storage.reading(_book_of(options)) as session:
        kind = target.suffix.lower()
        tables = exporting.export_csv(session) if kind != ".json" else {}
        whole = "".join(exporting.export_lines(session)) if kind != ".csv" else ""
    if kind == ".csv":
        _write(target, tables["records.csv"].encode())
    elif kind == ".json":
        _write(target, whole.encode())
    else:
        try:
            target.mkdir(parents=True, exist_ok=True)
        except OSError as error:
            raise JointError(f"The folder {target} cannot be made ({error.strerror}); choose another place.") from error
        for name, text in {"library.json": whole, **tables}.items():
            _write(target / name, text.encode())
    print(f"Exported to {target}")
    return PASS


def _import(options: argparse.Namespace) -> int:
    """Show the plan of an import, or carry it out; 1 where a row is refused."""
    from server import storage
    from server.library import importing
    from server.library.import_files import LARGEST
    from server.people import Person
    from server.settings import Settings

    try:
        text = _text(options.file, LARGEST).decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise JointError(f"{options.file} is not UTF-8 text (byte {error.start}); save it as UTF-8.") from None
    act = importing.apply if options.apply else importing.plan
    with storage.reading(_opened(Settings(data=options.data))) as session:
        made = act(session, text, by=Person(0, AT_THE_MACHINE), name=options.file.name)
    for line in importing.summary(made):
        print(line)
    if not options.apply and made.count(importing.ADD) + made.count(importing.CHANGE):
        print("Nothing was changed. Run it again with --apply to import what is not refused.")
    return NOT_PASSED if made.refused else PASS


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
