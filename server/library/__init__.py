"""The library: bonds, fasteners and materials as records with revisions, and the way from a reference to its values."""

from server.library.groups import GROUPS, STATUSES, Group
from server.library.records import Found, NotFoundError, Record, add, edit, get, in_force, revisions, search
from server.library.references import entry, resolve, standing
from server.library.uses import Use, where_used

__all__ = [
    "GROUPS",
    "STATUSES",
    "Found",
    "Group",
    "NotFoundError",
    "Record",
    "Use",
    "add",
    "edit",
    "entry",
    "get",
    "in_force",
    "resolve",
    "revisions",
    "search",
    "standing",
    "where_used",
]
