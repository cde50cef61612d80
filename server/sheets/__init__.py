"""Results drawn for people: PDF, terminal, given values and drawings. It draws stored results and never reckons."""

from server.sheets.bond_ends import blocks as end_blocks
from server.sheets.composition import STANDING_CAUTION, SheetData, given_values, headline
from server.sheets.coupon_tables import headline as coupon_headline
from server.sheets.diagrams import diagram_svg, flow_svg, joint_svg, slip_svg
from server.sheets.dot_plot import dot_plot_svg
from server.sheets.evidence import ChainLines, EvidenceData, FactorLine, Reply, area_as_typed, load_as_typed
from server.sheets.given import Group, Row, given
from server.sheets.history import Point, history_svg, in_words
from server.sheets.lasting import TITLE as LASTING
from server.sheets.loads_drawing import loads_svg
from server.sheets.one_page import OnePage
from server.sheets.one_pages import ONE_PAGES
from server.sheets.pdf import (
    UnprintableError,
    evidence_pdf,
    pdf,
    setting_out_pdf,
    traveller_pdf,
    unprintable,
    unprintable_boxes,
)
from server.sheets.plotting import texts_of
from server.sheets.probability_plot import probability_plot_svg
from server.sheets.section_drawing import section_svg
from server.sheets.setting_out import laid_out, setting_out_svg
from server.sheets.slip_parts import blocks as slip_blocks
from server.sheets.stress_drawing import TITLES as STRESSES
from server.sheets.stress_drawing import stress_svg
from server.sheets.terminal import terminal
from server.sheets.values import governing, in_units, missing, quantity, raised, spoken, utilisation, verdict

__all__ = [
    "LASTING",
    "ONE_PAGES",
    "STANDING_CAUTION",
    "STRESSES",
    "ChainLines",
    "EvidenceData",
    "FactorLine",
    "Group",
    "OnePage",
    "Point",
    "Reply",
    "Row",
    "SheetData",
    "UnprintableError",
    "area_as_typed",
    "coupon_headline",
    "diagram_svg",
    "dot_plot_svg",
    "end_blocks",
    "evidence_pdf",
    "flow_svg",
    "given",
    "given_values",
    "governing",
    "headline",
    "history_svg",
    "in_units",
    "in_words",
    "joint_svg",
    "laid_out",
    "load_as_typed",
    "loads_svg",
    "missing",
    "pdf",
    "probability_plot_svg",
    "quantity",
    "raised",
    "section_svg",
    "setting_out_pdf",
    "setting_out_svg",
    "slip_blocks",
    "slip_svg",
    "spoken",
    "stress_svg",
    "terminal",
    "texts_of",
    "traveller_pdf",
    "unprintable",
    "unprintable_boxes",
    "utilisation",
    "verdict",
]
