"""People: signing in and out, one's own page, and the list that whoever keeps the book looks after."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Any

from fastapi import APIRouter, Request
from fastapi.responses import RedirectResponse, Response

from server import people, sheets
from server.errors import DocumentError, JointError
from server.people import Browser, HeldError, Person, SignedIn, SignInError
from server.storage import Session
from server.web.gate import cookie_name, way_back
from server.web.inputs import DbSession, FormValues, Id, settings_of
from server.web.pages import Boxes, beside, page, path_for, see
from server.web.who import Who, current

router = APIRouter(include_in_schema=False)

LABELS = {
    "code": "One-time code",
    "name": "Name",
    "sign_in_name": "Sign-in name",
    "password": "New password",
    "again": "The same password again",
    "old": "Present password",
    "label": "What the token is for",
    "roles": "Roles",
}
_ROLE_BOXES = {
    "role_prepares": people.PREPARES,
    "role_checks": people.CHECKS,
    "role_approves": people.APPROVES,
    "role_keeps": people.KEEPS_THE_BOOK,
}
_SECRET = {"Cache-Control": "no-store"}
_BROWSERS = ("Edg/ Edge", "OPR/ Opera", "Firefox/ Firefox", "Chrome/ Chrome", "Safari/ Safari")
_SYSTEMS = ("iPhone iPhone", "iPad iPad", "Android Android", "Windows Windows", "Mac Mac", "Linux Linux")


@router.get("/sign-in", name="sign_in")
def sign_in(request: Request, session: DbSession, back: str = "", lost: str = "") -> Response:
    """Ask for name and password; where there is nobody yet, for the first person."""
    if not settings_of(request).sign_in or current(request) is not None:
        return RedirectResponse(way_back(back) or path_for(request, "start"), status_code=303)
    if not people.anybody(session):
        return see(request, "first_person")
    return page(request, "people/sign_in.html", values=Boxes(back=way_back(back)), lost=bool(lost), refused="")


@router.post("/sign-in", name="enter")
def enter(request: Request, session: DbSession, values: FormValues) -> Response:
    """Let a person in, or give the name back with the reason."""
    _refuse_without_sign_in(request)
    back = way_back(values.get("back", ""))
    try:
        who = people.sign_in(
            session,
            sign_in_name=values.get("sign_in_name", ""),
            password=values.get("password", ""),
            browser=_browser(request),
        )
    except SignInError as error:
        kept = Boxes(sign_in_name=values.get("sign_in_name", ""), back=back)
        return _refused(request, "people/sign_in.html", error, values=kept, lost=False)
    return _in(request, session, who, back)


@router.get("/sign-in/code", name="code")
def code(request: Request) -> Response:
    """Ask for a one-time code and a new password."""
    _refuse_without_sign_in(request)
    return _code_page(request, Boxes())


@router.post("/sign-in/code", name="use_code")
def use_code(request: Request, session: DbSession, values: FormValues) -> Response:
    """Set the new password and let the person in."""
    _refuse_without_sign_in(request)
    try:
        who = people.use_code(
            session,
            sign_in_name=values.get("sign_in_name", ""),
            code=values.get("code", ""),
            password=values.get("password", ""),
            again=values.get("again", ""),
            browser=_browser(request),
        )
    except DocumentError as error:
        return _code_page(request, _kept(values), beside(error, LABELS))
    except SignInError as error:
        return _refused(request, "people/code.html", error, values=_kept(values), errors=Boxes(), labels=LABELS)
    return _in(request, session, who)


@router.get("/first-person", name="first_person")
def first_person(request: Request, session: DbSession) -> Response:
    """Ask for the code that was printed at the start, and for the first person."""
    _refuse_without_sign_in(request)
    if people.anybody(session):
        return see(request, "sign_in")
    return _first_page(request, Boxes())


@router.post("/first-person", name="make_first_person")
def make_first_person(request: Request, session: DbSession, values: FormValues) -> Response:
    """Make the first person, with every role, and let them in."""
    _refuse_without_sign_in(request)
    try:
        who = people.first_person(
            session,
            code=values.get("code", ""),
            name=values.get("name", ""),
            sign_in_name=values.get("sign_in_name", ""),
            password=values.get("password", ""),
            again=values.get("again", ""),
            browser=_browser(request),
            unprintable=sheets.unprintable,
        )
    except DocumentError as error:
        return _first_page(request, _kept(values), beside(error, LABELS))
    except SignInError as error:
        return _refused(request, "people/first.html", error, values=_kept(values), errors=Boxes(), labels=LABELS)
    return _in(request, session, who)


@router.post("/sign-out", name="sign_out")
def sign_out(request: Request, session: DbSession) -> Response:
    """End this browser's session."""
    token = request.cookies.get(cookie_name(request.scope))
    if token:
        people.end(session, token)
    answer = see(request, "sign_in")
    answer.delete_cookie(cookie_name(request.scope), path="/", secure=_is_https(request), httponly=True)
    return answer


@router.get("/me", name="my_page")
def my_page(request: Request, session: DbSession, who: Who, done: str = "") -> Response:
    """Show one's own roles, password, sessions and tokens."""
    return _mine(request, session, who, done=done)


@router.post("/me/password", name="change_password")
def change_password(request: Request, session: DbSession, values: FormValues, who: Who) -> Response:
    """Change one's own password; every other session ends."""
    try:
        renewed = people.change_password(
            session,
            _own(who).id,
            old=values.get("old", ""),
            password=values.get("password", ""),
            again=values.get("again", ""),
            browser=_browser(request),
        )
    except DocumentError as error:
        return _mine(request, session, who, errors=beside(error, LABELS))
    except HeldError as error:
        return _mine(request, session, who, errors={"old": str(error)}, status=429)
    return _with_cookie(request, _to_my_page(request, "password"), renewed.token)


@router.post("/me/sessions/others/end", name="end_other_sessions")
def end_other_sessions(request: Request, session: DbSession, who: Who) -> Response:
    """Sign out everywhere but here."""
    people.end_others(session, _own(who).id, but=request.state.session_id)
    return _to_my_page(request, "sessions")


@router.post("/me/sessions/{session_id}/end", name="end_session")
def end_session(request: Request, session: DbSession, who: Who, session_id: Id) -> Response:
    """Sign out in one browser."""
    people.end_seat(session, _own(who).id, session_id)
    return _to_my_page(request, "sessions")


@router.post("/me/tokens", name="make_token")
def make_token(request: Request, session: DbSession, values: FormValues, who: Who) -> Response:
    """Make a token and show it, once."""
    label = values.get("label", "")
    try:
        token = people.make_token(session, _own(who).id, label)
    except DocumentError as error:
        return _mine(request, session, who, errors=beside(error, LABELS), values={"label": label})
    return _mine(request, session, who, token=token)


@router.post("/me/tokens/{token_id}/revoke", name="revoke_token")
def revoke_token(request: Request, session: DbSession, who: Who, token_id: Id) -> Response:
    """End a token."""
    people.revoke_token(session, _own(who).id, token_id)
    return _to_my_page(request, "token")


@router.get("/people", name="list_people")
def list_people(request: Request, session: DbSession) -> Response:
    """List everybody with their roles."""
    settings = settings_of(request)
    members = people.members(session)
    return page(request, "people/list.html", members=members, open=not settings.sign_in, meaning=people.MEANING)


@router.get("/people/new", name="new_person")
def new_person(request: Request) -> Response:
    """Show the empty form of a person."""
    return _new_page(request, Boxes())


@router.post("/people", name="add_person")
def add_person(request: Request, session: DbSession, values: FormValues, who: Who) -> Response:
    """Add a person and show their one-time code, once."""
    try:
        member, code = people.add(
            session,
            name=values.get("name", ""),
            sign_in_name=values.get("sign_in_name", ""),
            roles=_roles(values),
            by=_by(who),
            unprintable=sheets.unprintable,
        )
    except DocumentError as error:
        return _new_page(request, Boxes({**values}), beside(error, LABELS))
    return _code_given(request, member, code, new=True)


@router.get("/people/{person_id}", name="show_person")
def show_person(request: Request, session: DbSession, person_id: Id, done: str = "") -> Response:
    """Show a person, with their roles to change."""
    return _person_page(request, people.member(session, person_id), done=done)


@router.post("/people/{person_id}/roles", name="set_roles")
def set_roles(request: Request, session: DbSession, values: FormValues, person_id: Id, who: Who) -> Response:
    """Give a person the roles that are ticked."""
    try:
        people.set_roles(session, person_id, _roles(values), by=_by(who))
    except DocumentError as error:
        member = people.member(session, person_id)
        return _person_page(request, member, beside(error, LABELS), roles=_roles(values))
    return _to_person(request, person_id, "roles")


@router.post("/people/{person_id}/code", name="give_code")
def give_code(request: Request, session: DbSession, person_id: Id, who: Who) -> Response:
    """Make a one-time code for a person and show it, once."""
    member = people.member(session, person_id)
    try:
        code = people.give_code(session, person_id, by=_by(who))
    except DocumentError as error:
        return _person_page(request, member, beside(error, ()))
    return _code_given(request, member, code, new=False)


@router.post("/people/{person_id}/off", name="switch_off")
def switch_off(request: Request, session: DbSession, person_id: Id, who: Who) -> Response:
    """Let a person in no more."""
    try:
        people.switch_off(session, person_id, by=_by(who))
    except DocumentError as error:
        return _person_page(request, people.member(session, person_id), beside(error, ()))
    return _to_person(request, person_id, "off")


@router.post("/people/{person_id}/on", name="switch_on")
def switch_on(request: Request, session: DbSession, person_id: Id, who: Who) -> Response:
    """Let a person in again."""
    people.switch_on(session, person_id, by=_by(who))
    return _to_person(request, person_id, "on")


def _in(request: Request, session: Session, who: SignedIn, back: str = "") -> Response:
    """Go on with a new session; the one this browser had, if any, ends."""
    before = request.cookies.get(cookie_name(request.scope))
    if before:
        people.end(session, before)
    return _with_cookie(request, RedirectResponse(back or path_for(request, "start"), status_code=303), who.token)


def _with_cookie(request: Request, answer: Response, token: str) -> Response:
    """Hand the session to the browser, for as long as it runs; the program ends it earlier."""
    answer.set_cookie(
        cookie_name(request.scope), token, path="/", httponly=True, samesite="strict", secure=_is_https(request)
    )
    return answer


def _is_https(request: Request) -> bool:
    return request.url.scheme == "https"


def _browser(request: Request) -> Browser:
    return Browser(
        address=request.client.host if request.client else "", kind=browser_kind(request.headers.get("user-agent", ""))
    )


def browser_kind(agent: str) -> str:
    """Return what a person calls the browser.

    >>> browser_kind("Mozilla/5.0 (X11; Linux x86_64; rv:140.0) Gecko/20100101 Firefox/140.0")
    'Firefox on Linux'
    >>> browser_kind("curl/8")
    'another program'
    """
    browser = next((each.split()[1] for each in _BROWSERS if each.split()[0] in agent), "")
    system = next((each.split()[1] for each in _SYSTEMS if each.split()[0] in agent), "")
    return " on ".join(filter(None, (browser, system))) if browser else "another program"


def _refused(request: Request, template: str, error: SignInError, **context: Any) -> Response:
    held = isinstance(error, HeldError)
    headers = {"Retry-After": str(error.seconds)} if isinstance(error, HeldError) else {}
    return page(request, template, status=429 if held else 422, headers=headers, refused=str(error), **context)


def _kept(values: Mapping[str, str]) -> Boxes:
    """Return what a form gets back: all but passwords."""
    return Boxes({name: values.get(name, "") for name in ("code", "name", "sign_in_name")})


def _code_page(request: Request, values: Boxes, errors: Mapping[str, str] | None = None) -> Response:
    return _form_page(request, "people/code.html", values, errors)


def _first_page(request: Request, values: Boxes, errors: Mapping[str, str] | None = None) -> Response:
    return _form_page(request, "people/first.html", values, errors)


def _new_page(request: Request, values: Boxes, errors: Mapping[str, str] | None = None) -> Response:
    return _form_page(
        request, "people/new.html", values, errors, boxes=_ROLE_BOXES, meaning=people.MEANING, roles=_roles(values)
    )


def _form_page(
    request: Request, template: str, values: Boxes, errors: Mapping[str, str] | None, **context: Any
) -> Response:
    status = 422 if errors else 200
    return page(
        request,
        template,
        status=status,
        values=values,
        errors=Boxes(errors or {}),
        labels=LABELS,
        refused="",
        **context,
    )


def _person_page(
    request: Request,
    member: people.Member,
    errors: Mapping[str, str] | None = None,
    roles: Sequence[str] | None = None,
    done: str = "",
) -> Response:
    return page(
        request,
        "people/person.html",
        status=422 if errors else 200,
        member=member,
        errors=Boxes(errors or {}),
        labels=LABELS,
        boxes=_ROLE_BOXES,
        meaning=people.MEANING,
        roles=member.roles if roles is None else roles,
        done=done,
    )


def _code_given(request: Request, member: people.Member, code: people.OneTimeCode, *, new: bool) -> Response:
    where = settings_of(request).sign_in
    return page(request, "people/code_given.html", headers=_SECRET, member=member, code=code, new=new, sign_in=where)


def _mine(
    request: Request,
    session: Session,
    who: Person,
    *,
    errors: Mapping[str, str] | None = None,
    values: Mapping[str, str] | None = None,
    token: str = "",
    done: str = "",
    status: int = 422,
) -> Response:
    return page(
        request,
        "people/me.html",
        status=status if errors else 200,
        headers=_SECRET if token else None,
        me=people.member(session, who.id) if who.named else None,
        meaning=people.MEANING,
        seats=people.seats(session, who.id),
        here=request.state.session_id,
        tokens=people.tokens(session, who.id),
        token=token,
        done=done,
        idle=int(people.IDLE.total_seconds() // 3600),
        longest=int(people.LONGEST.total_seconds() // 3600),
        values=Boxes(values or {}),
        errors=Boxes(errors or {}),
        labels=LABELS,
    )


def _to_my_page(request: Request, done: str) -> Response:
    return RedirectResponse(f"{path_for(request, 'my_page')}?done={done}", status_code=303)


def _to_person(request: Request, person_id: int, done: str) -> Response:
    return RedirectResponse(f"{path_for(request, 'show_person', person_id=person_id)}?done={done}", status_code=303)


def _roles(values: Mapping[str, str]) -> list[str]:
    return [people.READS, *(role for box, role in _ROLE_BOXES.items() if values.get(box))]


def _by(who: Person) -> str:
    return who.name


def _own(who: Person) -> Person:
    if not who.named:
        raise JointError(_OPEN)
    return who


def _refuse_without_sign_in(request: Request) -> None:
    if not settings_of(request).sign_in:
        raise JointError(_OPEN)


_OPEN = (
    "The program runs without sign-in at this machine, so nobody has a password or a page of their own here. "
    "Start it with --sign-in to have people sign in."
)
