"""Jobs and their saved checks: save, print again, run again with today's values, see what moved, export."""

from server.jobs.export import RecordError, altered, export_revision, print_record
from server.jobs.fastener_record import keep_fastener, may_be_kept
from server.jobs.glue_up import glue_up_of, may_be_glued
from server.jobs.headings import FoundJobs, Job, JobLine, create, edit, get, search
from server.jobs.hindrances import Hindrance, answer, hindrances
from server.jobs.issuing import Issue, issue, issue_of, issued_pdf, issues
from server.jobs.moved import Moved, moved
from server.jobs.revisions import CheckLine, SavedRevision, checks_of, pdf_bytes, revision, revision_of, revisions_of
from server.jobs.saving import run_again, save, sheet_of
from server.jobs.shop import DISPLAYS, PAPERS, Shop, set_shop, shop

__all__ = [
    "DISPLAYS",
    "PAPERS",
    "CheckLine",
    "FoundJobs",
    "Hindrance",
    "Issue",
    "Job",
    "JobLine",
    "Moved",
    "RecordError",
    "SavedRevision",
    "Shop",
    "altered",
    "answer",
    "checks_of",
    "create",
    "edit",
    "export_revision",
    "get",
    "glue_up_of",
    "hindrances",
    "issue",
    "issue_of",
    "issued_pdf",
    "issues",
    "keep_fastener",
    "may_be_glued",
    "may_be_kept",
    "moved",
    "pdf_bytes",
    "print_record",
    "revision",
    "revision_of",
    "revisions_of",
    "run_again",
    "save",
    "search",
    "set_shop",
    "sheet_of",
    "shop",
]
