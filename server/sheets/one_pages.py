"""The kinds of check that fit on one page. A new one is one line here."""

from __future__ import annotations

from server.sheets import fastener, glue_up, load_slip, splice, strip_end
from server.sheets.one_page import OnePage

ONE_PAGES: dict[str, OnePage] = {
    page.kind: page for page in (fastener.PAGE, load_slip.PAGE, splice.PAGE, strip_end.PAGE, glue_up.PAGE)
}
