"""The library: records with revisions and the evidence behind them, and the way from a reference to its values."""

from server.library.acts import approve, approve_invented, put_forward, set_status, waiting
from server.library.chains import ValueChain, chain_line, chains_on
from server.library.coupon_sets import coupon_document, coupon_result, document_of, measured_result
from server.library.differences import differences
from server.library.differing import Difference
from server.library.finding import search
from server.library.groups import ALL, EVIDENCE, GROUPS, STATUSES, Group
from server.library.history import Point, charted, history
from server.library.kept_pages import KeptPage, evidence_pdf, kept_page, kept_pdf
from server.library.life import life
from server.library.lot_life import expiry, lot_state
from server.library.obstacles import Obstacle, obstacles
from server.library.pasted import LineFault, Pasted, read_coupons
from server.library.properties import PROPERTIES, Property
from server.library.questions import Question, answer, questions
from server.library.reading import acts, get, in_force, revisions
from server.library.record import Act, Approval, Factor, Found, Link, NotFoundError, Record
from server.library.records import add, edit
from server.library.references import assembled, entry, multiplication, resolve, standing
from server.library.rules import Rules, rules, set_rules
from server.library.sets import ValueDraft, exclude, include, retention_of, value_draft
from server.library.uses import LotUses, Use, links_to, lot_uses, standing_on, where_used
from server.library.values import value_text

__all__ = [
    "ALL",
    "EVIDENCE",
    "GROUPS",
    "PROPERTIES",
    "STATUSES",
    "Act",
    "Approval",
    "Difference",
    "Factor",
    "Found",
    "Group",
    "KeptPage",
    "LineFault",
    "Link",
    "LotUses",
    "NotFoundError",
    "Obstacle",
    "Pasted",
    "Point",
    "Property",
    "Question",
    "Record",
    "Rules",
    "Use",
    "ValueChain",
    "ValueDraft",
    "acts",
    "add",
    "answer",
    "approve",
    "approve_invented",
    "assembled",
    "chain_line",
    "chains_on",
    "charted",
    "coupon_document",
    "coupon_result",
    "differences",
    "document_of",
    "edit",
    "entry",
    "evidence_pdf",
    "exclude",
    "expiry",
    "get",
    "history",
    "in_force",
    "include",
    "kept_page",
    "kept_pdf",
    "life",
    "links_to",
    "lot_state",
    "lot_uses",
    "measured_result",
    "multiplication",
    "obstacles",
    "put_forward",
    "questions",
    "read_coupons",
    "resolve",
    "retention_of",
    "revisions",
    "rules",
    "search",
    "set_rules",
    "set_status",
    "standing",
    "standing_on",
    "value_draft",
    "value_text",
    "waiting",
    "where_used",
]
