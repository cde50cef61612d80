"""Who may do what: one table, route by route. A route without a line here is refused, and a test names it.

A person may have several roles; each includes reading. ``NOBODY`` marks what is open to whoever finds the address.
"""

from __future__ import annotations

from server.people import APPROVES, CHECKS, KEEPS_THE_BOOK, PREPARES, READS, Person

NOBODY = "nobody"

RULES: dict[str, str] = {
    # the way in
    "static": NOBODY,
    "sign_in": NOBODY,
    "enter": NOBODY,
    "code": NOBODY,
    "use_code": NOBODY,
    "first_person": NOBODY,
    "make_first_person": NOBODY,
    "sign_out": READS,
    # one's own page
    "my_page": READS,
    "change_password": READS,
    "end_session": READS,
    "end_other_sessions": READS,
    "make_token": READS,
    "revoke_token": READS,
    # people
    "list_people": KEEPS_THE_BOOK,
    "new_person": KEEPS_THE_BOOK,
    "add_person": KEEPS_THE_BOOK,
    "show_person": KEEPS_THE_BOOK,
    "set_roles": KEEPS_THE_BOOK,
    "give_code": KEEPS_THE_BOOK,
    "switch_off": KEEPS_THE_BOOK,
    "switch_on": KEEPS_THE_BOOK,
    # the shop
    "start": READS,
    "edit_shop": KEEPS_THE_BOOK,
    "save_shop": KEEPS_THE_BOOK,
    # jobs
    "list_jobs": READS,
    "show_job": READS,
    "new_job": PREPARES,
    "create_job": PREPARES,
    "edit_job": PREPARES,
    "save_job": PREPARES,
    # checks
    "show_check": READS,
    "show_revision": READS,
    "check_pdf": READS,
    "check_document": READS,
    "setting_out_pdf": READS,
    "traveller_pdf": READS,
    "compare_revisions": READS,
    "new_check": PREPARES,
    "preview_check": PREPARES,
    "preview_working": PREPARES,
    "shape_check": PREPARES,
    "save_check": PREPARES,
    "new_kind_check": PREPARES,
    "preview_kind_check": PREPARES,
    "preview_kind_working": PREPARES,
    "shape_kind_check": PREPARES,
    "save_kind_check": PREPARES,
    "edit_check": PREPARES,
    "revise_check": PREPARES,
    "run_again": PREPARES,
    "keep_fastener": PREPARES,
    "answer_hindrance": PREPARES,
    "issue_check": CHECKS,
    "issued_pdf": READS,
    # the library
    "list_records": READS,
    "show_record": READS,
    "new_record": PREPARES,
    "create_record": PREPARES,
    "edit_record": PREPARES,
    "save_record": PREPARES,
    "preview_set": PREPARES,
    "shape_set": PREPARES,
    "answer_question": PREPARES,
    "exclude_coupon": PREPARES,
    "put_forward": PREPARES,
    "approve_record": APPROVES,
    "set_record_state": APPROVES,
    "evidence_page": READS,
    "kept_evidence": READS,
    "exchange": READS,
    "export_json": READS,
    "export_csv": READS,
    "plan_import": KEEPS_THE_BOOK,
    "apply_import": KEEPS_THE_BOOK,
    "edit_rules": KEEPS_THE_BOOK,
    "save_rules": KEEPS_THE_BOOK,
    # for programs
    "openapi": READS,
    "run_check": READS,
    "find_records": READS,
    "get_record": READS,
}


def may(person: Person | None, name: str) -> bool:
    """Return whether ``person`` (None: nobody signed in) may use the route called ``name``.

    >>> may(None, "sign_in"), may(None, "list_jobs"), may(Person(1, "A"), "list_jobs"), may(Person(1, "A"), "new_job")
    (True, False, True, False)
    """
    rule = RULES.get(name)
    if rule is None:
        # Whoever sits at a machine that needs no sign-in may do everything; anybody else is refused what has no rule.
        return person is not None and not person.named
    return rule == NOBODY or (person is not None and person.may(rule))
